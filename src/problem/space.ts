import { reflection, sitePermutation, translation } from "../models/permutations.js";
import { type ProductSpace, productSpace } from "../models/product-space.js";
import { Operator } from "../operator/operator.js";
import { type Factor, readFactor, siteOperator } from "./factor.js";
import { atPlace, fileError, inside, nameError, type Place, showValue } from "./place.js";

/** Where a name such as "ring[2]" points to. */
export interface Target {
  readonly factor: Factor;
  /** Undefined for the whole factor. */
  readonly site: number | undefined;
}

/** The components of an angular momentum on the whole space. */
export interface Vector {
  readonly x: Operator;
  readonly y: Operator;
  readonly z: Operator;
  readonly plus: Operator;
  readonly minus: Operator;
}

const TARGET = /^([^.[\]^|]+?)(?:\[(\d+)\])?$/;

/** The product space of a problem file and its operators by name. */
export class Space {
  readonly n: number;
  readonly #factors: readonly Factor[];
  readonly #sites: ProductSpace;
  readonly #made = new Map<string, Operator>();

  /**
   * @param place - of the list of factors
   * @throws GoodBasisError `file`, `name`, `option`
   */
  constructor(place: Place, files: readonly unknown[]) {
    const factors: Factor[] = [];
    if (files.length === 0) throw fileError(place, "at least one factor", "an empty list");
    for (const [k, file] of files.entries()) {
      const at = inside(place, k);
      const factor = readFactor(
        at,
        file,
        factors.reduce((sum, { count = 1 }) => sum + count, 0),
      );
      if (factors.some(({ name }) => name === factor.name)) {
        throw fileError(inside(at, "name"), "a name of its own for every factor", `"${factor.name}" again`);
      }
      factors.push(factor);
    }
    this.#factors = factors;
    const dimensions = factors.flatMap(({ site, count = 1 }) => new Array<number>(count).fill(site.n));
    this.#sites = atPlace(place, () => productSpace(dimensions));
    this.n = this.#sites.n;
  }

  /** Names of all kets: sites of one-letter names run together, all else is joined by commas. */
  kets(): string[] {
    return this.#factors
      .map(({ site, count = 1 }) => {
        const short = count > 1 && site.kets.every((ket) => [...ket].length === 1);
        const names = new Array<readonly string[]>(count).fill(site.kets);
        return productSpace(names.map(() => site.n)).kets(names, short ? "" : ",");
      })
      .reduce((left, right) => left.flatMap((ket) => right.map((name) => `${ket},${name}`)));
  }

  /** What there is, for messages. */
  get summary(): string {
    const names = this.#factors.map(({ name, count }) => (count === undefined ? name : `${name}[0…${count - 1}]`));
    return `the factors are ${names.join(", ")}`;
  }

  /**
   * The factor or site of a name such as "L" or "ring[2]".
   *
   * @throws GoodBasisError `name`
   */
  target(place: Place, name: string): Target {
    const [, factorName, index] = TARGET.exec(name) ?? [];
    const factor = this.#factors.find((candidate) => candidate.name === factorName);
    if (factor === undefined) throw nameError(place, name, this.summary);
    if (index === undefined) return { factor, site: undefined };
    const site = Number(index);
    if (factor.count === undefined) throw nameError(place, name, `"${factor.name}" has no sites, as it has no count`);
    if (site >= factor.count) throw nameError(place, name, `the sites of ${factor.name} are 0 … ${factor.count - 1}`);
    return { factor, site };
  }

  /** Number of kets of a target. */
  dimension({ factor, site }: Target): number {
    return site === undefined ? factor.site.n ** (factor.count ?? 1) : factor.site.n;
  }

  /**
   * The operator on the whole space that acts as given on a target and as 1 elsewhere.
   *
   * @throws GoodBasisError `shape`
   */
  embed(target: Target, operator: Operator): Operator {
    const { dimensions } = this.#sites;
    const first = target.factor.first + (target.site ?? 0);
    const length = target.site === undefined ? (target.factor.count ?? 1) : 1;
    const product = (sizes: readonly number[]): number => sizes.reduce((result, size) => result * size, 1);
    const size = product(dimensions.slice(first, first + length));
    return productSpace([product(dimensions.slice(0, first)), size, product(dimensions.slice(first + length))]).embed(
      operator,
      1,
    );
  }

  /**
   * An operator by name: "L.x", "ring[3].plus", "ring.total.z", "ring.translation", "q.x^4", "atom.|e><g|".
   *
   * @throws GoodBasisError `name` - with what there is instead
   */
  operator(place: Place, name: string): Operator {
    const known = this.#made.get(name);
    if (known !== undefined) return known;
    const made = this.#make(place, name);
    this.#made.set(name, made);
    return made;
  }

