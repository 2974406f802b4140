// Symmetric tridiagonal eigenproblems by divide and conquer with deflation.

import { implicitQl } from "./implicit-ql.ts";
import { at, clear, copy, get, getInt, put, putInt, room } from "./memory.ts";
import { addProduct } from "./packed-product.ts";
import { recomputeWeights, secularFailed, secularRoot, secularVector } from "./secular.ts";

const UNIT_ROUNDOFF: f64 = 1.1102230246251565e-16;
const SQRT_HALF: f64 = Math.SQRT1_2;

/** In which columns a row of eigenvectors may differ from zero: the first half, the second, or both. */
const FIRST: i32 = 0;
const BOTH: i32 = 1;
const SECOND: i32 = 2;

// The problem at hand, set by divideAndConquer.
let n: i32 = 0;
let diagonal: usize = 0;
let off: usize = 0;
let v: usize = 0;
let order: usize = 0;
let leaf: i32 = 0;
let floor: f64 = 0;
let tolerance: f64 = 0;
// Scratch: vectors of n doubles, lists of n integers, and the matrices of a merge.
let z: usize = 0;
let poles: usize = 0;
let weights: usize = 0;
let signed: usize = 0;
let temporary: usize = 0;
let rotations: usize = 0;
let kept: usize = 0;
let deflated: usize = 0;
let span: usize = 0;
let list: usize = 0;
let gaps: usize = 0;
let gathered: usize = 0;
let product: usize = 0;
let productRoom: usize = 0;

/** Bytes of scratch that {@link divideAndConquer} asks for besides its matrices. */
export function divideScratch(size: i32): usize {
  return 5 * room(size) + room(4 * size) + 4 * room(size);
}

/** Doubles of the second matrix that {@link divideAndConquer} asks for (the first has n²). */
export function mergeRoom(size: i32): i32 {
  return 2 * size * (size - (size >> 1));
}

/**
 * All eigenpairs of a symmetric tridiagonal matrix.
 * Source: Cuppen, Numer. Math. 36, 177 (1981); deflation: Bunch, Nielsen and Sorensen, Numer. Math. 31, 31 (1978);
 * orthogonal vectors from recomputed z: Gu and Eisenstat, SIAM J. Matrix Anal. Appl. 16, 172 (1995). What is deflated
 * is below four units in the last place of the norm of the whole matrix.
 *
 * @param size - order
 * @param d - diagonal entries; on return the eigenvalue of each row of `vectors`, unsorted
 * @param e - `size` doubles, entry i coupling i and i + 1; destroyed
 * @param vectors - size × size, zero on entry; on return its rows are the eigenvectors
 * @param rows - receives, as integers, the rows by ascending eigenvalue
 * @param norm - the largest modulus of an entry of the tridiagonal matrix
 * @param smallest - blocks up to this order, at least 1, are left to implicit QL
 * @param matrices - scratch: n² doubles, then {@link mergeRoom}; not touched where `size` is at most `smallest`
 * @param merges - scratch for {@link mergeRoom} doubles
 * @param scratch - {@link divideScratch} bytes
 * @param forProducts - scratch for the matrix product
 * @returns whether every iteration converged
 */
export function divideAndConquer(
  size: i32,
  d: usize,
  e: usize,
  vectors: usize,
  rows: usize,
  norm: f64,
  smallest: i32,
  matrices: usize,
  merges: usize,
  scratch: usize,
  forProducts: usize,
): bool {
  n = size;
  diagonal = d;
  off = e;
  v = vectors;
  order = rows;
  leaf = smallest;
  floor = UNIT_ROUNDOFF * UNIT_ROUNDOFF * norm;
  tolerance = 8 * UNIT_ROUNDOFF * norm;
  const step = room(size);
  z = scratch;
  poles = z + step;
  weights = poles + step;
  signed = weights + step;
  temporary = signed + step;
  rotations = temporary + step;
  kept = rotations + room(4 * size);
  deflated = kept + step;
  span = deflated + step;
  list = span + step;
  gaps = matrices;
  gathered = merges;
  product = merges + ((mergeRoom(size) >> 1) << 3);
  productRoom = forProducts;
  const converged = solve(0, size);
  // The secular equation gives ascending roots up to rounding; this settles the last place.
  sortRows(order, size);
  return converged;
}

