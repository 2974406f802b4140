import { angularMomentum } from "../models/angular-momentum.js";
import { oscillator } from "../models/oscillator.js";
import { Operator } from "../operator/operator.js";
import { atPlace, fileError, inside, nameError, type Place, showValue } from "./place.js";
import type { FactorFile } from "./problem-file.js";
import { conform, factorSchemas } from "./schema.js";

/** Operators of one site by name; `power` where powers are better than products. */
export interface SiteOperators {
  readonly n: number;
  readonly kets: readonly string[];
  readonly named: Readonly<Record<string, Operator>>;
  readonly power?: (name: string, exponent: number) => Operator | undefined;
  readonly isSpin: boolean;
}

/** A factor with its sites. */
export interface Factor {
  readonly name: string;
  readonly site: SiteOperators;
  /** Number of sites; undefined for a factor that is no collection. */
  readonly count: number | undefined;
  /** Place of its first site among all. */
  readonly first: number;
}

/**
 * Reads a factor.
 *
 * @param first - place of its first site among all
 * @throws GoodBasisError `file`, `option`
 */
export function readFactor(place: Place, value: unknown, first: number): Factor {
  const kinds = ["spin", "oscillator", "dimension"] as const;
  const keys = typeof value === "object" && value !== null ? kinds.filter((kind) => kind in value) : [];
  const [kind] = keys;
  if (kind === undefined || keys.length > 1) {
    throw fileError(place, 'a factor with one of the fields "spin", "oscillator" and "dimension"', showValue(value));
  }
  const file = conform(factorSchemas[kind], place, value);
  const site = siteOf(place, file);
  if (file.kets !== undefined) {
    if (file.kets.length !== site.n || new Set(file.kets).size !== site.n) {
      throw fileError(inside(place, "kets"), `${site.n} different names`, showValue(file.kets));
    }
  }
  const arrows = file.spin !== undefined && file.count !== undefined && site.n === 2;
  const kets = file.kets ?? (arrows ? ["u", "d"] : site.kets);
  return { name: file.name, site: { ...site, kets }, count: file.count, first };
}

function siteOf(place: Place, file: FactorFile): SiteOperators {
  if (file.spin !== undefined) return spinSite(inside(place, "spin"), file.spin);
  if (file.oscillator !== undefined) return oscillatorSite(inside(place, "oscillator"), file.oscillator);
  const n = file.dimension ?? 1;
  return { n, kets: Array.from({ length: n }, (_, k) => String(k)), named: {}, isSpin: false };
}

function spinSite(place: Place, spin: number | string): SiteOperators {
  const [, numerator, denominator = "1"] = /^(\d+)(?:\/([12]))?$/.exec(String(spin)) ?? [];
  const j = typeof spin === "number" ? spin : Number(numerator) / Number(denominator);
  if (Number.isNaN(j)) throw fileError(place, 'an angular momentum such as 1, 0.5 or "3/2"', showValue(spin));
  const { n, kets, x, y, z, plus, minus, squared } = atPlace(place, () => angularMomentum(j));
  return { n, kets, named: { x, y, z, plus, minus, squared }, isSpin: true };
}

function oscillatorSite(place: Place, levels: number): SiteOperators {
  const { n, kets, a, adagger, number, x, p, xPower } = atPlace(place, () => oscillator(levels));
  const signs = Array.from({ length: n }, (_, k) => (k % 2 === 0 ? 1 : -1));
  const parity = Operator.diagonal(signs, { uncertainty: "exact" });
  return {
    n,
    kets,
    named: { a, adagger, number, x, p, parity },
    power: (name, exponent) => (name === "x" ? xPower(exponent) : undefined),
    isSpin: false,
  };
}

/**
 * An operator of one site by name: "x", "a", "x^4", "|e><g|".
 *
 * @param whole - the whole name, for messages
 * @throws GoodBasisError `name` - with what there is instead
 */
export function siteOperator(place: Place, whole: string, site: SiteOperators, text: string): Operator {
  const transfer = /^\|(.+)><(.+)\|$/.exec(text);
  if (transfer !== null) {
    const [to, from] = transfer.slice(1).map((ket) => site.kets.indexOf(ket));
    if (to === undefined || from === undefined || to < 0 || from < 0) {
      throw nameError(place, whole, `the kets are ${site.kets.join(", ")}`);
    }
    return Operator.fromTriplets(site.n, [[to, from, 1]], { uncertainty: "exact" });
  }
  const [, name = text, exponent] = /^(.*)\^(\d+)$/.exec(text) ?? [];
  const operator = Object.hasOwn(site.named, name) ? site.named[name] : undefined;
  if (operator === undefined) {
    const names = [...Object.keys(site.named), "|a><b|"].join(", ");
    throw nameError(place, whole, `the operators of this factor are ${names}`);
  }
  if (exponent === undefined) return operator;
  const power = Number(exponent);
  return atPlace(place, () => site.power?.(name, power) ?? operator.power(power));
}
