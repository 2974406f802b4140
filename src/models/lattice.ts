import { GoodBasisError } from "../errors.js";
import { isObject, shown } from "../misuse.js";
import { type Complex, imaginaryPart, isScalar, realPart, type Scalar } from "../numerics/complex.js";
import { UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { EntryList } from "../operator/builder.js";
import type { Operator } from "../operator/operator.js";
import { boundModulus } from "../operator/radius.js";

/** A bond between two sites, 0-based. */
export type Bond = readonly [from: number, to: number];

/**
 * One particle hopping on n sites: Σ over bonds (i, j) of t |i⟩⟨j| + t* |j⟩⟨i|. The sign is the caller's (Hückel's β, or −t).
 *
 * @param n - number of sites, one ket each
 * @param bonds - pairs of different sites; a bond given twice counts twice
 * @param amplitude - t, one number for all bonds or one for each; complex ones carry a flux. They count as known to half a unit in
 *   the last place, whole numbers as exact
 * @throws GoodBasisError `shape` - no list of bonds, a bond outside the lattice or from a site to itself, a wrong number of
 *   amplitudes
 * @throws GoodBasisError `not-finite` - an amplitude is not finite; `option` - one is no number
 *
 * @example
 * ```ts
 * import { hopping } from "goodbasis";
 *
 * const butadiene = hopping(4, [[0, 1], [1, 2], [2, 3]], -1);
 * console.log(butadiene.entry(1, 0).re, butadiene.isHermitian); // -1 true
 * ```
 */
export function hopping(n: number, bonds: readonly Bond[], amplitude: Scalar | readonly Scalar[] = 1): Operator {
  requireLattice(n, bonds);
  const list = new EntryList(n);
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
    const t = each === undefined ? amplitude : each[k];
    if (!isScalar(t)) {
      const message = `hopping: the amplitude of bond ${k} is ${shown(t)}; expected a number or { re, im }`;
      throw new GoodBasisError("option", message, { bond: k });
    }
    const { re, im } = toComplex(t);
    if (!Number.isFinite(re) || !Number.isFinite(im)) {
      throw new GoodBasisError("not-finite", `hopping: the amplitude of bond ${k} is ${re} + ${im}i`, { bond: k });
    }
    const whole = Number.isInteger(re) && Number.isInteger(im);
    const radius = whole ? 0 : UNIT_ROUNDOFF * boundModulus(re, im);
    list.add(i, j, re, im, radius);
    list.add(j, i, re, -im, radius);
  }
  return list.finish("hopping");
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

function isList(value: Scalar | readonly Scalar[] | undefined): value is readonly Scalar[] {
  return Array.isArray(value);
}

function toComplex(value: Scalar): Complex {
  return { re: realPart(value), im: imaginaryPart(value) };
}
