/**
 * Rounding-error bounds in the manner of Higham, Accuracy and Stability of Numerical Algorithms, ch. 3.
 *
 * Every bound that reaches a certificate is assembled from these few functions. They are valid for IEEE 754 double
 * precision, rounding to nearest.
 */

/** Unit roundoff of double precision, 2^−53. */
export const UNIT_ROUNDOFF: number = 2 ** -53;

/**
 * Smallest positive number, 2^−1074: one operation whose result underflows is in error by at most half of this, and a sum
 * of m products by at most m of it.
 */
export const UNDERFLOW: number = 2 ** -1074;

/**
 * An upper bound on γ_k = k u / (1 − k u), the relative error of k rounded operations.
 *
 * @param k - number of roundings on the longest path, k u < 1/2
 */
export function gamma(k: number): number {
  const ku = k * UNIT_ROUNDOFF;
  return ku < 0.5 ? (ku / (1 - ku)) * (1 + 4 * UNIT_ROUNDOFF) : Number.POSITIVE_INFINITY;
}

/**
 * Rounds a non-negative bound up: covers the rounding of the `operations` additions, multiplications, divisions and square
 * roots of non-negative numbers by which the bound itself was evaluated.
 *
 * @param bound - a bound evaluated in floating point from non-negative terms
 * @param operations - number of roundings on the longest path of that evaluation
 */
export function roundUp(bound: number, operations = 8): number {
  return bound === 0 ? 0 : bound * (1 + 2 * operations * UNIT_ROUNDOFF) + UNDERFLOW;
}

/** Rounds a non-negative lower bound down, as {@link roundUp} rounds an upper one up; never below zero. */
export function roundDown(bound: number, operations = 8): number {
  return Math.max(0, bound * (1 - 2 * operations * UNIT_ROUNDOFF) - UNDERFLOW);
}

/**
 * The root of a sum of squares of `terms` complex numbers that differ from zero, not rounded up: each square may have lost
 * half the smallest positive number, twice, which no relative bound covers once the numbers are below 1e-154.
 *
 * @param sum - the computed sum of squares
 * @param terms - how many complex numbers other than zero it is of; none gives exactly zero
 */
export function rootOfSquares(sum: number, terms: number): number {
  return terms === 0 ? 0 : Math.sqrt(sum + terms * UNDERFLOW);
}
