import { Fraction } from "fraction.js";
import { GoodBasisError } from "../errors.js";
import { UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { rootOfUnity } from "./root-of-unity.js";

/**
 * The discrete family that the eigenvalues of a candidate belong to.
 *
 * | declaration | eigenvalues | label |
 * |---|---|---|
 * | `"j"` | j(j + 1), j = 0, 1/2, 1, … | j |
 * | `"m"` | integers and half-integers | m |
 * | `"parity"` | +1, −1 | the sign |
 * | `{ root: N }` | e^{2πik/N} | k of N |
 * | `{ rational: Q }` | fractions with denominator at most Q | the fraction |
 * | `"number"` | anything | the number with its ± |
 */
export type LabelDeclaration =
  | "j"
  | "m"
  | "parity"
  | "number"
  | { readonly root: number }
  | { readonly rational: number };

/** One member of a discrete family: the exact eigenvalue and how it is written. */
export interface FamilyMember {
  /** The eigenvalue, to half a unit in the last place; the parts of a root of unity to within two. */
  readonly re: number;
  readonly im: number;
  /** The quantum number as written in the trade: "3/2", "−1", "+1". */
  readonly text: string;
}

/** Denominators that a rational label may have when nothing is declared. */
const RECOGNISED_DENOMINATOR = 12;

/** Orders of a root of unity that are tried when nothing is declared. */
const RECOGNISED_ROOT_ORDER = 64;

/**
 * Checks a declaration.
 *
 * @throws GoodBasisError `option` for an unknown form or a number outside its range
 */
export function checkDeclaration(name: string, label: unknown): LabelDeclaration | undefined {
  if (label === undefined) return undefined;
  if (label === "j" || label === "m" || label === "parity" || label === "number") return label;
  if (typeof label === "object" && label !== null) {
    if ("root" in label && isCount(label.root)) return { root: label.root };
    if ("rational" in label && isCount(label.rational)) return { rational: label.rational };
  }
  throw new GoodBasisError(
    "option",
    `the label of candidate ${name} is declared as ${written(label)}; ` +
      'give "j", "m", "parity", "number", { root: N } or { rational: Q } with a whole number from 1 to 1000000',
    { name, label },
  );
}

function written(label: unknown): string {
  return JSON.stringify(label, (_, x: unknown) => (typeof x === "bigint" ? `${x}n` : x)) ?? String(label);
}

function isCount(x: unknown): x is number {
  return typeof x === "number" && Number.isInteger(x) && x >= 1 && x <= 1_000_000;
}

/**
 * The one member of a family within `radius` of a computed eigenvalue; undefined if there is none or more than one.
 *
 * @param value - the computed eigenvalue
 * @param radius - bound on its distance from the operator's exact eigenvalue
 */
export function onlyMember(
  family: LabelDeclaration,
  value: { readonly re: number; readonly im: number },
  radius: number,
): FamilyMember | undefined {
  if (!(radius < 1 / 16)) return undefined;
  // beyond this not every whole number is a double
  if (!(Math.hypot(value.re, value.im) <= Number.MAX_SAFE_INTEGER)) return undefined;
  const member = nearestMember(family, value, radius);
  if (member === undefined) return undefined;
  const distance = Math.hypot(member.re - value.re, member.im - value.im);
  return distance <= radius + memberError(family, member) ? member : undefined;
}

/** How far the eigenvalue of a member may be rounded: not at all where it is a double itself. */
function memberError(family: LabelDeclaration, { re, im }: FamilyMember): number {
  if (typeof family === "string") return 0;
  if ("root" in family) return re === 0 || im === 0 ? 0 : 4 * UNIT_ROUNDOFF;
  return Number.isInteger(re * 2 ** 19) ? 0 : 2 * UNIT_ROUNDOFF * Math.abs(re);
}

function nearestMember(
  family: LabelDeclaration,
  value: { readonly re: number; readonly im: number },
  radius: number,
): FamilyMember | undefined {
  if (family === "number") return undefined;
  if (family === "m") return fraction(Math.round(2 * value.re), 2);
  if (family === "parity") {
    return value.re < 0 ? { re: -1, im: 0, text: "−1" } : { re: 1, im: 0, text: "+1" };
  }
  if (family === "j") {
    const twice = Math.max(0, Math.round(Math.sqrt(Math.max(0, 1 + 4 * value.re)) - 1));
    // neighbouring eigenvalues are at least 3/4 apart, so a radius below 1/16 allows one
    return { re: (twice * (twice + 2)) / 4, im: 0, text: fraction(twice, 2).text };
  }
  if ("root" in family) {
    const turns = (Math.atan2(value.im, value.re) / (2 * Math.PI)) * family.root;
    const k = ((Math.round(turns) % family.root) + family.root) % family.root;
    // neighbours are 2 sin(π/N) apart
    if (family.root > 1 && radius >= Math.sin(Math.PI / family.root)) return undefined;
    return rootMember(k, family.root);
  }
  // two fractions with denominators up to Q differ by at least 1/Q²
  const reach = radius + 4 * UNIT_ROUNDOFF * Math.abs(value.re);
  if (reach >= 1 / (2 * family.rational * family.rational)) return undefined;
  for (let q = 1; q <= family.rational; q++) {
    const p = Math.round(value.re * q);
    if (Math.abs(p / q - value.re) <= reach) return fraction(p, q);
  }
  return undefined;
}

function fraction(numerator: number, denominator: number): FamilyMember {
  if (Number.isSafeInteger(numerator) && (denominator <= 2 || numerator % denominator === 0)) {
    const whole = numerator % denominator === 0;
    const re = numerator / denominator + 0;
    return { re, im: 0, text: (whole ? `${re}` : `${numerator}/${denominator}`).replace("-", "−") };
  }
  const reduced = new Fraction(numerator, denominator);
  return { re: reduced.valueOf(), im: 0, text: reduced.toFraction().replace("-", "−") };
}

function rootMember(k: number, order: number): FamilyMember {
  const turn = new Fraction(k, order);
  const [p, q] = [Number(turn.n), Number(turn.d)];
  if (q === 1) return { re: 1, im: 0, text: "+1" };
  if (q === 2) return { re: -1, im: 0, text: "−1" };
  if (q === 4) return p === 1 ? { re: 0, im: 1, text: "+i" } : { re: 0, im: -1, text: "−i" };
  return { ...rootOfUnity(p, q), text: `exp(2πi·${p}/${q})` };
}

/**
 * The family that a whole set of eigenvalues points to, as a proposal: the narrowest of parity, m, j and fractions for real
 * ones, the lowest order of a root of unity for others; undefined if none fits them all.
 *
 * @param values - distinct eigenvalues of one operator
 * @param radius - bound on the error of each
 * @param all - whether these are all its eigenvalues; of some only, ±1 does not make a parity
 */
export function recogniseFamily(
  values: readonly { readonly re: number; readonly im: number }[],
  radius: number,
  all = true,
): LabelDeclaration | undefined {
  const fits = (family: LabelDeclaration): boolean =>
    values.every((value) => Math.abs(value.im) <= radius && onlyMember(family, value, radius) !== undefined);
  const real = values.every((value) => Math.abs(value.im) <= radius);
  if (real) {
    if (all && fits("parity")) return "parity";
    // 0, 2, 6, … or 3/4, 15/4, …: only a square of an angular momentum skips the steps between
    if (fits("j") && values.some((value) => value.re > 0.5) && !fits("m")) return "j";
    if (fits("m")) return looksLikeSquares(values) ? "j" : "m";
    const rational = { rational: RECOGNISED_DENOMINATOR };
    return fits(rational) ? rational : undefined;
  }
  for (let order = 3; order <= RECOGNISED_ROOT_ORDER; order++) {
    if (values.every((value) => onlyMember({ root: order }, value, radius) !== undefined)) return { root: order };
  }
  return undefined;
}

/** At least three integers, all of the form j(j + 1). */
function looksLikeSquares(values: readonly { readonly re: number }[]): boolean {
  if (values.length < 3) return false;
  return values.every((value) => {
    const twice = Math.round(Math.sqrt(1 + 4 * Math.max(0, value.re)) - 1);
    return value.re > -0.5 && twice % 2 === 0 && Math.round(value.re) === (twice * (twice + 2)) / 4;
  });
}
