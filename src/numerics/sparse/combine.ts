import { imaginaryPart, realPart, type Scalar } from "../complex.js";
import type { Csr } from "../csr.js";
import { dropZeros } from "./build.js";

/** α A; the pattern is kept and shared. */
export function scale(alpha: Scalar, a: Csr): Csr {
  const x = realPart(alpha);
  const y = imaginaryPart(alpha);
  const count = a.col.length;
  const re = new Float64Array(count);
  if (y === 0) {
    for (let e = 0; e < count; e++) re[e] = x * (a.re[e] as number);
    if (a.im === undefined) return { ...a, re };
    const im = new Float64Array(count);
    for (let e = 0; e < count; e++) im[e] = x * (a.im[e] as number);
    return { ...a, re, im: dropZeros(im) };
  }
  const im = new Float64Array(count);
  for (let e = 0; e < count; e++) {
    const u = a.re[e] as number;
    const v = a.im === undefined ? 0 : (a.im[e] as number);
    re[e] = x * u - y * v;
    im[e] = x * v + y * u;
  }
  return { ...a, re, im: dropZeros(im) };
}

/**
 * α A + β B on the union of the two patterns; entries that cancel stay stored. O(entries).
 *
 * @param alpha - factor of A, real or complex
 * @param a - a matrix
 * @param beta - factor of B
 * @param b - a matrix of the same shape
 */
export function add(alpha: Scalar, a: Csr, beta: Scalar, b: Csr): Csr {
  const left = alpha === 1 ? a : scale(alpha, a);
  const right = beta === 1 ? b : scale(beta, b);
  const complex = left.im !== undefined || right.im !== undefined;
  const capacity = a.col.length + b.col.length;
  const ptr = new Int32Array(a.rows + 1);
  const col = new Int32Array(capacity);
  const re = new Float64Array(capacity);
  const im = complex ? new Float64Array(capacity) : undefined;
  let g = 0;
  for (let row = 0; row < a.rows; row++) {
    let e = a.ptr[row] as number;
    let f = b.ptr[row] as number;
    const eEnd = a.ptr[row + 1] as number;
    const fEnd = b.ptr[row + 1] as number;
    while (e < eEnd || f < fEnd) {
      const c = e < eEnd ? (a.col[e] as number) : b.cols;
      const d = f < fEnd ? (b.col[f] as number) : b.cols;
      let x = 0;
      let y = 0;
      if (c <= d) {
        x = left.re[e] as number;
        if (left.im !== undefined) y = left.im[e] as number;
        e++;
      }
      if (d <= c) {
        x += right.re[f] as number;
        if (right.im !== undefined) y += right.im[f] as number;
        f++;
      }
      col[g] = Math.min(c, d);
      re[g] = x;
      if (im !== undefined) im[g] = y;
      g++;
    }
    ptr[row + 1] = g;
  }
  const full = g === capacity;
  return {
    rows: a.rows,
    cols: a.cols,
    ptr,
    col: full ? col : col.slice(0, g),
    re: full ? re : re.slice(0, g),
    im: dropZeros(full ? im : im?.slice(0, g)),
  };
}
