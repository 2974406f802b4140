import type { Csr } from "../numerics/csr.js";
import { gamma, roundUp, UNDERFLOW } from "../numerics/rounding.js";
import { maxRowEntries, transpose } from "../numerics/sparse.js";
import type { Operator } from "../operator/operator.js";
import { imageError } from "./residuals.js";

/**
 * Bound on ‖Q Q† − 1‖_F from its computed elements. Each is a sum of at most m products, in error by at most
 * √2 γ_{m+2} ‖q_μ‖ ‖q_ν‖; two vectors with no common ket are exactly orthogonal.
 *
 * @param longest - bound on ‖q‖ of all vectors, where it may exceed 1.004
 */
export function gramDefect(vectors: Csr, longest = 1): number {
  const error = gramElementError(vectors) * longest * longest;
  const total = { square: 0 };
  forEachProduct(vectors, vectors, (r, c, re, im, common) => {
    if (common === 0 && r !== c) return;
    const x = re - (r === c ? 1 : 0);
    if (x === 0 && im === 0 && single(vectors, r) && single(vectors, c)) return;
    total.square += (r === c ? 1 : 2) * (Math.sqrt(x * x + im * im) + error) ** 2;
  });
  return roundUp(Math.sqrt(total.square), vectors.rows * vectors.rows + 8);
}

/** Bound on the error of one computed inner product of two of the vectors, for norms up to 1.004. */
export function gramElementError(vectors: Csr): number {
  return Math.SQRT2 * gamma(maxRowEntries(vectors) + 4) * 1.01;
}

/** A row that is one ket with coefficient 1: its products are exact. */
function single(vectors: Csr, row: number): boolean {
  const p = vectors.ptr[row] as number;
  return (vectors.ptr[row + 1] as number) - p === 1 && vectors.re[p] === 1 && (vectors.im?.[p] ?? 0) === 0;
}

/** Up to this many rows are multiplied pair by pair; more of them through the transpose of the left factor. */
const FEW_ROWS = 4;

/**
 * Calls back with Σ_k conj(a_rk) b_ck for every r ≤ c, and in how many kets the two rows meet; sums go by ascending k.
 *
 * The cost is the number of products that are not zero and of pairs, in the way of a sparse product by rows (Gustavson, ACM
 * Trans. Math. Softw. 4, 250 (1978)).
 */
export function forEachProduct(
  a: Csr,
  b: Csr,
  visit: (r: number, c: number, re: number, im: number, common: number) => void,
): void {
  if (a.rows <= FEW_ROWS) {
    for (let c = 0; c < b.rows; c++) for (let r = 0; r <= c; r++) visitPair(a, r, b, c, visit);
    return;
  }
  const columns = transpose(a);
  const re = new Float64Array(a.rows);
  const im = new Float64Array(a.rows);
  const common = new Int32Array(a.rows);
  const real = a.im === undefined && b.im === undefined;
  for (let c = 0; c < b.rows; c++) {
    re.fill(0, 0, c + 1);
    im.fill(0, 0, c + 1);
    common.fill(0, 0, c + 1);
    if (real) addReal(columns, b, c, re, common);
    else addComplex(columns, b, c, re, im, common);
    for (let r = 0; r <= c; r++) visit(r, c, re[r] as number, im[r] as number, common[r] as number);
  }
}

/** Adds a_rk b_ck to the sums of all rows r ≤ c, for real factors; `columns` is the transpose of a. */
function addReal(columns: Csr, b: Csr, c: number, re: Float64Array, common: Int32Array): void {
  const { ptr, col, re: values } = columns;
  const end = b.ptr[c + 1] as number;
  for (let q = b.ptr[c] as number; q < end; q++) {
    const k = b.col[q] as number;
    const u = b.re[q] as number;
    const stop = ptr[k + 1] as number;
    for (let p = ptr[k] as number; p < stop; p++) {
      const r = col[p] as number;
      if (r > c) break;
      re[r] = (re[r] as number) + (values[p] as number) * u;
      common[r] = (common[r] as number) + 1;
    }
  }
}

/** The same where a factor is complex. */
function addComplex(columns: Csr, b: Csr, c: number, re: Float64Array, im: Float64Array, common: Int32Array): void {
  const { ptr, col, re: values, im: imaginary } = columns;
  const end = b.ptr[c + 1] as number;
  for (let q = b.ptr[c] as number; q < end; q++) {
    const k = b.col[q] as number;
    const u = b.re[q] as number;
    const v = b.im === undefined ? 0 : (b.im[q] as number);
    const stop = ptr[k + 1] as number;
    for (let p = ptr[k] as number; p < stop; p++) {
      const r = col[p] as number;
      if (r > c) break;
      const x = values[p] as number;
      const y = imaginary === undefined ? 0 : (imaginary[p] as number);
      re[r] = (re[r] as number) + (x * u + y * v);
      im[r] = (im[r] as number) + (x * v - y * u);
      common[r] = (common[r] as number) + 1;
    }
  }
}

/** Calls back with the product of one row of each, walking along both. */
function visitPair(
  a: Csr,
  r: number,
  b: Csr,
  c: number,
  visit: (r: number, c: number, re: number, im: number, common: number) => void,
): void {
  let p = a.ptr[r] as number;
  let q = b.ptr[c] as number;
  const pEnd = a.ptr[r + 1] as number;
  const qEnd = b.ptr[c + 1] as number;
  let re = 0;
  let im = 0;
  let common = 0;
  while (p < pEnd && q < qEnd) {
    const step = (a.col[p] as number) - (b.col[q] as number);
    if (step === 0) {
      common++;
      const x = a.re[p] as number;
      const y = a.im === undefined ? 0 : (a.im[p] as number);
      const u = b.re[q] as number;
      const v = b.im === undefined ? 0 : (b.im[q] as number);
      re += x * u + y * v;
      im += x * v - y * u;
    }
    if (step <= 0) p++;
    if (step >= 0) q++;
  }
  visit(r, c, re, im, common);
}

/** Bound on the error of one element: the image's error, and a sum of at most m products with ‖q‖ ‖Vq‖ as the scale. */
export function elementErrorBound(operator: Operator, vectors: Csr): number {
  const sum = Math.SQRT2 * gamma(maxRowEntries(vectors) + 4) * operator.norm;
  const underflow = operator.norm === 0 ? 0 : 4 * maxRowEntries(vectors) * UNDERFLOW;
  return roundUp((imageError(operator) + sum) * (1 + 2 ** -18) + underflow);
}
