import type { Csr } from "../numerics/csr.js";
import type { Dense } from "../numerics/dense.js";
import {
  conjugate,
  dropZeros,
  fromDense,
  fullCsr,
  isFull,
  multiply,
  productOfRows,
  toDense,
  transpose,
} from "../numerics/sparse.js";

/** Up to this many columns plain loops over dense rows cost less than setting up sparse ones. */
const DENSE_TO = 24;

/** Whether dense rows are the better form: few columns, or more than a quarter of all places filled. */
function isFilled(a: Csr): boolean {
  return a.cols <= DENSE_TO || 4 * a.re.length > a.rows * a.cols;
}

/**
 * The matrix of elements u_i† B u_j between the rows of U: (conj(U) B) Uᵀ.
 *
 * @param rows - U, d × n
 * @param operator - B, n × n
 */
export function rotated(rows: Csr, operator: Csr): Csr {
  const left = conjugate(rows);
  if (!isFilled(rows)) return multiply(left, multiply(operator, transpose(rows)));
  const d = rows.rows;
  const n = rows.cols;
  const half = isFilled(operator)
    ? productOfRows(d, n, n, dense(left), dense(operator))
    : dense(multiply(left, operator));
  return sparse(d, d, productWithTranspose(d, d, n, half, dense(rows)));
}

/**
 * The rows of U F: combinations of the rows of F.
 *
 * @param rows - U, d × k
 * @param frame - F, k × n
 */
export function composed(rows: Csr, frame: Csr): Csr {
  if (isIdentity(frame)) return rows;
  if (!isFilled(rows) || !isFilled(frame)) return multiply(rows, frame);
  return sparse(rows.rows, frame.cols, productOfRows(rows.rows, rows.cols, frame.cols, dense(rows), dense(frame)));
}

/** `count` rows from a given one on. */
export function rowRange(a: Csr, from: number, count: number): Csr {
  if (count === a.rows) return a;
  const start = a.ptr[from] as number;
  const end = a.ptr[from + count] as number;
  const ptr = new Int32Array(count + 1);
  for (let r = 1; r <= count; r++) ptr[r] = (a.ptr[from + r] as number) - start;
  return {
    rows: count,
    cols: a.cols,
    ptr,
    col: a.col.slice(start, end),
    re: a.re.slice(start, end),
    im: a.im === undefined ? undefined : dropZeros(a.im.slice(start, end)),
  };
}

/** Row-major entries; those of a matrix without a gap are its own. */
function dense(a: Csr): Dense {
  return isFull(a) ? a : toDense(a);
}

/** Entries that are exactly zero are not stored. */
function sparse(rows: number, cols: number, found: Dense): Csr {
  const { re, im } = found;
  for (let k = 0; k < re.length; k++) {
    if (re[k] === 0 && (im === undefined || im[k] === 0)) return fromDense(rows, cols, re, im);
  }
  return fullCsr(rows, cols, found);
}

/** Whether a matrix is the identity. */
export function isIdentity({ rows, cols, ptr, col, re, im }: Csr): boolean {
  if (rows !== cols || re.length !== rows || im !== undefined) return false;
  for (let k = 0; k < rows; k++) if (ptr[k] !== k || col[k] !== k || re[k] !== 1) return false;
  return true;
}

/** X Yᵀ for X m × k and Y n × k. */
function productWithTranspose(m: number, n: number, k: number, x: Dense, y: Dense): Dense {
  const re = new Float64Array(m * n);
  addTransposed(m, n, k, x.re, y.re, 1, re);
  if (x.im === undefined && y.im === undefined) return { re, im: undefined };
  const im = new Float64Array(m * n);
  if (y.im !== undefined) addTransposed(m, n, k, x.re, y.im, 1, im);
  if (x.im !== undefined) addTransposed(m, n, k, x.im, y.re, 1, im);
  if (x.im !== undefined && y.im !== undefined) addTransposed(m, n, k, x.im, y.im, -1, re);
  return { re, im };
}

/** out += ± X Yᵀ, four rows of Y at a time. */
function addTransposed(
  m: number,
  n: number,
  k: number,
  x: Float64Array,
  y: Float64Array,
  sign: number,
  out: Float64Array,
): void {
  for (let i = 0; i < m; i++) {
    const from = i * k;
    let at = i * n;
    let j = 0;
    for (; j + 3 < n; j += 4, at += 4) {
      const q = j * k;
      let s0 = 0;
      let s1 = 0;
      let s2 = 0;
      let s3 = 0;
      for (let a = 0; a < k; a++) {
        const u = x[from + a] as number;
        s0 += u * (y[q + a] as number);
        s1 += u * (y[q + k + a] as number);
        s2 += u * (y[q + 2 * k + a] as number);
        s3 += u * (y[q + 3 * k + a] as number);
      }
      out[at] = (out[at] as number) + sign * s0;
      out[at + 1] = (out[at + 1] as number) + sign * s1;
      out[at + 2] = (out[at + 2] as number) + sign * s2;
      out[at + 3] = (out[at + 3] as number) + sign * s3;
    }
    for (; j < n; j++, at++) {
      let sum = 0;
      for (let a = 0; a < k; a++) sum += (x[from + a] as number) * (y[j * k + a] as number);
      out[at] = (out[at] as number) + sign * sum;
    }
  }
}
