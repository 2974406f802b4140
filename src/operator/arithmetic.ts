import { type Complex, modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { add, adjoint, gather, kron, scale, transposeOrder } from "../numerics/sparse.js";
import {
  fitsGrid,
  gridOf,
  isAwayFromUnderflow,
  isPowerOfTwo,
  isPowers,
  modulusAbove,
  type Radius,
  radiusAt,
  type Uncertain,
  uniformError,
} from "./radius.js";
import { settle } from "./settle.js";

/**
 * A + B or A − B with radii: r_c = r_a + r_b, and u|c| where both have an entry (a rounded sum is correct to half a unit in
 * the last place, also when it underflows). Sums of dyadic numbers that fit into 53 bits are not rounded at all.
 */
export function uncertainSum(a: Uncertain, b: Uncertain, sign: 1 | -1): Uncertain {
  const verb = sign === 1 ? "plus" : "minus";
  const csr = add(1, a.csr, sign, b.csr);
  const disjoint = csr.col.length === a.csr.col.length + b.csr.col.length;
  const rounding = disjoint || isExactSum(a.csr, b.csr) ? 0 : UNIT_ROUNDOFF;
  if (a.radius === "exact" && b.radius === "exact" && rounding === 0) return settle(verb, csr, "exact");
  if (a.radius === "default" && b.radius === "default" && disjoint) return settle(verb, csr, "default");
  return settle(verb, csr, sumRadii(csr, a, b, rounding));
}

function isExactSum(a: Csr, b: Csr): boolean {
  const left = gridOf(a);
  const right = left === undefined ? undefined : gridOf(b);
  if (left === undefined || right === undefined) return false;
  return fitsGrid(Math.max(left.bits, right.bits), left.max + right.max);
}

function sumRadii(csr: Csr, a: Uncertain, b: Uncertain, rounding: number): Float64Array {
  const out = new Float64Array(csr.col.length);
  for (let row = 0; row < csr.rows; row++) {
    let e = a.csr.ptr[row] as number;
    let f = b.csr.ptr[row] as number;
    const eEnd = a.csr.ptr[row + 1] as number;
    const fEnd = b.csr.ptr[row + 1] as number;
    const gEnd = csr.ptr[row + 1] as number;
    for (let g = csr.ptr[row] as number; g < gEnd; g++) {
      const c = csr.col[g] as number;
      const inA = e < eEnd && a.csr.col[e] === c;
      const inB = f < fEnd && b.csr.col[f] === c;
      if (inA && inB) out[g] = roundUp(radiusAt(a, e) + radiusAt(b, f) + rounding * modulusAbove(csr, g));
      else out[g] = inA ? radiusAt(a, e) : radiusAt(b, f);
      if (inA) e++;
      if (inB) f++;
    }
  }
  return out;
}

/**
 * z A with radii: |z| r_a and the rounding of the product. The factor counts as the very number that it is; ±2^k and ±i 2^k
 * round nothing.
 */
export function uncertainScale(a: Uncertain, z: Complex): Uncertain {
  const csr = scale(z.im === 0 ? z.re : z, a.csr);
  const single = z.re === 0 || z.im === 0;
  const factor = single ? Math.abs(z.re + z.im) : modulus(z.re, z.im) * (1 + 16 * UNIT_ROUNDOFF);
  const exact =
    factor === 0 || (single && isPowerOfTwo(factor) && isAwayFromUnderflow(a.csr)) || isExactScale(a.csr, z, single);
  if (exact && !(a.radius instanceof Float64Array)) return settle("scale", csr, a.radius);
  const rounding = exact ? 0 : single ? UNIT_ROUNDOFF : Math.SQRT2 * gamma(3);
  const out = new Float64Array(csr.col.length);
  for (let e = 0; e < out.length; e++) {
    const own = factor * radiusAt(a, e);
    out[e] = roundUp(own + rounding * (factor * modulusAbove(a.csr, e)) + (exact ? 0 : 2 * UNDERFLOW));
  }
  return settle("scale", csr, out);
}

function isExactScale(a: Csr, z: Complex, single: boolean): boolean {
  const number: Csr = {
    rows: 1,
    cols: 1,
    ptr: Int32Array.of(0, 1),
    col: Int32Array.of(0),
    re: Float64Array.of(z.re),
    im: Float64Array.of(z.im),
  };
  const left = gridOf(number);
  const right = left === undefined ? undefined : gridOf(a);
  if (left === undefined || right === undefined) return false;
  return fitsGrid(left.bits + right.bits, (single ? 1 : 2) * left.max * right.max);
}

/** A† with its radii; exact. */
export function uncertainAdjoint(a: Uncertain): Uncertain {
  if (!(a.radius instanceof Float64Array)) return { csr: adjoint(a.csr), radius: a.radius };
  const { csr, order } = transposeOrder(a.csr);
  const im = csr.im === undefined ? undefined : csr.im.map((y) => 0 - y);
  return { csr: { ...csr, im }, radius: gather(a.radius, order) };
}

/** A ⊗ B with radii |a| r_b + r_a |b| + r_a r_b and one rounding; none where a factor has entries ±2^k, ±i 2^k only. */
export function uncertainKron(a: Uncertain, b: Uncertain, verb = "kron"): Uncertain {
  const csr = kron(a.csr, b.csr);
  const exact = isExactKron(a.csr, b.csr);
  const complex = a.csr.im !== undefined && b.csr.im !== undefined;
  const rounding = exact ? 0 : complex ? Math.SQRT2 * gamma(3) : UNIT_ROUNDOFF;
  const ua = uniformError(a.radius);
  const ub = uniformError(b.radius);
  if (exact && ua !== undefined && ub !== undefined && (ua === 0 || ub === 0)) {
    const radius: Radius = ua === 0 && ub === 0 ? "exact" : "default";
    return settle(verb, csr, radius);
  }
  const out = new Float64Array(csr.col.length);
  const aCount = a.csr.rows;
  let g = 0;
  for (let r = 0; r < aCount; r++) {
    for (let s = 0; s < b.csr.rows; s++) {
      for (let e = a.csr.ptr[r] as number; e < (a.csr.ptr[r + 1] as number); e++) {
        const x = modulusAbove(a.csr, e);
        const rx = radiusAt(a, e);
        for (let f = b.csr.ptr[s] as number; f < (b.csr.ptr[s + 1] as number); f++, g++) {
          const y = modulusAbove(b.csr, f);
          const ry = radiusAt(b, f);
          out[g] = roundUp(x * ry + rx * (y + ry) + rounding * (x * y) + (exact ? 0 : 2 * UNDERFLOW));
        }
      }
    }
  }
  return settle(verb, csr, out);
}

function isExactKron(a: Csr, b: Csr): boolean {
  if (isPowers(a)) return isAwayFromUnderflow(b);
  if (isPowers(b)) return isAwayFromUnderflow(a);
  const left = gridOf(a);
  const right = left === undefined ? undefined : gridOf(b);
  return left !== undefined && right !== undefined && fitsGrid(left.bits + right.bits, 2 * left.max * right.max);
}

/** The sum of a list, added pair by pair; undefined for none. */
export function pairwise<T>(terms: readonly T[], add: (left: T, right: T) => T): T | undefined {
  let level = terms;
  while (level.length > 1) {
    const next: T[] = [];
    for (let k = 0; k < level.length; k += 2) {
      const [left, right] = level.slice(k, k + 2);
      if (left !== undefined) next.push(right === undefined ? left : add(left, right));
    }
    level = next;
  }
  return level[0];
}