  /**
   * An angular momentum by name: a factor, a site, "ring.total", or a sum such as "L + S".
   *
   * @throws GoodBasisError `name`
   */
  vector(place: Place, text: string): Vector {
    const parts = text.split(/\s\+\s/).map((part) => part.trim());
    const component = (key: keyof Vector): Operator =>
      Operator.sum(...parts.map((part) => this.operator(place, `${part}.${key}`)));
    for (const part of parts) {
      const { factor } = this.target(place, part.replace(/\.total$/, ""));
      if (!factor.site.isSpin) throw nameError(place, text, `"${factor.name}" is no angular momentum`);
    }
    return {
      x: component("x"),
      y: component("y"),
      z: component("z"),
      plus: component("plus"),
      minus: component("minus"),
    };
  }

  #make(place: Place, name: string): Operator {
    const dot = name.indexOf(".");
    const [targetName, operatorName] = dot < 0 ? [name, ""] : [name.slice(0, dot), name.slice(dot + 1)];
    const target = this.target(place, targetName);
    const { factor, site } = target;
    if (factor.count === undefined || site !== undefined) {
      return this.embed(target, siteOperator(place, name, factor.site, operatorName));
    }
    if (operatorName.startsWith("total.")) {
      const single = siteOperator(place, name, factor.site, operatorName.slice("total.".length));
      const sites = Array.from({ length: factor.count }, (_, k) => this.embed({ factor, site: k }, single));
      return Operator.sum(...sites);
    }
    if (operatorName === "translation") return this.#translation(place, target);
    if (operatorName === "reflection") return this.reflection(place, factor.name, undefined);
    const hint = `${factor.name} has ${factor.count} sites: write "${factor.name}[0].…" for one, "${factor.name}.total.…" for the sum over all, "${factor.name}.translation" or "${factor.name}.reflection"`;
    throw nameError(place, name, hint);
  }

  #translation(place: Place, target: Target): Operator {
    const { site, count = 1 } = target.factor;
    return this.embed(
      target,
      atPlace(place, () => translation(count, site.n)),
    );
  }

  /**
   * The reflection of the sites of a factor about a mirror at centre/2.
   *
   * @throws GoodBasisError `name`, `option`
   */
  reflection(place: Place, name: string, centre: number | undefined): Operator {
    const target = this.#collection(place, name);
    return this.embed(
      target,
      atPlace(place, () => reflection(target.factor.count ?? 1, target.factor.site.n, centre)),
    );
  }

  /**
   * The permutation of the sites of a factor.
   *
   * @throws GoodBasisError `name`, `shape`
   */
  sitePermutation(place: Place, name: string, map: readonly number[]): Operator {
    const target = this.#collection(place, name);
    const sites = target.factor.count ?? 1;
    if (map.length !== sites) throw fileError(place, `the images of all ${sites} sites of ${name}`, showValue(map));
    return this.embed(
      target,
      atPlace(place, () => sitePermutation(target.factor.site.n, map)),
    );
  }

  /**
   * The exchange of two equal factors or sites.
   *
   * @throws GoodBasisError `name`, `file`
   */
  exchange(place: Place, names: readonly [string, string]): Operator {
    const [a, b] = names.map((name, k) => this.target(inside(place, k), name));
    if (a === undefined || b === undefined) throw fileError(place, "a pair of factors or sites", showValue(names));
    const single = [a, b].every(({ factor, site }) => factor.count === undefined || site !== undefined);
    if (!single || a.factor.site.n !== b.factor.site.n) {
      throw fileError(place, "two factors or sites with the same number of kets", showValue(names));
    }
    const { dimensions, n } = this.#sites;
    const weight = (slot: number): number => dimensions.slice(slot + 1).reduce((product, d) => product * d, 1);
    const wa = weight(a.factor.first + (a.site ?? 0));
    const wb = weight(b.factor.first + (b.site ?? 0));
    const d = a.factor.site.n;
    const map = Int32Array.from({ length: n }, (_, ket) => {
      const change = (Math.floor(ket / wb) % d) - (Math.floor(ket / wa) % d);
      return ket + change * wa - change * wb;
    });
    return Operator.permutation(map);
  }

  #collection(place: Place, name: string): Target {
    const target = this.target(place, name);
    if (target.factor.count !== undefined && target.site === undefined) return target;
    throw nameError(place, name, "a factor with a count is needed, whose sites can be moved");
  }
}
