import type { Csr } from "../csr.js";
import type { Dense } from "../dense.js";
import { dropZeros } from "./build.js";

/** Whether every place of a matrix holds an entry; `re` and `im` are then its dense rows. */
export function isFull(a: Csr): boolean {
  return a.re.length === a.rows * a.cols && a.rows > 0;
}

/** Dense rows as sparse ones, all entries stored, zeros as well; the arrays are taken over. */
export function fullCsr(rows: number, cols: number, { re, im }: Dense): Csr {
  const ptr = new Int32Array(rows + 1);
  const col = new Int32Array(rows * cols);
  for (let r = 0, k = 0; r < rows; r++) {
    for (let c = 0; c < cols; c++) col[k++] = c;
    ptr[r + 1] = k;
  }
  return { rows, cols, ptr, col, re, im: dropZeros(im) };
}

/**
 * XY for dense X, m × k, and Y, k × n, row-major: the terms of every entry are added in ascending order, as in a sparse product.
 */
export function productOfRows(m: number, k: number, n: number, x: Dense, y: Dense): Dense {
  const re = new Float64Array(m * n);
  if (x.im === undefined && y.im === undefined) {
    addReal(m, k, n, x.re, y.re, re);
    return { re, im: undefined };
  }
  const im = new Float64Array(m * n);
  if (y.im === undefined) {
    addReal(m, k, n, x.re, y.re, re);
    if (x.im !== undefined) addReal(m, k, n, x.im, y.re, im);
  } else if (x.im === undefined) {
    addReal(m, k, n, x.re, y.re, re);
    addReal(m, k, n, x.re, y.im, im);
  } else {
    addComplex(m, k, n, x.re, x.im, y.re, y.im, re, im);
  }
  return { re, im };
}

/** out += XY, four terms at a time and one after the other. */
function addReal(m: number, k: number, n: number, x: Float64Array, y: Float64Array, out: Float64Array): void {
  for (let i = 0; i < m; i++) {
    const row = i * k;
    const to = i * n;
    let a = 0;
    for (; a + 3 < k; a += 4) {
      const s0 = x[row + a] as number;
      const s1 = x[row + a + 1] as number;
      const s2 = x[row + a + 2] as number;
      const s3 = x[row + a + 3] as number;
      const q0 = a * n;
      const q1 = q0 + n;
      const q2 = q1 + n;
      const q3 = q2 + n;
      for (let j = 0; j < n; j++) {
        const sum = (out[to + j] as number) + s0 * (y[q0 + j] as number) + s1 * (y[q1 + j] as number);
        out[to + j] = sum + s2 * (y[q2 + j] as number) + s3 * (y[q3 + j] as number);
      }
    }
    for (; a < k; a++) {
      const s = x[row + a] as number;
      for (let j = 0, q = a * n; j < n; j++, q++) out[to + j] = (out[to + j] as number) + s * (y[q] as number);
    }
  }
}

function addComplex(
  m: number,
  k: number,
  n: number,
  xRe: Float64Array,
  xIm: Float64Array,
  yRe: Float64Array,
  yIm: Float64Array,
  re: Float64Array,
  im: Float64Array,
): void {
  for (let i = 0; i < m; i++) {
    for (let a = 0; a < k; a++) {
      const s = xRe[i * k + a] as number;
      const t = xIm[i * k + a] as number;
      for (let j = 0, p = i * n, q = a * n; j < n; j++, p++, q++) {
        const u = yRe[q] as number;
        const v = yIm[q] as number;
        re[p] = (re[p] as number) + (s * u - t * v);
        im[p] = (im[p] as number) + (s * v + t * u);
      }
    }
  }
}
