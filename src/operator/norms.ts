import type { Csr } from "../numerics/csr.js";
import { roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { euclidean, frobenius } from "../numerics/sparse.js";
import { moduliAbove, type Uncertain } from "./radius.js";

/**
 * An upper bound on the 2-norm of the matrix of moduli: the smaller of √(‖A‖₁ ‖A‖∞) and ‖A‖_F (Higham, Accuracy and Stability
 * of Numerical Algorithms, §6.2), rounded up.
 */
export function normBound(csr: Csr): number {
  return boundFrom(csr, moduliAbove(csr), frobenius(csr));
}

/** An upper bound on the 2-norm of the matrix of radii. */
export function errorBound(matrix: Uncertain, norm: number): number {
  const { csr, radius } = matrix;
  if (radius === "exact" || norm + csr.col.length === 0) return 0;
  if (radius === "default") return norm === 0 ? 0 : roundUp(UNIT_ROUNDOFF * norm) + csr.rows * UNDERFLOW;
  return boundFrom(csr, radius, euclidean(radius));
}

/** From numbers attached to the entries that are not negative, and the root of the sum of their squares. */
function boundFrom({ rows, cols, ptr, col }: Csr, values: Float64Array, euclid: number): number {
  const columns = new Float64Array(cols);
  let row = 0;
  for (let r = 0; r < rows; r++) {
    let sum = 0;
    const end = ptr[r + 1] as number;
    for (let e = ptr[r] as number; e < end; e++) {
      const x = values[e] as number;
      const c = col[e] as number;
      sum += x;
      columns[c] = (columns[c] as number) + x;
    }
    if (sum > row) row = sum;
  }
  let column = 0;
  for (let c = 0; c < cols; c++) if ((columns[c] as number) > column) column = columns[c] as number;
  if (column === 0) return 0;
  // Equal ones, as of any Hermitian matrix, need no root: the bound then scales with the unit to the last bit. Sums of at most
  // n terms; the Frobenius sum has one for each entry, which pairwise bounds of n² would exceed.
  const holder = roundUp(column === row ? column : Math.sqrt(column) * Math.sqrt(row), rows + cols + 8);
  return Math.min(holder, roundUp(euclid, 2 * col.length + 16));
}