/** Solves rows `start` to `end` (exclusive) and orders them. */
function solve(start: i32, end: i32): bool {
  const size = end - start;
  if (size <= leaf) {
    for (let i = start; i < end; i++) {
      put(v, i * n + i, 1);
      putInt(order, i, i);
    }
    const corner = at(v, start * n + start);
    const converged = implicitQl(size, at(diagonal, start), at(off, start), corner, n, floor, rotations);
    sortRows(order + ((start as usize) << 2), size);
    return converged;
  }
  const middle = start + (size >> 1);
  const coupling = get(off, middle - 1);
  const rho = abs(coupling);
  put(diagonal, middle - 1, get(diagonal, middle - 1) - rho);
  put(diagonal, middle, get(diagonal, middle) - rho);
  if (!solve(start, middle) || !solve(middle, end)) return false;
  return merge(start, middle, end, 2 * rho, coupling < 0 ? -1 : 1);
}

/** Sorts rows by ascending eigenvalue; insertion, stable and quick on what is nearly sorted. */
function sortRows(rows: usize, count: i32): void {
  for (let i = 1; i < count; i++) {
    const row = getInt(rows, i);
    const value = get(diagonal, row);
    let k = i - 1;
    for (; k >= 0 && get(diagonal, getInt(rows, k)) > value; k--) putInt(rows, k + 1, getInt(rows, k));
    putInt(rows, k + 1, row);
  }
}

/** Joins two solved halves: eigenpairs of diag(d) + rho z zᵀ with ‖z‖ = 1. */
function merge(start: i32, middle: i32, end: i32, rho: f64, sign: f64): bool {
  for (let r = start; r < end; r++) {
    put(z, r, (r < middle ? get(v, r * n + middle - 1) : sign * get(v, r * n + middle)) * SQRT_HALF);
  }
  const count = deflate(start, middle, end, rho);
  if (count > 0 && !updateVectors(start, middle, end, count, rho)) return false;
  const rest = end - start - count;
  sortRows(deflated, rest);
  mergeLists(kept, count, deflated, rest, order + ((start as usize) << 2));
  return true;
}

/**
 * Sets aside the rows whose eigenpairs the coupling leaves alone within the tolerance: those with a small z, and one of
 * each two so close that a rotation can take z from it.
 *
 * @returns the number of rows kept; they stand in `kept`, the others in `deflated`
 */
function deflate(start: i32, middle: i32, end: i32, rho: f64): i32 {
  for (let r = start; r < end; r++) putInt(span, r, r < middle ? FIRST : SECOND);
  mergeLists(order + ((start as usize) << 2), middle - start, order + ((middle as usize) << 2), end - middle, list);
  let keptCount = 0;
  let deflatedCount = 0;
  let previous = -1;
  for (let k = 0; k < end - start; k++) {
    const row = getInt(list, k);
    const y = get(z, row);
    if (rho * abs(y) <= tolerance) {
      putInt(deflated, deflatedCount++, row);
      continue;
    }
    if (previous >= 0) {
      const x = get(z, previous);
      const radius = sqrt(x * x + y * y);
      const c = y / radius;
      const s = x / radius;
      const low = get(diagonal, previous);
      const high = get(diagonal, row);
      if (abs((high - low) * c * s) <= tolerance) {
        put(z, row, radius);
        put(z, previous, 0);
        const a = getInt(span, previous);
        const b = getInt(span, row);
        const from = a === SECOND && b === SECOND ? middle : start;
        const to = a === FIRST && b === FIRST ? middle : end;
        rotateRows(to - from, at(v, previous * n + from), at(v, row * n + from), c, s);
        if (a !== b) putInt(span, row, BOTH);
        put(diagonal, previous, low * c * c + high * s * s);
        put(diagonal, row, low * s * s + high * c * c);
        putInt(deflated, deflatedCount++, previous);
      } else putInt(kept, keptCount++, previous);
    }
    previous = row;
  }
  if (previous >= 0) putInt(kept, keptCount++, previous);
  return keptCount;
}

