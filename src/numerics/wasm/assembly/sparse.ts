// Products and commutators of sparse matrices that lie in memory, with a bound on what rounding did to them.
//
// A matrix is four stretches: row starts (rows + 1 integers), columns (integers), real parts and imaginary parts
// (doubles; address 0 for a real matrix).

import { at, get, getInt, put, putInt } from "./memory.ts";

const UNIT_ROUNDOFF: f64 = 1.1102230246251565e-16;
/** Smallest positive number. */
const UNDERFLOW: f64 = reinterpret<f64>(1);
/** Above this a sum of two squares has lost nothing to underflow that its rounding does not cover. */
const SAFE_SQUARE: f64 = reinterpret<f64>((1023 - 900) << 52);
/** √2; the double lies above it. */
const ROOT_TWO: f64 = Math.SQRT2;

// The result at hand, and the row that is being formed.
let outCol: usize = 0;
let outRe: usize = 0;
let outIm: usize = 0;
let place: usize = 0;
let filled: i32 = 0;
let rowStart: i32 = 0;
let moduli: f64 = 0;

/** Sum of the squares of the bounds of all rows, from the last call of {@link combineSparse}. */
export let errorSquares: f64 = 0;
/** The largest number of products that met in an entry, at most, in the last call. */
export let mostTerms: i32 = 0;

/**
 * AB, or AB − BA, row by row; the columns of a row come in the order in which they were met.
 * Source of the row scheme: Gustavson, ACM Trans. Math. Softw. 4, 250 (1978).
 *
 * The bound. Entry (i, j) is a sum of at most m_i products, m_i the number of entries in row i of A (and of B for a
 * commutator): every product is rounded once, a complex one twice, and takes part in at most m_i − 1 additions. So each
 * of real and imaginary part is off by at most γ_{m_i} (real) or γ_{m_i + 1} (complex) times the sum of the moduli of
 * its real products; for a complex product |re re'| + |im im'| and |re im'| + |im re'| are each at most |a| |b|, so the
 * entry is off by at most √2 γ_{m_i + 1} Σ |a_ik| |b_kj|. The Euclidean norm over j of Σ_k |a_ik| |b_kj| is at most
 * Σ_k |a_ik| ρ_k with ρ_k the norm of row k of B (triangle inequality): that sum is formed here, once for each entry of
 * A. Rows combine to the Frobenius norm. Underflow adds what the caller accounts for; rounding in the bound itself too.
 * Where only the upper triangle is formed the same sum serves: see `commutatorSparse`.
 *
 * @param rows - rows of A
 * @param commutes - whether BA is subtracted (square matrices)
 * @param upper - whether only columns ≥ row are formed; columns of A and B must then ascend
 * @param normsA - euclidean norms of the rows of A, from {@link rowNorms}; read for a commutator
 * @param normsB - those of B
 * @param ptr - receives rows + 1 row starts
 * @param places - scratch: an integer for each column, all −1
 * @returns number of entries; the stretches must have room for {@link productCount} (of both orders for a commutator), or for
 *   {@link countEntries}
 */
export function combineSparse(
  rows: i32,
  commutes: bool,
  upper: bool,
  aPtr: usize,
  aCol: usize,
  aRe: usize,
  aIm: usize,
  normsA: usize,
  bPtr: usize,
  bCol: usize,
  bRe: usize,
  bIm: usize,
  normsB: usize,
  ptr: usize,
  col: usize,
  re: usize,
  im: usize,
  places: usize,
): i32 {
  outCol = col;
  outRe = re;
  outIm = im;
  place = places;
  filled = 0;
  errorSquares = 0;
  mostTerms = 0;
  const complex = im !== 0;
  let bounded = 0;
  putInt(ptr, 0, 0);
  for (let i = 0; i < rows; i++) {
    rowStart = filled;
    moduli = 0;
    const low = upper ? i : 0;
    let terms = getInt(aPtr, i + 1) - getInt(aPtr, i);
    if (complex) scatterComplex(i, 1, low, aPtr, aCol, aRe, aIm, bPtr, bCol, bRe, bIm, normsB);
    else scatterReal(i, 1, low, aPtr, aCol, aRe, bPtr, bCol, bRe, normsB);
    if (commutes) {
      terms += getInt(bPtr, i + 1) - getInt(bPtr, i);
      if (complex) scatterComplex(i, -1, low, bPtr, bCol, bRe, bIm, aPtr, aCol, aRe, aIm, normsA);
      else scatterReal(i, -1, low, bPtr, bCol, bRe, aPtr, aCol, aRe, normsA);
    }
    const ku = ((complex ? terms + 1 : terms) as f64) * UNIT_ROUNDOFF;
    const gamma = (ku / (1 - ku)) * (1 + 4 * UNIT_ROUNDOFF);
    const bound = (complex ? ROOT_TWO : 1) * gamma * moduli;
    // NaN, from zero times an infinite norm, goes on and makes the bound infinite.
    if (bound !== 0) {
      errorSquares += bound * bound;
      bounded++;
    }
    mostTerms = max(mostTerms, terms);
    putInt(ptr, i + 1, filled);
  }
  // A square that underflows is off by half the smallest positive number at most.
  errorSquares += (bounded as f64) * UNDERFLOW;
  return filled;
}

