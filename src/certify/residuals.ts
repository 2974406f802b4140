import type { Complex } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, rootOfSquares, roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { longestColumn } from "../operator/images.js";
import type { Operator } from "../operator/operator.js";

/**
 * Bound on the rounding and entry errors of one computed image A q for ‖q‖ ≤ 1 + 2^−20: the k-th component is a sum of at
 * most m products (m the longest row of A, or of its adjoint), so its error is at most √2 γ_{m+2} (|A||q|)_k (complex
 * products, Higham ch. 3); ‖|A||q|‖ ≤ ‖|A|‖₂ ‖q‖. The entries' own errors add ‖ΔA‖₂ ‖q‖, and every
 * product may underflow.
 */
export function imageError(operator: Operator): number {
  const longest = Math.max(operator.rowEntries, longestColumn(operator));
  const underflow = operator.norm === 0 ? 0 : 4 * operator.n * longest * UNDERFLOW;
  return roundUp((Math.SQRT2 * gamma(longest + 4) * operator.norm + operator.error) * (1 + 2 ** -19) + underflow, 16);
}

/**
 * Rigorous bounds on ‖A q − a q‖ for every row q.
 *
 * @param rows - computed images, as rows
 * @param vectors - the vectors q, as rows
 * @param value - the number a of each row
 * @param error - bound on the error of each image, see {@link imageError}
 */
export function residualBounds(rows: Csr, vectors: Csr, value: (row: number) => Complex, error: number): Float64Array {
  const out = new Float64Array(vectors.rows);
  for (let r = 0; r < vectors.rows; r++) {
    const a = value(r);
    const { square, terms } = difference(rows, vectors, r, a, undefined);
    // a q and the subtraction: at most 4 roundings of size |a||q_k| each, and one of the difference itself
    const rounding = 5 * UNIT_ROUNDOFF * (Math.abs(a.re) + Math.abs(a.im));
    out[r] = roundUp(rootOfSquares(square, terms) + error + rounding, terms + 8);
  }
  return out;
}

/** Norms of the computed residuals A q − a q of all rows together: a bound on the 2-norm by √(‖·‖₁‖·‖_∞), and Frobenius. */
export function residualRows(rows: Csr, vectors: Csr, a: Complex): { norm: number; frobenius: number } {
  const columns = new Map<number, number>();
  let square = 0;
  let terms = 0;
  let largestRow = 0;
  for (let r = 0; r < vectors.rows; r++) {
    const found = difference(rows, vectors, r, a, columns);
    square += found.square;
    terms += found.terms;
    largestRow = Math.max(largestRow, found.sum);
  }
  let largestColumn = 0;
  for (const sum of columns.values()) largestColumn = Math.max(largestColumn, sum);
  const operations = vectors.re.length + 8;
  return {
    norm: roundUp(Math.sqrt(largestRow) * Math.sqrt(largestColumn), operations),
    frobenius: roundUp(rootOfSquares(square, terms), operations),
  };
}

/**
 * One row of `rows` − a · `vectors`: the sum of its squared moduli, how many elements differ from zero, and, where column sums
 * are kept, the sum of its moduli, each added to the sum of its column.
 */
function difference(
  rows: Csr,
  vectors: Csr,
  row: number,
  a: Complex,
  columns: Map<number, number> | undefined,
): { square: number; terms: number; sum: number } {
  let p = rows.ptr[row] as number;
  let q = vectors.ptr[row] as number;
  const pEnd = rows.ptr[row + 1] as number;
  const qEnd = vectors.ptr[row + 1] as number;
  let square = 0;
  let terms = 0;
  let sum = 0;
  while (p < pEnd || q < qEnd) {
    const i = p < pEnd ? (rows.col[p] as number) : rows.cols;
    const j = q < qEnd ? (vectors.col[q] as number) : rows.cols;
    let x = 0;
    let y = 0;
    if (i <= j) {
      x = rows.re[p] as number;
      y = rows.im === undefined ? 0 : (rows.im[p] as number);
      p++;
    }
    if (j <= i) {
      const u = vectors.re[q] as number;
      const v = vectors.im === undefined ? 0 : (vectors.im[q] as number);
      x -= a.re * u - a.im * v;
      y -= a.re * v + a.im * u;
      q++;
    }
    if (x === 0 && y === 0) continue;
    terms++;
    square += x * x + y * y;
    if (columns === undefined) continue;
    const size = rootOfSquares(x * x + y * y, 1);
    sum += size;
    const column = Math.min(i, j);
    columns.set(column, (columns.get(column) ?? 0) + size);
  }
  return { square, terms, sum };
}

/** Σ_k conj(a_k) b_k over one row of each. */
export function rowProduct(a: Csr, ra: number, b: Csr, rb: number): Complex {
  let p = a.ptr[ra] as number;
  let q = b.ptr[rb] as number;
  const pEnd = a.ptr[ra + 1] as number;
  const qEnd = b.ptr[rb + 1] as number;
  let re = 0;
  let im = 0;
  while (p < pEnd && q < qEnd) {
    const i = a.col[p] as number;
    const j = b.col[q] as number;
    if (i < j) p++;
    else if (j < i) q++;
    else {
      const x = a.re[p] as number;
      const y = a.im === undefined ? 0 : (a.im[p] as number);
      const u = b.re[q] as number;
      const v = b.im === undefined ? 0 : (b.im[q] as number);
      re += x * u + y * v;
      im += x * v - y * u;
      p++;
      q++;
    }
  }
  return { re, im };
}

/** √(Σ x²), rounded up. */
export function rootSumSquares(values: Float64Array): number {
  let sum = 0;
  let terms = 0;
  for (let k = 0; k < values.length; k++) {
    sum += (values[k] as number) ** 2;
    if (values[k] !== 0) terms++;
  }
  return roundUp(rootOfSquares(sum, terms), values.length + 4);
}
