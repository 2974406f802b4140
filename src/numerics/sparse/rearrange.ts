import type { Csr } from "../csr.js";
import { dropZeros } from "./build.js";

/** A rearranged matrix with, for each of its entries, the number of the entry that it came from. */
export interface Rearranged {
  readonly csr: Csr;
  readonly order: Int32Array;
}

/** The transpose, and where each of its entries came from. O(entries + rows + cols). */
export function transposeOrder(a: Csr): Rearranged {
  const count = a.col.length;
  const ptr = new Int32Array(a.cols + 1);
  for (let e = 0; e < count; e++) {
    const slot = (a.col[e] as number) + 1;
    ptr[slot] = (ptr[slot] as number) + 1;
  }
  for (let c = 0; c < a.cols; c++) ptr[c + 1] = (ptr[c + 1] as number) + (ptr[c] as number);
  const next = ptr.slice(0, a.cols);
  const col = new Int32Array(count);
  const order = new Int32Array(count);
  for (let r = 0; r < a.rows; r++) {
    const end = a.ptr[r + 1] as number;
    for (let e = a.ptr[r] as number; e < end; e++) {
      const c = a.col[e] as number;
      const slot = next[c] as number;
      next[c] = slot + 1;
      col[slot] = r;
      order[slot] = e;
    }
  }
  const re = gather(a.re, order);
  const im = a.im === undefined ? undefined : gather(a.im, order);
  return { csr: { rows: a.cols, cols: a.rows, ptr, col, re, im }, order };
}

/** The entries `values[order[0]], values[order[1]], …`. */
export function gather(values: Float64Array, order: Int32Array): Float64Array {
  const out = new Float64Array(order.length);
  for (let e = 0; e < order.length; e++) out[e] = values[order[e] as number] as number;
  return out;
}

/** The transpose Aᵀ. */
export function transpose(a: Csr): Csr {
  return transposeOrder(a).csr;
}

/** The complex conjugate, entry by entry. */
export function conjugate(a: Csr): Csr {
  return a.im === undefined ? a : { ...a, im: negated(a.im) };
}

/** The adjoint A†, the conjugated transpose. */
export function adjoint(a: Csr): Csr {
  return conjugate(transpose(a));
}

function negated(values: Float64Array): Float64Array {
  const out = new Float64Array(values.length);
  for (let e = 0; e < values.length; e++) out[e] = 0 - (values[e] as number);
  return out;
}

/** The rows of the given numbers, in that order; all columns kept. */
export function selectRows(a: Csr, indices: ArrayLike<number>): Csr {
  const ptr = new Int32Array(indices.length + 1);
  for (let r = 0; r < indices.length; r++) {
    const row = indices[r] as number;
    ptr[r + 1] = (ptr[r] as number) + (a.ptr[row + 1] as number) - (a.ptr[row] as number);
  }
  const count = ptr[indices.length] as number;
  const col = new Int32Array(count);
  const re = new Float64Array(count);
  const im = a.im === undefined ? undefined : new Float64Array(count);
  for (let r = 0, f = 0; r < indices.length; r++) {
    const row = indices[r] as number;
    const end = a.ptr[row + 1] as number;
    for (let e = a.ptr[row] as number; e < end; e++, f++) {
      col[f] = a.col[e] as number;
      re[f] = a.re[e] as number;
      if (im !== undefined && a.im !== undefined) im[f] = a.im[e] as number;
    }
  }
  return { rows: indices.length, cols: a.cols, ptr, col, re, im: dropZeros(im) };
}

/**
 * The square submatrix on the given indices: entry (r, c) of the result is entry (indices[r], indices[c]) of `a`.
 *
 * @param a - a square matrix
 * @param indices - distinct indices, in any order
 * @param positions - for every index of `a` its place in `indices`, or −1; made when not given (O(n)); hand over one array for
 *   many small blocks to pay only for the rows that are read
 */
export function submatrix(a: Csr, indices: ArrayLike<number>, positions?: Int32Array): Csr {
  return submatrixOrder(a, indices, positions).csr;
}

/** {@link submatrix}, and where each entry came from. */
export function submatrixOrder(a: Csr, indices: ArrayLike<number>, positions?: Int32Array): Rearranged {
  const size = indices.length;
  const place = positions ?? placesOf(a.cols, indices);
  const ptr = new Int32Array(size + 1);
  let count = 0;
  let ascending = true;
  for (let r = 0; r < size; r++) {
    const row = indices[r] as number;
    if (r > 0 && row < (indices[r - 1] as number)) ascending = false;
    const end = a.ptr[row + 1] as number;
    for (let e = a.ptr[row] as number; e < end; e++) if ((place[a.col[e] as number] as number) >= 0) count++;
    ptr[r + 1] = count;
  }
  const col = new Int32Array(count);
  const order = new Int32Array(count);
  for (let r = 0, f = 0; r < size; r++) {
    const row = indices[r] as number;
    const end = a.ptr[row + 1] as number;
    for (let e = a.ptr[row] as number; e < end; e++) {
      const c = place[a.col[e] as number] as number;
      if (c < 0) continue;
      col[f] = c;
      order[f] = e;
      f++;
    }
  }
  const re = gather(a.re, order);
  const im = a.im === undefined ? undefined : dropZeros(gather(a.im, order));
  const csr: Csr = { rows: size, cols: size, ptr, col, re, im };
  if (ascending) return { csr, order };
  // Transposing twice sorts the columns of every row.
  const once = transposeOrder(csr);
  const twice = transposeOrder(once.csr);
  const sorted = new Int32Array(count);
  for (let e = 0; e < count; e++) sorted[e] = order[once.order[twice.order[e] as number] as number] as number;
  return { csr: twice.csr, order: sorted };
}

function placesOf(n: number, indices: ArrayLike<number>): Int32Array {
  const place = new Int32Array(n).fill(-1);
  for (let k = 0; k < indices.length; k++) place[indices[k] as number] = k;
  return place;
}