/** Adds sign · (row i of A) · B to the row at hand, columns from `low` on. */
function scatterReal(
  i: i32,
  sign: f64,
  low: i32,
  aPtr: usize,
  aCol: usize,
  aRe: usize,
  bPtr: usize,
  bCol: usize,
  bRe: usize,
  norms: usize,
): void {
  const end = getInt(aPtr, i + 1);
  for (let e = getInt(aPtr, i); e < end; e++) {
    const k = getInt(aCol, e);
    const x = sign * get(aRe, e);
    moduli += abs(x) * get(norms, k);
    const stop = getInt(bPtr, k + 1);
    let f = getInt(bPtr, k);
    if (low > 0) f = firstFrom(f, stop, low, bCol);
    for (; f < stop; f++) {
      const c = getInt(bCol, f);
      const value = x * get(bRe, f);
      const slot = getInt(place, c);
      if (slot < rowStart) {
        putInt(place, c, filled);
        putInt(outCol, filled, c);
        put(outRe, filled, value);
        filled++;
      } else put(outRe, slot, get(outRe, slot) + value);
    }
  }
}

/** The complex companion of {@link scatterReal}; either matrix may be real. */
function scatterComplex(
  i: i32,
  sign: f64,
  low: i32,
  aPtr: usize,
  aCol: usize,
  aRe: usize,
  aIm: usize,
  bPtr: usize,
  bCol: usize,
  bRe: usize,
  bIm: usize,
  norms: usize,
): void {
  const end = getInt(aPtr, i + 1);
  for (let e = getInt(aPtr, i); e < end; e++) {
    const k = getInt(aCol, e);
    const x = sign * get(aRe, e);
    const y = aIm === 0 ? 0 : sign * get(aIm, e);
    const square = x * x + y * y;
    // Where the squares underflow, |re| + |im| bounds the modulus.
    moduli += (square > SAFE_SQUARE ? sqrt(square) : abs(x) + abs(y)) * get(norms, k);
    const stop = getInt(bPtr, k + 1);
    let f = getInt(bPtr, k);
    if (low > 0) f = firstFrom(f, stop, low, bCol);
    for (; f < stop; f++) {
      const c = getInt(bCol, f);
      const u = get(bRe, f);
      const v = bIm === 0 ? 0 : get(bIm, f);
      const p = x * u - y * v;
      const q = x * v + y * u;
      const slot = getInt(place, c);
      if (slot < rowStart) {
        putInt(place, c, filled);
        putInt(outCol, filled, c);
        put(outRe, filled, p);
        put(outIm, filled, q);
        filled++;
      } else {
        put(outRe, slot, get(outRe, slot) + p);
        put(outIm, slot, get(outIm, slot) + q);
      }
    }
  }
}

/** The first entry from `from` on, `to` excluded, whose column is at least `low`; columns ascend. */
function firstFrom(from: i32, to: i32, low: i32, col: usize): i32 {
  while (from < to) {
    const middle = (from + to) >> 1;
    if (getInt(col, middle) < low) from = middle + 1;
    else to = middle;
  }
  return from;
}

/** Number of products in AB, in its upper triangle where asked (columns of B must then ascend): room enough for its entries. */
export function productCount(rows: i32, upper: bool, aPtr: usize, aCol: usize, bPtr: usize, bCol: usize): f64 {
  let count: f64 = 0;
  for (let i = 0; i < rows; i++) {
    const end = getInt(aPtr, i + 1);
    for (let e = getInt(aPtr, i); e < end; e++) {
      const k = getInt(aCol, e);
      const stop = getInt(bPtr, k + 1);
      let f = getInt(bPtr, k);
      if (upper && i > 0) f = firstFrom(f, stop, i, bCol);
      count += (stop - f) as f64;
    }
  }
  return count;
}

