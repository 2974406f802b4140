import type { Csr } from "../numerics/csr.js";
import { roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { euclidean, frobenius, largestColumnSum, largestRowSum } from "../numerics/sparse.js";
import { modulusAbove, type Uncertain } from "./radius.js";

/**
 * An upper bound on the 2-norm of the matrix of moduli: the smaller of √(‖A‖₁ ‖A‖∞) and ‖A‖_F (Higham, Accuracy and Stability
 * of Numerical Algorithms, §6.2), rounded up.
 */
export function normBound(csr: Csr): number {
  const value = (e: number): number => modulusAbove(csr, e);
  return boundFrom(csr, value, frobenius(csr));
}

/** An upper bound on the 2-norm of the matrix of radii. */
export function errorBound(matrix: Uncertain, norm: number): number {
  const { csr, radius } = matrix;
  if (radius === "exact" || norm + csr.col.length === 0) return 0;
  if (radius === "default") return norm === 0 ? 0 : roundUp(UNIT_ROUNDOFF * norm) + csr.rows * UNDERFLOW;
  return boundFrom(csr, (e) => radius[e] as number, euclidean(radius));
}

function boundFrom(csr: Csr, value: (e: number) => number, euclid: number): number {
  const columns = largestColumnSum(csr, value);
  if (columns === 0) return 0;
  const rows = largestRowSum(csr, value);
  // Sums of at most n terms; the Frobenius sum has one for each entry, which pairwise bounds of n² would exceed.
  // Equal ones, as of any Hermitian matrix, need no root: the bound then scales with the unit to the last bit.
  const holder = roundUp(columns === rows ? columns : Math.sqrt(columns) * Math.sqrt(rows), csr.rows + csr.cols + 8);
  const entries = roundUp(euclid, 2 * csr.col.length + 16);
  return Math.min(holder, entries);
}
