import type { Complex } from "../complex.js";
import type { Csr } from "../csr.js";

/** The imaginary parts, or `undefined` where every one of them is zero. */
export function dropZeros(im: Float64Array | undefined): Float64Array | undefined {
  if (im === undefined) return undefined;
  for (let e = 0; e < im.length; e++) if (im[e] !== 0) return im;
  return undefined;
}

/**
 * Sparse rows from triplets; duplicates are summed in the order in which they come.
 *
 * Two stable counting sorts (by column, then by row): O(entries + rows + cols).
 *
 * @param rows - number of rows
 * @param cols - number of columns
 * @param i - row of each triplet, 0-based
 * @param j - column of each triplet, 0-based
 * @param re - real parts
 * @param im - imaginary parts
 */
export function fromTriplets(
  rows: number,
  cols: number,
  i: ArrayLike<number>,
  j: ArrayLike<number>,
  re: ArrayLike<number>,
  im?: ArrayLike<number>,
): Csr {
  const order = tripletOrder(rows, cols, i, j);
  const count = order.length;
  const ptr = new Int32Array(rows + 1);
  const col = new Int32Array(count);
  const outRe = new Float64Array(count);
  const outIm = im === undefined ? undefined : new Float64Array(count);
  let filled = 0;
  let previousRow = -1;
  let previousCol = -1;
  for (let t = 0; t < count; t++) {
    const k = order[t] as number;
    const row = i[k] as number;
    const column = j[k] as number;
    if (row !== previousRow || column !== previousCol) {
      col[filled] = column;
      filled++;
      ptr[row + 1] = (ptr[row + 1] as number) + 1;
      previousRow = row;
      previousCol = column;
    }
    const slot = filled - 1;
    outRe[slot] = (outRe[slot] as number) + (re[k] as number);
    if (im !== undefined && outIm !== undefined) outIm[slot] = (outIm[slot] as number) + (im[k] as number);
  }
  for (let r = 0; r < rows; r++) ptr[r + 1] = (ptr[r + 1] as number) + (ptr[r] as number);
  return {
    rows,
    cols,
    ptr,
    col: filled === count ? col : col.slice(0, filled),
    re: filled === count ? outRe : outRe.slice(0, filled),
    im: dropZeros(filled === count ? outIm : outIm?.slice(0, filled)),
  };
}

/** The order that sorts triplets by row, then column, equal ones as they came. */
function tripletOrder(rows: number, cols: number, i: ArrayLike<number>, j: ArrayLike<number>): Int32Array {
  const count = i.length;
  const byColumn = countingSort(cols, count, (k) => j[k] as number);
  const byRow = countingSort(rows, count, (k) => i[byColumn[k] as number] as number);
  for (let k = 0; k < count; k++) byRow[k] = byColumn[byRow[k] as number] as number;
  return byRow;
}

function countingSort(keys: number, count: number, keyOf: (k: number) => number): Int32Array {
  const start = new Int32Array(keys + 1);
  for (let k = 0; k < count; k++) start[keyOf(k) + 1] = (start[keyOf(k) + 1] as number) + 1;
  for (let key = 0; key < keys; key++) start[key + 1] = (start[key + 1] as number) + (start[key] as number);
  const order = new Int32Array(count);
  for (let k = 0; k < count; k++) {
    const key = keyOf(k);
    const slot = start[key] as number;
    order[slot] = k;
    start[key] = slot + 1;
  }
  return order;
}

/**
 * Sparse rows of a dense row-major matrix; entries that are exactly zero are not stored.
 *
 * @param rows - number of rows
 * @param cols - number of columns
 * @param re - real parts, row-major, length rows·cols
 * @param im - imaginary parts, the same
 */
