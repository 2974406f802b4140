import { exactSqrt, isSafe } from "./integer.js";

/** A positive whole number n = square² · free. */
export interface SquareSplit {
  /** The part taken out of the root: √n = square · √free. */
  readonly square: bigint;
  /** What stays under the root; never a perfect square, except 1. */
  readonly free: bigint;
  /** Whether `free` is known to hold no square factor; false only where a factor beyond 2^53 stays unsplit. */
  readonly certified: boolean;
}

/** Divisors tried on numbers beyond 2^53. */
const TRIAL_LIMIT = 1000;

/**
 * Takes square factors out of a positive whole number by trial division.
 *
 * Up to 2^53 every square is found: once all divisors up to the cube root are gone, what is left is 1, a prime, the product
 * of two primes, or a square. Beyond that only divisors up to 1000 are tried; what stays unsplit is told apart from other
 * radicands by a coprime base, not by factoring.
 *
 * @param n - a whole number ≥ 1
 */
export function splitSquare(n: bigint): SquareSplit {
  if (isSafe(n)) {
    const { square, free } = splitSafe(Number(n), 2);
    return { square: BigInt(square), free: BigInt(free), certified: true };
  }
  let square = 1n;
  let free = 1n;
  let rest = n;
  for (let k = 2; k <= TRIAL_LIMIT && !isSafe(rest); k += k === 2 ? 1 : 2) {
    const divisor = BigInt(k);
    let power = 0;
    while (rest % divisor === 0n) {
      rest /= divisor;
      power++;
    }
    square *= divisor ** BigInt(power >> 1);
    if (power % 2 === 1) free *= divisor;
  }
  if (isSafe(rest)) {
    const split = splitSafe(Number(rest), 2);
    // the divisors taken out before do not divide the rest
    return { square: square * BigInt(split.square), free: free * BigInt(split.free), certified: true };
  }
  const root = exactSqrt(rest);
  if (root !== undefined) return { square: square * root, free, certified: true };
  return { square, free: free * rest, certified: false };
}

/** The same for a safe integer, complete. */
export function splitSafe(n: number, from = 2): { square: number; free: number } {
  let square = 1;
  let free = 1;
  let rest = n;
  for (let k = from; k * k * k <= rest; k += k === 2 ? 1 : 2) {
    let power = 0;
    while (rest % k === 0) {
      rest /= k;
      power++;
    }
    if (power > 0) {
      square *= k ** (power >> 1);
      if (power % 2 === 1) free *= k;
    }
  }
  // no divisor up to the cube root is left, but the loop may have stopped before one that divides twice
  const root = Math.round(Math.sqrt(rest));
  if (root * root === rest) return { square: square * root, free };
  return { square, free: free * rest };
}
