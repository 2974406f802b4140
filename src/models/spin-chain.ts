import { GoodBasisError } from "../errors.js";
import type { ExactTriplet } from "../exact/rows.js";
import { shown } from "../misuse.js";
import { EntryList, exactRoot } from "../operator/builder.js";
import { Operator } from "../operator/operator.js";
import { type AngularMomentum, angularMomentum, halfText, multiplicity } from "./angular-momentum.js";
import { type ProductSpace, productSpace } from "./product-space.js";
import { wholeRoot } from "./roots.js";

/** Operators of a chain or ring of equal spins. Sites are counted from 0; site 0 is the slowest index. */
export interface SpinChain {
  /** Number of sites. */
  readonly sites: number;
  /** Spin of each site. */
  readonly j: number;
  /** Number of kets, (2j + 1) to the number of sites. */
  readonly n: number;
  /** S_x of a site. */
  sx(site: number): Operator;
  /** S_y of a site. */
  sy(site: number): Operator;
  /** S_z of a site. */
  sz(site: number): Operator;
  /** S₊ of a site. */
  plus(site: number): Operator;
  /** S₋ of a site. */
  minus(site: number): Operator;
  /** The sum of all S_z: diagonal, exact. */
  readonly totalSz: Operator;
  /** S_z S_z of two different sites: diagonal, exact. */
  szsz(i: number, k: number): Operator;
  /** (S₊S₋ + S₋S₊)/2 of two different sites, which is S_xS_x + S_yS_y; exact for j = 1/2. */
  exchange(i: number, k: number): Operator;
  /** Names of the kets: `u` and `d` for spin 1/2, values of m with commas for others. */
  kets(): string[];
}

/**
 * Operators of a chain or ring of equal spins, built sparsely: every one costs as many steps as it has entries.
 *
 * Kets are products |m_0 m_1 …⟩, site 0 slowest, m descending from +j at each site; Condon–Shortley phases (Condon and
 * Shortley, The Theory of Atomic Spectra, 1935). The number of ket u…u is 0.
 *
 * @param sites - number of sites, at least 1
 * @param j - spin of each site, 1/2 when not given
 * @throws GoodBasisError `option` - j is no spin, or there are too many kets; the methods throw `shape` for a site that is not there
 *
 * @example
 * ```ts
 * import { Operator, spinChain } from "goodbasis";
 *
 * const ring = spinChain(4);
 * const bonds = [[0, 1], [1, 2], [2, 3], [3, 0]] as const;
 * const h0 = Operator.sum(...bonds.map(([i, k]) => ring.szsz(i, k)));
 * const v = Operator.sum(...bonds.map(([i, k]) => ring.exchange(i, k)));
 * console.log(h0.entry(0, 0).re, v.isExact, ring.totalSz.commutator(v).norm); // 1 true 0
 * ```
 */
export function spinChain(sites: number, j = 0.5): SpinChain {
  const d = multiplicity("spinChain", j);
  if (!Number.isInteger(sites) || sites < 1 || d ** sites >= 2 ** 30) {
    const message = `spinChain: expected at least one site and fewer than 2^30 kets, got ${shown(sites)} sites of ${d} kets`;
    throw new GoodBasisError("option", message, { sites, j });
  }
  const n = d ** sites;
  const spin: AngularMomentum = angularMomentum(j);
  const space: ProductSpace = productSpace(new Array<number>(sites).fill(d));
  const weight = (site: number): number => d ** (sites - 1 - site);
  const check = (...chosen: number[]): void => {
    const good = chosen.every((site) => Number.isInteger(site) && site >= 0 && site < sites);
    if (good && new Set(chosen).size === chosen.length) return;
    const message = `spinChain: expected different sites of 0 … ${sites - 1}, got ${chosen.map(shown).join(" and ")}`;
    throw new GoodBasisError("shape", message, { sites, chosen });
  };
  const single = (operator: Operator, site: number): Operator => {
    check(site);
    return space.embed(operator, site);
  };
  return {
    sites,
    j,
    n,
    sx: (site) => single(spin.x, site),
    sy: (site) => single(spin.y, site),
    sz: (site) => single(spin.z, site),
    plus: (site) => single(spin.plus, site),
    minus: (site) => single(spin.minus, site),
    totalSz: totalSz(n, d, j, sites),
    szsz: (i, k) => {
      check(i, k);
      return szsz(n, d, j, weight(i), weight(k));
    },
    exchange: (i, k) => {
      check(i, k);
      return exchange(n, d, weight(i), weight(k));
    },
    kets: () => {
      const names = j === 0.5 ? ["u", "d"] : Array.from({ length: d }, (_, k) => halfText(j - k));
      return space.kets(new Array<string[]>(sites).fill(names), j === 0.5 ? "" : ",");
    },
  };
}

function totalSz(n: number, d: number, j: number, sites: number): Operator {
  const values = new Float64Array(n).fill(sites * j);
  for (let ket = 0; ket < n; ket++) {
    let digits = 0;
    for (let rest = ket; rest > 0; rest = Math.floor(rest / d)) digits += rest % d;
    values[ket] = sites * j - digits;
  }
  return Operator.diagonal(values, { uncertainty: "exact" });
}

function szsz(n: number, d: number, j: number, wi: number, wk: number): Operator {
  const values = new Float64Array(n);
  for (let ket = 0; ket < n; ket++) {
    values[ket] = (j - (Math.floor(ket / wi) % d)) * (j - (Math.floor(ket / wk) % d));
  }
  return Operator.diagonal(values, { uncertainty: "exact" });
}

function exchange(n: number, d: number, wi: number, wk: number): Operator {
  const list = new EntryList(n);
  for (const { row, col, square } of flips(n, d, wi, wk)) {
    const { value, radius } = exactRoot(square);
    list.add(row, col, value / 2, 0, radius / 2);
  }
  return list.finish("exchange", () => exactFlips(n, d, wi, wk));
}

/** Digit a at one site goes down by one and digit b at the other up by one: the root of a (d − a) (b + 1)(d − 1 − b), halved. */
function* flips(n: number, d: number, wi: number, wk: number): Generator<{ row: number; col: number; square: number }> {
  for (let ket = 0; ket < n; ket++) {
    const a = Math.floor(ket / wi) % d;
    const b = Math.floor(ket / wk) % d;
    if (a > 0 && b < d - 1) yield { row: ket - wi + wk, col: ket, square: a * (d - a) * (b + 1) * (d - 1 - b) };
    if (b > 0 && a < d - 1) yield { row: ket + wi - wk, col: ket, square: b * (d - b) * (a + 1) * (d - 1 - a) };
  }
}

function* exactFlips(n: number, d: number, wi: number, wk: number): Generator<ExactTriplet> {
  for (const { row, col, square } of flips(n, d, wi, wk)) yield [row, col, wholeRoot(square).over(2)];
}