/**
 * Number of entries that {@link combineSparse} will store: the same walk without the arithmetic.
 *
 * @param places - scratch: an integer for each column, all −1
 */
export function countEntries(
  rows: i32,
  commutes: bool,
  upper: bool,
  aPtr: usize,
  aCol: usize,
  bPtr: usize,
  bCol: usize,
  places: usize,
): f64 {
  let count: f64 = 0;
  for (let i = 0; i < rows; i++) {
    const low = upper ? i : 0;
    let met = meetColumns(i, low, aPtr, aCol, bPtr, bCol, places);
    if (commutes) met += meetColumns(i, low, bPtr, bCol, aPtr, aCol, places);
    count += met as f64;
  }
  return count;
}

/** Marks the columns ≥ low of row i of AB with the row; returns how many were not marked before. */
function meetColumns(i: i32, low: i32, aPtr: usize, aCol: usize, bPtr: usize, bCol: usize, places: usize): i32 {
  let met = 0;
  const end = getInt(aPtr, i + 1);
  for (let e = getInt(aPtr, i); e < end; e++) {
    const k = getInt(aCol, e);
    const stop = getInt(bPtr, k + 1);
    let f = getInt(bPtr, k);
    if (low > 0) f = firstFrom(f, stop, low, bCol);
    for (; f < stop; f++) {
      const c = getInt(bCol, f);
      if (getInt(places, c) === i) continue;
      putInt(places, c, i);
      met++;
    }
  }
  return met;
}

/**
 * Euclidean norms of the rows. A square that underflows is off by half the smallest positive number at most; one such
 * number is added for each, so that the norm is an upper bound but for the rounding of the sum.
 */
export function rowNorms(rows: i32, ptr: usize, re: usize, im: usize, norms: usize): void {
  for (let i = 0; i < rows; i++) {
    const start = getInt(ptr, i);
    const end = getInt(ptr, i + 1);
    let sum: f64 = 0;
    for (let e = start; e < end; e++) {
      const x = get(re, e);
      const y = im === 0 ? 0 : get(im, e);
      sum += x * x + y * y;
    }
    put(norms, i, sqrt(sum + 2 * ((end - start) as f64) * UNDERFLOW));
  }
}

/**
 * Σ |c_ij|² over the stored entries. Where only the upper triangle is stored, those off the diagonal count twice, and what
 * rounding left in the real parts of the diagonal not at all: the matrix is anti-Hermitian.
 */
export function sumOfSquares(rows: i32, upper: bool, ptr: usize, col: usize, re: usize, im: usize): f64 {
  let sum: f64 = 0;
  for (let i = 0; i < rows; i++) {
    const end = getInt(ptr, i + 1);
    for (let e = getInt(ptr, i); e < end; e++) {
      const diagonal = getInt(col, e) === i;
      const x = upper && diagonal ? 0 : get(re, e);
      const y = im === 0 ? 0 : get(im, e);
      const square = x * x + y * y;
      sum += upper && !diagonal ? 2 * square : square;
    }
  }
  return sum;
}

/** Sorts the entries of every row by column (Shell, Commun. ACM 2, 30 (1959)). */
export function sortSparseRows(rows: i32, ptr: usize, col: usize, re: usize, im: usize): void {
  for (let i = 0; i < rows; i++) {
    const start = getInt(ptr, i);
    const count = getInt(ptr, i + 1) - start;
    const values = at(re, start);
    const imaginary: usize = im === 0 ? 0 : at(im, start);
    const columns = col + ((start as usize) << 2);
    let gap = 1;
    while (gap < count / 3) gap = 3 * gap + 1;
    for (; gap > 0; gap = (gap / 3) as i32) sortStep(count, gap, columns, values, imaginary);
  }
}

function sortStep(count: i32, gap: i32, col: usize, re: usize, im: usize): void {
  for (let k = gap; k < count; k++) {
    const c = getInt(col, k);
    const x = get(re, k);
    const y = im === 0 ? 0 : get(im, k);
    let m = k - gap;
    for (; m >= 0 && getInt(col, m) > c; m -= gap) {
      putInt(col, m + gap, getInt(col, m));
      put(re, m + gap, get(re, m));
      if (im !== 0) put(im, m + gap, get(im, m));
    }
    putInt(col, m + gap, c);
    put(re, m + gap, x);
    if (im !== 0) put(im, m + gap, y);
  }
}
