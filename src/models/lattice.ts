import { GoodBasisError } from "../errors.js";
import { ExactOperator } from "../exact/operator.js";
import type { ExactTriplet } from "../exact/rows.js";
import type { SurdInput } from "../exact/surd.js";
import { isObject, shown } from "../misuse.js";
import { type Complex, imaginaryPart, isScalar, realPart, type Scalar } from "../numerics/complex.js";
import { UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { EntryList } from "../operator/builder.js";
import { exactNumber, isExactEntry } from "../operator/exact-input.js";
import { Operator } from "../operator/operator.js";
import { boundModulus } from "../operator/radius.js";

/** A bond between two sites, 0-based. */
export type Bond = readonly [from: number, to: number];

/**
 * One particle hopping on n sites: Σ over bonds (i, j) of t |i⟩⟨j| + t* |j⟩⟨i|. The sign is the caller's (Hückel's β, or −t).
 *
 * @param n - number of sites, one ket each
 * @param bonds - pairs of different sites; a bond given twice counts twice
 * @param amplitude - t, one number for all bonds or one for each; complex ones carry a flux. They count as known to half a unit in
 *   the last place, whole numbers as exact; where one of them is exact, such as `"1/3"` or `"sqrt(2)"`, all are
 * @throws GoodBasisError `shape` - no list of bonds, a bond outside the lattice or from a site to itself, a wrong number of
 *   amplitudes
 * @throws GoodBasisError `not-finite` - an amplitude is not finite; `option` - one is no number; `text`, `zero-division`
 *
 * @example
 * ```ts
 * import { hopping } from "goodbasis";
 *
 * const butadiene = hopping(4, [[0, 1], [1, 2], [2, 3]], -1);
 * console.log(butadiene.entry(1, 0).re, butadiene.isHermitian); // -1 true
 * ```
 */
export function hopping(n: number, bonds: readonly Bond[], amplitude: SurdInput | readonly SurdInput[] = 1): Operator {
  requireLattice(n, bonds);
  const each = isList(amplitude) ? amplitude : undefined;
  if (each !== undefined && each.length !== bonds.length) {
    const message = `hopping: expected one amplitude for each of the ${bonds.length} bonds, got ${each.length}`;
    throw new GoodBasisError("shape", message, { n, bonds: bonds.length });
  }
  for (const [k, [i, j]] of bonds.entries()) {
    if (![i, j].every((site) => Number.isInteger(site) && site >= 0 && site < n) || i === j) {
      const message = `hopping: bond ${k} joins sites ${shown(i)} and ${shown(j)}; expected two different sites of 0 … ${n - 1}`;
      throw new GoodBasisError("shape", message, { bond: k, i, j, n });
    }
  }
  const amplitudes = each ?? bonds.map(() => amplitude);
  return amplitudes.some(isExactEntry) ? exactHopping(n, bonds, amplitudes) : floatingHopping(n, bonds, amplitudes);
}

function exactHopping(n: number, bonds: readonly Bond[], amplitudes: readonly unknown[]): Operator {
  const triplets = bonds.flatMap(([i, j], k): ExactTriplet[] => {
    const t = amplitudes[k];
    const where = `hopping: the amplitude of bond ${k}`;
    if (isScalar(t)) requireFinite(where, k, t);
    else if (!isExactEntry(t)) throw noNumber(k, t);
    const exact = exactNumber(where, { bond: k }, t as SurdInput);
    return [
      [i, j, exact],
      [j, i, exact.conjugate()],
    ];
  });
  return Operator.from(ExactOperator.fromTriplets(n, triplets));
}

function floatingHopping(n: number, bonds: readonly Bond[], amplitudes: readonly unknown[]): Operator {
  const list = new EntryList(n);
  for (const [k, [i, j]] of bonds.entries()) {
    const t = amplitudes[k];
    if (!isScalar(t)) throw noNumber(k, t);
    const { re, im } = requireFinite(`hopping: the amplitude of bond ${k}`, k, t);
    const whole = Number.isInteger(re) && Number.isInteger(im);
    const radius = whole ? 0 : UNIT_ROUNDOFF * boundModulus(re, im);
    list.add(i, j, re, im, radius);
    list.add(j, i, re, -im, radius);
  }
  return list.finish("hopping");
}

function noNumber(k: number, t: unknown): GoodBasisError {
  const message = `hopping: the amplitude of bond ${k} is ${shown(t)}; expected a number, { re, im } or an exact number such as "1/3"`;
  return new GoodBasisError("option", message, { bond: k });
}

function requireFinite(where: string, k: number, t: Scalar): Complex {
  const z = toComplex(t);
  if (Number.isFinite(z.re) && Number.isFinite(z.im)) return z;
  throw new GoodBasisError("not-finite", `${where} is ${z.re} + ${z.im}i`, { bond: k });
}

function requireLattice(n: number, bonds: readonly Bond[]): void {
  if (!Number.isInteger(n) || n < 1 || n >= 2 ** 31) {
    throw new GoodBasisError("shape", `hopping: expected a number of sites, 1, 2, …, got ${shown(n)}`, { n });
  }
  if (!Array.isArray(bonds)) {
    const message = `hopping: expected a list of bonds [[i, j], …] between sites, got ${shown(bonds)}`;
    throw new GoodBasisError("shape", message, { n });
  }
  const bad = bonds.findIndex((bond: unknown) => !isObject(bond) || !Array.isArray(bond) || bond.length !== 2);
  if (bad < 0) return;
  const message = `hopping: bond ${bad} is ${shown(bonds[bad])}; expected a pair [i, j] of sites`;
  throw new GoodBasisError("shape", message, { bond: bad, n });
}

function isList(value: SurdInput | readonly SurdInput[] | undefined): value is readonly SurdInput[] {
  return Array.isArray(value);
}

function toComplex(value: Scalar): Complex {
  return { re: realPart(value), im: imaginaryPart(value) };
}
