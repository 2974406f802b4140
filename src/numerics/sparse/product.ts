import type { Csr } from "../csr.js";
import { diagonalOf, dropZeros } from "./build.js";
import { fullCsr, isFull, productOfRows } from "./full.js";
import { RowAccumulator } from "./rows.js";

/**
 * The product AB, row by row with a dense accumulator (Gustavson, ACM Trans. Math. Softw. 4, 250 (1978)). O(products).
 *
 * Entries that cancel stay stored. A real entry of k terms takes k roundings on its longest path, a complex one k + 1.
 */
export function multiply(a: Csr, b: Csr): Csr {
  if (isFull(a) && isFull(b)) return fullCsr(a.rows, b.cols, productOfRows(a.rows, a.cols, b.cols, a, b));
  const complex = a.im !== undefined || b.im !== undefined;
  const out = new RowAccumulator(a.rows, b.cols, complex);
  for (let row = 0; row < a.rows; row++) out.finishRow(row, scatterRow(out, row, a, b, 1, 0));
  return out.finish();
}

/**
 * Adds sign · (row of A) · B to the accumulator, which holds `count` columns already; returns their new number.
 *
 * @param from - where to begin in each row of B
 */
function scatterRow(
  out: RowAccumulator,
  row: number,
  a: Csr,
  b: Csr,
  sign: number,
  count: number,
  from: Int32Array = b.ptr,
): number {
  if (out.im.length === 0) return scatterReal(out, row, a, b, sign, count, from);
  return b.im === undefined
    ? scatterComplexReal(out, row, a, b, sign, count, from)
    : scatterComplex(out, row, a, b, b.im, sign, count, from);
}

function scatterReal(
  out: RowAccumulator,
  row: number,
  a: Csr,
  b: Csr,
  sign: number,
  count: number,
  from: Int32Array,
): number {
  const { re, mark, list } = out;
  const { ptr, col, re: bRe } = b;
  const tag = out.firstTag + row;
  let filled = count;
  const end = a.ptr[row + 1] as number;
  for (let e = a.ptr[row] as number; e < end; e++) {
    const k = a.col[e] as number;
    const x = sign * (a.re[e] as number);
    const stop = ptr[k + 1] as number;
    for (let f = from[k] as number; f < stop; f++) {
      const c = col[f] as number;
      const term = x * (bRe[f] as number);
      if (mark[c] === tag) {
        re[c] = (re[c] as number) + term;
      } else {
        mark[c] = tag;
        list[filled++] = c;
        // Adding zero turns −0 into 0, as in every sum.
        re[c] = term + 0;
      }
    }
  }
  return filled;
}

/** B real, the accumulator complex; A may be either. */
function scatterComplexReal(
  out: RowAccumulator,
  row: number,
  a: Csr,
  b: Csr,
  sign: number,
  count: number,
  from: Int32Array,
): number {
  const { re, im, mark, list } = out;
  const { ptr, col, re: bRe } = b;
  const aIm = a.im;
  const tag = out.firstTag + row;
  let filled = count;
  const end = a.ptr[row + 1] as number;
  for (let e = a.ptr[row] as number; e < end; e++) {
    const k = a.col[e] as number;
    const x = sign * (a.re[e] as number);
    const y = aIm === undefined ? 0 : sign * (aIm[e] as number);
    const stop = ptr[k + 1] as number;
    for (let f = from[k] as number; f < stop; f++) {
      const c = col[f] as number;
      const u = bRe[f] as number;
      if (mark[c] === tag) {
        re[c] = (re[c] as number) + x * u;
        im[c] = (im[c] as number) + y * u;
      } else {
        mark[c] = tag;
        list[filled++] = c;
        re[c] = x * u + 0;
        im[c] = y * u + 0;
      }
    }
  }
  return filled;
}