export function fromDense(rows: number, cols: number, re: ArrayLike<number>, im?: ArrayLike<number>): Csr {
  const ptr = new Int32Array(rows + 1);
  const size = rows * cols;
  let count = 0;
  for (let k = 0; k < size; k++) if (re[k] !== 0 || (im !== undefined && im[k] !== 0)) count++;
  const col = new Int32Array(count);
  const outRe = new Float64Array(count);
  const outIm = im === undefined ? undefined : new Float64Array(count);
  let e = 0;
  for (let r = 0; r < rows; r++) {
    for (let c = 0, k = r * cols; c < cols; c++, k++) {
      const x = re[k] as number;
      const y = im === undefined ? 0 : (im[k] as number);
      if (x === 0 && y === 0) continue;
      col[e] = c;
      outRe[e] = x;
      if (outIm !== undefined) outIm[e] = y;
      e++;
    }
    ptr[r + 1] = e;
  }
  return { rows, cols, ptr, col, re: outRe, im: dropZeros(outIm) };
}

/** The dense row-major real and imaginary parts (`im` absent for a real matrix), freshly allocated. */
export function toDense(a: Csr): { re: Float64Array; im: Float64Array | undefined } {
  const re = new Float64Array(a.rows * a.cols);
  const im = a.im === undefined ? undefined : new Float64Array(a.rows * a.cols);
  for (let r = 0; r < a.rows; r++) {
    const base = r * a.cols;
    const end = a.ptr[r + 1] as number;
    for (let e = a.ptr[r] as number; e < end; e++) {
      const k = base + (a.col[e] as number);
      re[k] = a.re[e] as number;
      if (im !== undefined && a.im !== undefined) im[k] = a.im[e] as number;
    }
  }
  return { re, im };
}

/** The square diagonal matrix of the given numbers; zeros are not stored. */
export function diagonalCsr(re: ArrayLike<number>, im?: ArrayLike<number>): Csr {
  const n = re.length;
  const ptr = new Int32Array(n + 1);
  let count = 0;
  for (let k = 0; k < n; k++) {
    if (re[k] !== 0 || (im !== undefined && im[k] !== 0)) count++;
    ptr[k + 1] = count;
  }
  const col = new Int32Array(count);
  const outRe = new Float64Array(count);
  const outIm = im === undefined ? undefined : new Float64Array(count);
  for (let k = 0; k < n; k++) {
    const e = ptr[k] as number;
    if (e === ptr[k + 1]) continue;
    col[e] = k;
    outRe[e] = re[k] as number;
    if (im !== undefined && outIm !== undefined) outIm[e] = im[k] as number;
  }
  return { rows: n, cols: n, ptr, col, re: outRe, im: dropZeros(outIm) };
}

/**
 * The diagonal of a matrix that stores nothing off it, zeros filled in; `undefined` for any other matrix.
 */
export function diagonalOf(a: Csr): { re: Float64Array; im: Float64Array | undefined } | undefined {
  if (a.rows !== a.cols || a.col.length > a.rows) return undefined;
  const re = new Float64Array(a.rows);
  const im = a.im === undefined ? undefined : new Float64Array(a.rows);
  for (let r = 0; r < a.rows; r++) {
    const e = a.ptr[r] as number;
    const count = (a.ptr[r + 1] as number) - e;
    if (count === 0) continue;
    if (count > 1 || a.col[e] !== r) return undefined;
    re[r] = a.re[e] as number;
    if (im !== undefined && a.im !== undefined) im[r] = a.im[e] as number;
  }
  return { re, im };
}

/** The number of the stored entry (row, col), or −1; by bisection. */
export function findEntry(a: Csr, row: number, col: number): number {
  let low = a.ptr[row] as number;
  let high = a.ptr[row + 1] as number;
  const end = high;
  while (low < high) {
    const middle = (low + high) >> 1;
    if ((a.col[middle] as number) < col) low = middle + 1;
    else high = middle;
  }
  return low < end && a.col[low] === col ? low : -1;
}

/** The value in (row, col), 0 where none is stored; never −0. */
export function valueAt(a: Csr, row: number, col: number): Complex {
  const e = findEntry(a, row, col);
  if (e < 0) return { re: 0, im: 0 };
  return { re: (a.re[e] as number) + 0, im: a.im === undefined ? 0 : (a.im[e] as number) + 0 };
}
