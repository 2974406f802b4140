import { scaledBounds } from "./bounds.js";
import { absolute, bitLength, exactSqrt, floorSqrt } from "./integer.js";
import type { Terms } from "./terms.js";

/** Which neighbouring double: the nearest (ties to even), the largest one below or equal, the smallest one above or equal. */
export type Rounding = "nearest" | "down" | "up";

/** Digits of a double, and the exponent of the smallest one. */
const DIGITS = 53;
const LEAST_EXPONENT = -1074;

/**
 * The double next to a fraction, subnormal numbers and overflow as in IEEE 754: to nearest, what is at least half a unit above
 * the largest double becomes infinite; down and up stop at the largest double on the side towards zero.
 *
 * @param numerator - a whole number
 * @param denominator - a whole number > 0
 */
export function roundQuotient(numerator: bigint, denominator: bigint, rounding: Rounding): number {
  if (numerator === 0n) return 0;
  const negative = numerator < 0n;
  const towardsZero = rounding === (negative ? "up" : "down");
  const modulus = roundModulus(absolute(numerator), denominator, rounding === "nearest" ? "nearest" : towardsZero);
  return negative && modulus !== 0 ? -modulus : modulus;
}

/** @param rounding - to nearest, or whether towards zero */
function roundModulus(n: bigint, d: bigint, rounding: "nearest" | boolean): number {
  // 2^(guess − 1) < n / d < 2^(guess + 1)
  let exponent = bitLength(n) - bitLength(d);
  if (compareToPower(n, d, exponent) < 0) exponent--;
  // now 2^exponent ≤ n / d < 2^(exponent + 1)
  const unit = Math.max(exponent - DIGITS + 1, LEAST_EXPONENT);
  const [above, below] = unit >= 0 ? [n, d << BigInt(unit)] : [n << BigInt(-unit), d];
  let quotient = above / below;
  const rest = above - quotient * below;
  if (rest !== 0n && rounding !== true) {
    const twice = 2n * rest;
    if (rounding === false || twice > below || (twice === below && (quotient & 1n) === 1n)) quotient++;
  }
  return scaleByPower(quotient, unit, rounding === true);
}

/** The sign of n / d − 2^e. */
function compareToPower(n: bigint, d: bigint, e: number): number {
  const [left, right] = e >= 0 ? [n, d << BigInt(e)] : [n << BigInt(-e), d];
  return left < right ? -1 : left > right ? 1 : 0;
}

/** quotient · 2^unit, where the quotient has at most 53 digits or is 2^53. */
function scaleByPower(quotient: bigint, unit: number, towardsZero: boolean): number {
  if (unit > 971 || (unit === 971 && quotient >> BigInt(DIGITS) !== 0n)) {
    return towardsZero ? Number.MAX_VALUE : Number.POSITIVE_INFINITY;
  }
  // both factors are doubles, so that subnormal numbers keep their digits
  const half = Math.trunc(unit / 2);
  return Number(quotient) * 2 ** half * 2 ** (unit - half);
}

/** Binary places of the first attempt at an irrational number. */
const FIRST_BITS = 96;

/**
 * The double next to a real number, exactly as if it were computed to infinite precision first.
 *
 * A rational number is rounded as a fraction. An irrational one is never a double nor half way between two, so its bounds
 * round alike once they are close enough.
 *
 * @param a - a real number; its imaginary parts are not looked at
 */
export function roundReal(a: Terms, rounding: Rounding): number {
  if (a.roots.length === 0) return 0;
  if (a.roots.length === 1 && a.roots[0] === 1n) return roundQuotient(a.re[0] as bigint, a.den, rounding);
  for (let bits = FIRST_BITS; ; bits *= 2) {
    const { lower, upper } = scaledBounds(a, bits);
    const denominator = a.den << BigInt(bits);
    const low = roundQuotient(lower, denominator, rounding);
    // bounds of opposite signs are never close enough, though both may round to zero
    if (lower > 0n === upper > 0n && low === roundQuotient(upper, denominator, rounding)) return low;
  }
}

/**
 * The double nearest to the square root of a real number ≥ 0, correctly rounded; the root itself need not lie in the field.
 *
 * @param a - a real number ≥ 0
 */
export function roundRoot(a: Terms): number {
  if (a.roots.length === 0) return 0;
  if (a.roots.length === 1 && a.roots[0] === 1n) {
    const [x, d] = [exactSqrt(a.re[0] as bigint), exactSqrt(a.den)];
    if (x !== undefined && d !== undefined) return roundQuotient(x, d, "nearest");
  }
  for (let bits = FIRST_BITS; ; bits *= 2) {
    const { lower, upper } = scaledBounds(a, bits);
    if (lower < 0n) continue;
    // √(y / (den 2^bits)) = √(y den 2^bits) / (den 2^bits)
    const denominator = a.den << BigInt(bits);
    const low = roundQuotient(floorSqrt(lower * denominator), denominator, "nearest");
    const high = roundQuotient(floorSqrt(upper * denominator) + 1n, denominator, "nearest");
    if (low === high) return low;
  }
}