function scatterComplex(
  out: RowAccumulator,
  row: number,
  a: Csr,
  b: Csr,
  bIm: Float64Array,
  sign: number,
  count: number,
  from: Int32Array,
): number {
  const { re, im, mark, list } = out;
  const { ptr, col, re: bRe } = b;
  const aIm = a.im;
  const tag = out.firstTag + row;
  let filled = count;
  const end = a.ptr[row + 1] as number;
  for (let e = a.ptr[row] as number; e < end; e++) {
    const k = a.col[e] as number;
    const x = sign * (a.re[e] as number);
    const y = aIm === undefined ? 0 : sign * (aIm[e] as number);
    const stop = ptr[k + 1] as number;
    for (let f = from[k] as number; f < stop; f++) {
      const c = col[f] as number;
      const u = bRe[f] as number;
      const v = bIm[f] as number;
      if (mark[c] === tag) {
        re[c] = (re[c] as number) + (x * u - y * v);
        im[c] = (im[c] as number) + (x * v + y * u);
      } else {
        mark[c] = tag;
        list[filled++] = c;
        re[c] = x * u - y * v + 0;
        im[c] = x * v + y * u + 0;
      }
    }
  }
  return filled;
}

/**
 * The commutator AB − BA of two square matrices in one pass over the rows.
 *
 * Where one of the two is diagonal, [A, B]_ij = (a_i − a_j) b_ij without any sum; the diagonal, which vanishes identically, is
 * then not stored. Other entries that cancel stay stored. In the general case an entry takes as many roundings as AB and BA
 * have terms together, one more if complex.
 */
export function commutator(a: Csr, b: Csr): Csr {
  const left = diagonalOf(a);
  if (left !== undefined) return diagonalCommutator(left, b, 1);
  const right = diagonalOf(b);
  if (right !== undefined) return diagonalCommutator(right, a, -1);
  const complex = a.im !== undefined || b.im !== undefined;
  const out = new RowAccumulator(a.rows, a.cols, complex);
  for (let row = 0; row < a.rows; row++) {
    const count = scatterRow(out, row, a, b, 1, 0);
    out.finishRow(row, scatterRow(out, row, b, a, -1, count));
  }
  return out.finish();
}

/**
 * The upper triangle, diagonal included, of AB − BA for two Hermitian matrices; the rest follows from C† = −C. Half the work of
 * {@link commutator}, with the same roundings.
 */
export function commutatorUpper(a: Csr, b: Csr): Csr {
  const complex = a.im !== undefined || b.im !== undefined;
  const out = new RowAccumulator(a.rows, a.cols, complex);
  const fromA = a.ptr.slice(0, a.rows);
  const fromB = b.ptr.slice(0, b.rows);
  for (let row = 0; row < a.rows; row++) {
    const count = scatterRow(out, row, a, b, 1, 0, fromB);
    out.finishRow(row, scatterRow(out, row, b, a, -1, count, fromA));
    passColumn(a, row, fromA);
    passColumn(b, row, fromB);
  }
  return out.finish();
}

/** Moves the beginnings of all rows past a column; the pattern is symmetric, so its row tells which have an entry there. */
function passColumn({ ptr, col }: Csr, column: number, from: Int32Array): void {
  const end = ptr[column + 1] as number;
  for (let e = ptr[column] as number; e < end; e++) {
    const row = col[e] as number;
    const start = from[row] as number;
    if (col[start] === column) from[row] = start + 1;
  }
}

function diagonalCommutator(d: { re: Float64Array; im: Float64Array | undefined }, b: Csr, sign: number): Csr {
  const n = b.rows;
  const complex = d.im !== undefined || b.im !== undefined;
  const ptr = new Int32Array(n + 1);
  const col = new Int32Array(b.col.length);
  const re = new Float64Array(b.col.length);
  const im = complex ? new Float64Array(b.col.length) : undefined;
  let f = 0;
  for (let row = 0; row < n; row++) {
    const end = b.ptr[row + 1] as number;
    for (let e = b.ptr[row] as number; e < end; e++) {
      const c = b.col[e] as number;
      if (c === row) continue;
      const x = sign * ((d.re[row] as number) - (d.re[c] as number));
      const y = d.im === undefined ? 0 : sign * ((d.im[row] as number) - (d.im[c] as number));
      const u = b.re[e] as number;
      const v = b.im === undefined ? 0 : (b.im[e] as number);
      col[f] = c;
      re[f] = im === undefined ? x * u : x * u - y * v;
      if (im !== undefined) im[f] = x * v + y * u;
      f++;
    }
    ptr[row + 1] = f;
  }
  return { rows: n, cols: n, ptr, col: col.slice(0, f), re: re.slice(0, f), im: dropZeros(im?.slice(0, f)) };
}