/** Solves the secular equation for the kept rows and replaces these rows by the new eigenvectors, ascending. */
function updateVectors(start: i32, middle: i32, end: i32, count: i32, rho: f64): bool {
  let total: f64 = 0;
  for (let i = 0; i < count; i++) {
    const row = getInt(kept, i);
    const x = get(z, row);
    put(poles, i, get(diagonal, row));
    put(signed, i, x);
    put(weights, i, rho * x * x);
    total += rho * x * x;
  }
  for (let j = 0; j < count; j++) {
    put(diagonal, getInt(kept, j), secularRoot(count, j, poles, weights, total, at(gaps, j * count)));
    if (secularFailed) return false;
  }
  recomputeWeights(count, poles, gaps, signed, temporary);
  // Rows in the order first half, both, second half: each half of the columns then needs one stretch of coefficients.
  const endFirst = listSpan(FIRST, 0, count);
  const endBoth = listSpan(BOTH, endFirst, count);
  listSpan(SECOND, endBoth, count);
  for (let j = 0; j < count; j++) secularVector(count, signed, at(gaps, j * count), list, temporary);
  multiplyHalf(start, middle, 0, endBoth, count);
  multiplyHalf(middle, end, endFirst, count, count);
  return true;
}

/** Appends to `list` the places in `kept` whose rows have the given span; returns the new length. */
function listSpan(kind: i32, length: i32, count: i32): i32 {
  for (let i = 0; i < count; i++) if (getInt(span, getInt(kept, i)) === kind) putInt(list, length++, i);
  return length;
}

/** New rows in the columns `from` to `to`: coefficients `first` to `last` of each times the old rows they belong to. */
function multiplyHalf(from: i32, to: i32, first: i32, last: i32, count: i32): void {
  const width = to - from;
  for (let k = first; k < last; k++) {
    copy(at(gathered, (k - first) * width), at(v, getInt(kept, getInt(list, k)) * n + from), width);
  }
  clear(product, count * width);
  addProduct(count, width, last - first, 1, at(gaps, first), count, 1, gathered, width, 1, product, width, productRoom);
  for (let j = 0; j < count; j++) copy(at(v, getInt(kept, j) * n + from), at(product, j * width), width);
}

/** Merges two lists of rows, each ascending in its eigenvalue. */
function mergeLists(a: usize, aCount: i32, b: usize, bCount: i32, to: usize): void {
  let i = 0;
  let j = 0;
  for (let k = 0; k < aCount + bCount; k++) {
    const takeA = j >= bCount || (i < aCount && get(diagonal, getInt(a, i)) <= get(diagonal, getInt(b, j)));
    putInt(to, k, takeA ? getInt(a, i++) : getInt(b, j++));
  }
}

/** Rotates two stretches of `length` doubles: (x, y) ← (c x − s y, s x + c y). */
function rotateRows(length: i32, p: usize, q: usize, c: f64, s: f64): void {
  const C = f64x2.splat(c);
  const S = f64x2.splat(s);
  let i = 0;
  for (; i + 1 < length; i += 2) {
    const x = v128.load(at(p, i));
    const y = v128.load(at(q, i));
    v128.store(at(p, i), f64x2.sub(f64x2.mul(C, x), f64x2.mul(S, y)));
    v128.store(at(q, i), f64x2.add(f64x2.mul(S, x), f64x2.mul(C, y)));
  }
  if (i < length) {
    const x = get(p, i);
    const y = get(q, i);
    put(p, i, c * x - s * y);
    put(q, i, s * x + c * y);
  }
}
