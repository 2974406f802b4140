import { modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { maxPart } from "../numerics/sparse.js";

/**
 * What is known about the error of stored entries: `"default"` half a unit in the last place of each, `"exact"` nothing but
 * zero, or one bound on the modulus of the error for each stored entry. Entries that are not stored are exactly zero.
 */
export type Radius = "default" | "exact" | Float64Array;

/** A matrix whose stored entries are known to within a radius. */
export interface Uncertain {
  readonly csr: Csr;
  readonly radius: Radius;
}

/** The relative error of a uniform radius; `undefined` where each entry has its own. */
export function uniformError(radius: Radius): number | undefined {
  if (radius === "default") return UNIT_ROUNDOFF;
  return radius === "exact" ? 0 : undefined;
}

/** An upper bound on the modulus of entry `e`; equal to it for real and imaginary entries. */
export function modulusAbove(csr: Csr, e: number): number {
  return boundModulus(csr.re[e] as number, csr.im === undefined ? 0 : (csr.im[e] as number));
}

/** An upper bound on |x + iy|; equal to it where one part is zero. */
export function boundModulus(x: number, y: number): number {
  if (y === 0) return Math.abs(x);
  if (x === 0) return Math.abs(y);
  return modulus(x, y) * (1 + 16 * UNIT_ROUNDOFF) + UNDERFLOW;
}

/** Upper bounds on the moduli of all entries. */
export function moduliAbove(csr: Csr): Float64Array {
  const { re, im } = csr;
  const out = new Float64Array(re.length);
  for (let e = 0; e < out.length; e++) {
    out[e] = im === undefined ? Math.abs(re[e] as number) : boundModulus(re[e] as number, im[e] as number);
  }
  return out;
}

/** The radius of entry `e`. */
export function radiusAt(matrix: Uncertain, e: number): number {
  const { radius } = matrix;
  if (radius === "exact") return 0;
  return radius === "default" ? halfUnit(modulusAbove(matrix.csr, e)) : (radius[e] as number);
}

/**
 * An upper bound on half a unit in the last place of a number of the given modulus: u times it, and below the normal range,
 * where units do not shrink any more and u times it would vanish, the smallest positive number. Zero is exact.
 */
function halfUnit(modulus: number): number {
  return modulus === 0 ? 0 : UNIT_ROUNDOFF * modulus + UNDERFLOW;
}

/** The radii of all entries, written out. */
export function radiiOf(matrix: Uncertain): Float64Array {
  const { radius } = matrix;
  if (radius instanceof Float64Array) return radius;
  if (radius === "exact") return new Float64Array(matrix.csr.re.length);
  const out = moduliAbove(matrix.csr);
  for (let e = 0; e < out.length; e++) out[e] = halfUnit(out[e] as number);
  return out;
}

/**
 * The radii of all entries, those that are not zero raised to 2^−520 at least: for entries away from underflow (2^−450) that
 * is less than their own last digit, and no product with such an entry underflows.
 */
export function raisedRadii(matrix: Uncertain): Float64Array {
  return radiiOf(matrix).map((r) => (r === 0 ? 0 : Math.max(r, LEAST_RADIUS)));
}

const LEAST_RADIUS = 2 ** -520;

/** Entries that are whole multiples of 2^−bits with parts of modulus at most `max`. */
export interface Grid {
  readonly bits: number;
  readonly max: number;
}

/** Finest grid that is looked for: sums and products of such numbers still have room in 53 bits. */
const GRID_BITS = 24;

/** The coarsest dyadic grid that holds every entry, or `undefined` where there is none of at most 24 bits. */
export function gridOf(csr: Csr): Grid | undefined {
  let bits = 0;
  let unit = 1;
  for (const part of csr.im === undefined ? [csr.re] : [csr.re, csr.im]) {
    for (let e = 0; e < part.length; e++) {
      while (!Number.isInteger((part[e] as number) * unit)) {
        if (bits === GRID_BITS) return undefined;
        bits++;
        unit *= 2;
      }
    }
  }
  return { bits, max: maxPart(csr) };
}

/** Whether numbers of modulus at most `bound` that are multiples of 2^−bits are all double-precision numbers. */
export function fitsGrid(bits: number, bound: number): boolean {
  return bound * 2 ** bits <= 2 ** 53;
}

/** Whether every entry is ±2^k or ±i 2^k, so that multiplying by one of them rounds nothing. */
export function isPowers(csr: Csr): boolean {
  for (let e = 0; e < csr.re.length; e++) {
    const x = csr.re[e] as number;
    const y = csr.im === undefined ? 0 : (csr.im[e] as number);
    if ((x !== 0 && y !== 0) || !isPowerOfTwo(Math.abs(x + y))) return false;
  }
  return true;
}

/** Whether x is a power of two of moderate size (2^±300). */
export function isPowerOfTwo(x: number): boolean {
  if (x === 1) return true;
  if (!(x > 2 ** -301 && x < 2 ** 301)) return false;
  return x === 2 ** Math.round(Math.log2(x));
}

/**
 * Whether every part is zero or of modulus 2^−450 at least: then neither products of two such numbers underflow nor their
 * product with the square of the unit roundoff.
 */
export function isAwayFromUnderflow(csr: Csr): boolean {
  for (const part of csr.im === undefined ? [csr.re] : [csr.re, csr.im]) {
    for (let e = 0; e < part.length; e++) {
      const x = Math.abs(part[e] as number);
      if (x !== 0 && x < LEAST_PART) return false;
    }
  }
  return true;
}

const LEAST_PART = 2 ** -450;
