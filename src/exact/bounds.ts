import { floorSqrt } from "./integer.js";
import type { Terms } from "./terms.js";

/** Whole numbers with lower ≤ 2^bits · den · x ≤ upper; equal where x is rational. */
export interface ScaledBounds {
  readonly lower: bigint;
  readonly upper: bigint;
}

/**
 * Encloses a real number in fixed point: each |x| √r is the whole part of √(x² r 4^bits), and less than one unit more.
 *
 * @param a - a real number; its imaginary parts are not looked at
 * @param bits - binary places
 */
export function scaledBounds(a: Terms, bits: number): ScaledBounds {
  const shift = BigInt(bits);
  let lower = 0n;
  let upper = 0n;
  for (let k = 0; k < a.roots.length; k++) {
    const root = a.roots[k] as bigint;
    const x = a.re[k] as bigint;
    if (root === 1n) {
      lower += x << shift;
      upper += x << shift;
      continue;
    }
    // the root of a non-square is irrational, so it lies strictly between
    const whole = floorSqrt((x * x * root) << (2n * shift));
    lower += x > 0n ? whole : -whole - 1n;
    upper += x > 0n ? whole + 1n : -whole;
  }
  return { lower, upper };
}

/** Binary places of the first attempt; doubled until the answer is certain. */
const FIRST_BITS = 32;

/**
 * The sign of a real number. Zero is the empty sum; everything else is bounded away from zero, so that doubling the precision
 * ends.
 */
export function signOfReal(a: Terms): -1 | 0 | 1 {
  if (a.roots.length === 0) return 0;
  const allPositive = a.re.every((x) => x > 0n);
  if (allPositive) return 1;
  if (a.re.every((x) => x < 0n)) return -1;
  for (let bits = FIRST_BITS; ; bits *= 2) {
    const { lower, upper } = scaledBounds(a, bits);
    if (lower > 0n) return 1;
    if (upper < 0n) return -1;
  }
}