/** The Kronecker product A ⊗ B; the index of A is the slow one. */
export function kron(a: Csr, b: Csr): Csr {
  const rows = a.rows * b.rows;
  const count = a.col.length * b.col.length;
  const complex = a.im !== undefined || b.im !== undefined;
  const ptr = new Int32Array(rows + 1);
  const col = new Int32Array(count);
  const re = new Float64Array(count);
  const im = complex ? new Float64Array(count) : undefined;
  let g = 0;
  for (let r = 0; r < a.rows; r++) {
    const aEnd = a.ptr[r + 1] as number;
    for (let s = 0; s < b.rows; s++) {
      const bStart = b.ptr[s] as number;
      const bEnd = b.ptr[s + 1] as number;
      for (let e = a.ptr[r] as number; e < aEnd; e++) {
        const base = (a.col[e] as number) * b.cols;
        const x = a.re[e] as number;
        const y = a.im === undefined ? 0 : (a.im[e] as number);
        for (let f = bStart; f < bEnd; f++, g++) {
          const u = b.re[f] as number;
          const v = b.im === undefined ? 0 : (b.im[f] as number);
          col[g] = base + (b.col[f] as number);
          re[g] = im === undefined ? x * u : x * u - y * v;
          if (im !== undefined) im[g] = x * v + y * u;
        }
      }
      ptr[r * b.rows + s + 1] = g;
    }
  }
  return { rows, cols: a.cols * b.cols, ptr, col, re, im: dropZeros(im) };
}

/**
 * y = A x for a dense vector. A real entry of k terms takes k roundings on its longest path, a complex one k + 1.
 *
 * @param a - the matrix
 * @param xre - real parts of x, length `a.cols`
 * @param xim - imaginary parts of x, absent for a real vector
 * @param yre - receives the real parts of y, length `a.rows`
 * @param yim - receives the imaginary parts; may be absent only where A and x are both real
 */
export function apply(
  a: Csr,
  xre: Float64Array,
  xim: Float64Array | undefined,
  yre: Float64Array,
  yim: Float64Array | undefined,
): void {
  const aIm = a.im;
  for (let row = 0; row < a.rows; row++) {
    let re = 0;
    let im = 0;
    const end = a.ptr[row + 1] as number;
    for (let e = a.ptr[row] as number; e < end; e++) {
      const c = a.col[e] as number;
      const x = a.re[e] as number;
      const u = xre[c] as number;
      if (aIm === undefined) {
        re += x * u;
        if (xim !== undefined) im += x * (xim[c] as number);
      } else {
        const y = aIm[e] as number;
        const v = xim === undefined ? 0 : (xim[c] as number);
        re += x * u - y * v;
        im += x * v + y * u;
      }
    }
    yre[row] = re;
    if (yim !== undefined) yim[row] = im;
  }
}

/**
 * Adds Σ_k left(i, k) · right(k, j) to `out` at every entry (i, j) of a pattern that contains the pattern of the product. The
 * factors are non-negative numbers (moduli, radii) on the patterns of A and B.
 *
 * @param pattern - where the sums are wanted
 * @param a - pattern of the left factor
 * @param left - its non-negative numbers, one for each entry of `a`
 * @param b - pattern of the right factor
 * @param right - its non-negative numbers
 * @param out - one number for each entry of `pattern`
 */
export function addModuliProduct(
  pattern: Csr,
  a: Csr,
  left: Float64Array,
  b: Csr,
  right: Float64Array,
  out: Float64Array,
): void {
  const sum = new Float64Array(b.cols);
  for (let row = 0; row < a.rows; row++) {
    const end = a.ptr[row + 1] as number;
    for (let e = a.ptr[row] as number; e < end; e++) {
      const k = a.col[e] as number;
      const x = left[e] as number;
      const stop = b.ptr[k + 1] as number;
      for (let f = b.ptr[k] as number; f < stop; f++) {
        const c = b.col[f] as number;
        sum[c] = (sum[c] as number) + x * (right[f] as number);
      }
    }
    const last = pattern.ptr[row + 1] as number;
    for (let g = pattern.ptr[row] as number; g < last; g++) {
      const c = pattern.col[g] as number;
      out[g] = (out[g] as number) + (sum[c] as number);
      sum[c] = 0;
    }
  }
}
