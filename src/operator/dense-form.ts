import type { Csr } from "../numerics/csr.js";
import type { Dense } from "../numerics/dense.js";
import { dropZeros, fullCsr } from "../numerics/sparse.js";

/** Numbers attached to the entries of a square matrix, spread over dense rows. */
export function denseOf(csr: Csr, values: Float64Array): Float64Array {
  const n = csr.cols;
  // without a gap the entries are the dense rows themselves
  if (values.length === csr.rows * n) return values;
  const out = new Float64Array(csr.rows * n);
  for (let r = 0; r < csr.rows; r++) {
    const end = csr.ptr[r + 1] as number;
    for (let e = csr.ptr[r] as number; e < end; e++) out[r * n + (csr.col[e] as number)] = values[e] as number;
  }
  return out;
}

/** A matrix over dense rows. */
export function denseForm(csr: Csr): Dense {
  return { re: denseOf(csr, csr.re), im: csr.im === undefined ? undefined : denseOf(csr, csr.im) };
}

/** Sparse rows of all places where the value or its radius is not zero, and their radii. */
export function keepNonzero(n: number, value: Dense, bounds: Float64Array): [Csr, Float64Array] {
  const kept = (k: number): boolean =>
    bounds[k] !== 0 || value.re[k] !== 0 || (value.im !== undefined && value.im[k] !== 0);
  let count = 0;
  for (let k = 0; k < n * n; k++) if (kept(k)) count++;
  if (count === n * n) return [fullCsr(n, n, value), bounds];
  const ptr = new Int32Array(n + 1);
  const col = new Int32Array(count);
  const re = new Float64Array(count);
  const im = value.im === undefined ? undefined : new Float64Array(count);
  const radius = new Float64Array(count);
  let e = 0;
  for (let row = 0, k = 0; row < n; row++) {
    for (let c = 0; c < n; c++, k++) {
      if (!kept(k)) continue;
      col[e] = c;
      re[e] = value.re[k] as number;
      if (im !== undefined && value.im !== undefined) im[e] = value.im[k] as number;
      radius[e] = bounds[k] as number;
      e++;
    }
    ptr[row + 1] = e;
  }
  return [{ rows: n, cols: n, ptr, col, re, im: dropZeros(im) }, radius];
}
