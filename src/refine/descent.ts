import type { Csr } from "../numerics/csr.js";
import { gamma, rootOfSquares, roundUp, UNDERFLOW } from "../numerics/rounding.js";
import { frobenius, maxRowEntries, norm1, normInf, submatrix } from "../numerics/sparse.js";
import type { Operator } from "../operator/operator.js";
import { boundModulus } from "../operator/radius.js";
import type { Eigenspace, Split } from "./eigenspaces.js";
import { rotated } from "./rotate.js";

/** One step down the tree: a block's vectors F replaced by U F, U the rows of all children. */
export interface DescentStep {
  readonly spaces: readonly Eigenspace[];
  /** Rows of U, child after child. */
  readonly rows: Csr;
  /** Where every row of U is one vector of the block: which. */
  readonly indices: Int32Array | undefined;
  /** Bound on the Frobenius norm of the rounding errors of U F. */
  readonly compositionError: number;
  /** The same for one row. */
  readonly rowError: number;
}

/** Prepares a step; nothing is computed twice for the operators that go through it. */
export function descentStep(
  { spaces, rows, indices }: Pick<Split, "spaces" | "rows" | "indices">,
  block: { readonly frame: Csr },
): DescentStep {
  if (indices !== undefined) return { spaces, rows, indices, compositionError: 0, rowError: 0 };
  const rowError = compositionRowError(maxRowEntries(rows), block.frame);
  return { spaces, rows, indices, rowError, compositionError: roundUp(frobenius(rows) * rowError * 1.01) };
}

/**
 * Bound on the rounding error of one row of U F, for unit rows of U with at most m entries: each component is a sum of at most
 * m products, in error by at most √2 γ_{m+2} (|u||F|)_k (complex products, Higham ch. 3), and ‖|u||F|‖ ≤ √m max‖F_i‖. Where
 * products underflow, each of the two parts of a component is off by at most m times the smallest number more.
 */
export function compositionRowError(longest: number, frame: Csr): number {
  if (longest === 0 || frame.re.length === 0) return 0;
  const underflow = 2 * longest * frame.cols * UNDERFLOW;
  return roundUp(Math.SQRT2 * gamma(longest + 4) * Math.sqrt(longest) * longestRow(frame) + underflow, 16);
}

/**
 * Bound on the distance of each new vector from the exact combination of the kets that the tree describes, given the same for
 * the block's vectors: a unit row of m entries adds up m of their errors, so these grow by at most Σ|u_i| ≤ √m.
 *
 * @param before - the bound for the block's vectors
 */
export function carriedRowError(step: DescentStep, before: number): number {
  return roundUp(Math.sqrt(maxRowEntries(step.rows)) * before * 1.001 + step.rowError);
}

/** An operator carried through a step. */
export interface Carried {
  /** Its matrix in each child. */
  readonly children: readonly Csr[];
  /** Bound on the 2-norm of its elements between different children, as computed. */
  readonly crossing: number;
}

/** Carries an operator through a step: conj(U) B Uᵀ, taken apart into the children and what lies between them. */
export function rotateAll(step: DescentStep, operator: Csr): Carried {
  const { rows, indices, spaces } = step;
  const all = indices === undefined ? rotated(rows, operator) : submatrix(operator, indices);
  const bounds: number[] = [];
  let at = 0;
  for (const space of spaces) {
    bounds.push(at);
    at += space.size;
  }
  bounds.push(at);
  return {
    children: spaces.map((_, c) => diagonalBlock(all, bounds[c] ?? 0, bounds[c + 1] ?? at)),
    crossing: crossingNorm(all, bounds),
  };
}

/** Rows and columns from .. to − 1. */
function diagonalBlock(matrix: Csr, from: number, to: number): Csr {
  const size = to - from;
  const ptr = new Int32Array(size + 1);
  let total = 0;
  for (let r = 0; r < size; r++) {
    for (let p = matrix.ptr[from + r] as number; p < (matrix.ptr[from + r + 1] as number); p++) {
      const c = matrix.col[p] as number;
      if (c >= from && c < to) total++;
    }
    ptr[r + 1] = total;
  }
  const col = new Int32Array(total);
  const re = new Float64Array(total);
  const im = matrix.im === undefined ? undefined : new Float64Array(total);
  let at = 0;
  let complex = false;
  for (let p = matrix.ptr[from] as number; p < (matrix.ptr[to] as number); p++) {
    const c = matrix.col[p] as number;
    if (c < from || c >= to) continue;
    col[at] = c - from;
    re[at] = matrix.re[p] as number;
    if (im !== undefined && matrix.im !== undefined) {
      const y = matrix.im[p] as number;
      im[at] = y;
      if (y !== 0) complex = true;
    }
    at++;
  }
  return { rows: size, cols: size, ptr, col, re, im: complex ? im : undefined };
}

/** √(‖X‖₁‖X‖_∞) of the part X outside the diagonal blocks. */
function crossingNorm(matrix: Csr, bounds: readonly number[]): number {
  const columns = new Float64Array(matrix.cols);
  let largestRow = 0;
  let block = 0;
  for (let r = 0; r < matrix.rows; r++) {
    while (r >= (bounds[block + 1] as number)) block++;
    const from = bounds[block] as number;
    const to = bounds[block + 1] as number;
    let row = 0;
    for (let p = matrix.ptr[r] as number; p < (matrix.ptr[r + 1] as number); p++) {
      const c = matrix.col[p] as number;
      if (c >= from && c < to) continue;
      const size = boundModulus(matrix.re[p] as number, matrix.im === undefined ? 0 : (matrix.im[p] as number));
      row += size;
      columns[c] = (columns[c] as number) + size;
    }
    if (row > largestRow) largestRow = row;
  }
  let largestColumn = 0;
  for (const sum of columns) if (sum > largestColumn) largestColumn = sum;
  return roundUp(Math.sqrt(largestRow) * Math.sqrt(largestColumn), matrix.rows + 16);
}

/**
 * Bound on the distance of the carried matrix from the exact one over the stored new vectors, given the same for the old.
 *
 * For rows of U with at most m entries both products sum at most m terms, so the error is at most √2 γ_{2m+8} |U||B||U|ᵀ
 * entry by entry, in norm at most that times ‖|U|‖² ‖|B|‖. Underflow costs the inner sums m times the smallest number in each
 * part, the outer ones m times as much and as much again, d² entries together at most 8dm² of it. The new vectors differ from
 * U F by their composition error E, which moves the exact elements by at most 2‖V‖‖E‖ and a little.
 *
 * @param restricted - the operator's matrix in the block, before the step
 */
export function rotationError(step: DescentStep, restricted: Csr, operator: Operator, before: number): number {
  if (step.indices !== undefined) return before;
  const { rows } = step;
  const longest = maxRowEntries(rows);
  const moduli = norm1(rows) * normInf(rows) * Math.sqrt(norm1(restricted)) * Math.sqrt(normInf(restricted));
  const product = Math.SQRT2 * gamma(2 * longest + 8) * moduli;
  const displaced = 2.01 * (operator.norm + operator.error) * step.compositionError;
  // one more for the products of the bound itself
  const underflow = operator.norm + operator.error === 0 ? 0 : 8 * (rows.rows * longest ** 2 + 1) * UNDERFLOW;
  return roundUp(before * 1.001 + product + displaced + underflow, rows.rows + 64);
}

function longestRow(frame: Csr): number {
  let most = 0;
  for (let r = 0; r < frame.rows; r++) {
    let square = 0;
    for (let p = frame.ptr[r] as number; p < (frame.ptr[r + 1] as number); p++) {
      const x = frame.re[p] as number;
      const y = frame.im === undefined ? 0 : (frame.im[p] as number);
      square += x * x + y * y;
    }
    if (square > most) most = square;
  }
  const longest = maxRowEntries(frame);
  return roundUp(rootOfSquares(most, longest), longest + 4);
}
