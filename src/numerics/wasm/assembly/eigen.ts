// The Hermitian eigenproblem from beginning to end, one call for a batch of matrices of one order.

import { divideAndConquer, divideScratch, mergeRoom } from "./divide-and-conquer.ts";
import { at, clear, copy, get, getInt, put, room, scale } from "./memory.ts";
import { eigenOfOrderTwo } from "./order-two.ts";
import { productScratch } from "./packed-product.ts";
import { reduceComplex, reduceComplexScratch } from "./reduce-complex.ts";
import { reduceReal, reduceRealScratch } from "./reduce-real.ts";
import { reflectComplex, reflectReal } from "./reflect.ts";
import { reflectBlocksComplex, reflectBlocksReal, reflectScratch } from "./reflect-blocks.ts";

/** Index of the first eigenpair that the last call found inside its window. */
export let windowStart: i32 = 0;

/** Bytes of scratch that {@link solveHermitian} asks for. */
export function eigenScratch(n: i32, complex: bool, leaf: i32, blockedFrom: i32, blockWidth: i32): usize {
  const vectors: usize = 6 * room(n);
  const reduction = complex ? reduceComplexScratch(n) : reduceRealScratch(n);
  const divided = n > leaf;
  const merges: usize = complex || !divided ? 0 : room(mergeRoom(n));
  const blocks: usize = n >= blockedFrom ? reflectScratch(n, blockWidth, complex) : 0;
  const products: usize = divided || n >= blockedFrom ? productScratch() : 0;
  return vectors + reduction + divideScratch(n) + room(n * n) + merges + blocks + products;
}

/**
 * Eigenpairs of `count` Hermitian matrices of order n, one after the other: scaling by a power of two, reduction to
 * tridiagonal form, divide and conquer, back-transformation. Where a window is given, the vectors outside it are not
 * transformed back.
 *
 * @param re - count matrices of n² doubles; the lower triangle is read; destroyed
 * @param im - imaginary parts, or 0 for real matrices; destroyed
 * @param values - receives n eigenvalues a matrix, ascending
 * @param vectorsRe - receives, for every matrix, n² doubles whose first rows are the eigenvectors inside the window
 * @param vectorsIm - the same for the imaginary parts, or 0; followed by n doubles more, overwritten
 * @param from - first index wanted
 * @param to - index after the last wanted
 * @param low - smallest eigenvalue wanted
 * @param high - largest eigenvalue wanted
 * @param leaf - tridiagonal blocks up to this order, at least 1, go to implicit QL
 * @param blockedFrom - from this order on, reflectors are applied in blocks
 * @param blockWidth - reflectors in a block, at least 1
 * @param scratch - {@link eigenScratch} bytes
 * @returns the number of vectors inside the window of the last matrix, or −1 − b where matrix b did not converge
 */
export function solveHermitian(
  count: i32,
  n: i32,
  re: usize,
  im: usize,
  values: usize,
  vectorsRe: usize,
  vectorsIm: usize,
  from: i32,
  to: i32,
  low: f64,
  high: f64,
  leaf: i32,
  blockedFrom: i32,
  blockWidth: i32,
  scratch: usize,
): i32 {
  const size = ((n * n) as usize) << 3;
  let found = 0;
  for (let b = 0; b < count; b++) {
    const shift = (b as usize) * size;
    const lambda = at(values, b * n);
    const a = re + shift;
    const c: usize = im === 0 ? 0 : im + shift;
    const v = vectorsRe + shift;
    const w: usize = im === 0 ? 0 : vectorsIm + shift;
    const unit = powerOfTwoNear(largestEntry(n, a, c));
    if (n === 2) {
      eigenOfOrderTwo(a, c, 1 / unit, lambda, v, w);
      rescale(n, lambda, unit);
      found = shiftWindow(n, lambda, v, w, from, to, low, high);
    } else {
      found = solveOne(n, a, c, unit, lambda, v, w, from, to, low, high, leaf, blockedFrom, blockWidth, scratch);
      if (found < 0) return -1 - b;
    }
  }
  return found;
}

/** Orders from three on, and one. */
function solveOne(
  n: i32,
  re: usize,
  im: usize,
  unit: f64,
  values: usize,
  vectorsRe: usize,
  vectorsIm: usize,
  from: i32,
  to: i32,
  low: f64,
  high: f64,
  leaf: i32,
  blockedFrom: i32,
  blockWidth: i32,
  scratch: usize,
): i32 {
  const complex = im !== 0;
  const diagonal = scratch;
  const off = diagonal + room(n);
  const tau = off + room(n);
  const phaseRe = tau + room(n);
  const phaseIm = phaseRe + room(n);
  const order = phaseIm + room(n);
  const reduction = order + room(n);
  const divide = reduction + (complex ? reduceComplexScratch(n) : reduceRealScratch(n));
  const v = divide + divideScratch(n);
  let rest = v + room(n * n);
  // Until the rows are gathered, the room of the results serves the merges: n² doubles, and at most n² + n.
  const merges = complex ? vectorsIm : rest;
  if (!complex && n > leaf) rest += room(mergeRoom(n));
  const forProducts = rest;
  if (n > leaf || n >= blockedFrom) rest += productScratch();

  scaleLower(n, re, 1 / unit);
  if (complex) {
    scaleLower(n, im, 1 / unit);
    reduceComplex(n, re, im, diagonal, off, tau, phaseRe, phaseIm, reduction);
  } else reduceReal(n, re, diagonal, off, tau, reduction);
  clear(v, n * n);
  let norm = abs(get(diagonal, n - 1));
  for (let i = 0; i < n - 1; i++) norm = max(norm, max(abs(get(diagonal, i)), abs(get(off, i))));
  if (!divideAndConquer(n, diagonal, off, v, order, norm, leaf, vectorsRe, merges, divide, forProducts)) return -1;

  for (let k = 0; k < n; k++) put(values, k, get(diagonal, getInt(order, k)));
  rescale(n, values, unit);
  const wanted = placeWindow(n, values, from, to, low, high);
  for (let k = 0; k < wanted; k++) {
    const row = at(v, getInt(order, windowStart + k) * n);
    if (complex) multiplyPhases(n, row, phaseRe, phaseIm, at(vectorsRe, k * n), at(vectorsIm, k * n));
    else copy(at(vectorsRe, k * n), row, n);
  }
  if (n < blockedFrom) {
    if (complex) reflectComplex(n, re, im, tau, wanted, vectorsRe, vectorsIm);
    else reflectReal(n, re, tau, wanted, vectorsRe);
  } else if (complex) {
    reflectBlocksComplex(n, blockWidth, re, im, tau, wanted, vectorsRe, vectorsIm, rest, forProducts);
  } else reflectBlocksReal(n, blockWidth, re, tau, wanted, vectorsRe, rest, forProducts);
  return wanted;
}

/** Largest modulus of a real or imaginary part in the lower triangle. */
function largestEntry(n: i32, re: usize, im: usize): f64 {
  let most = f64x2.splat(0);
  let single: f64 = 0;
  for (let i = 0; i < n; i++) {
    const row = at(re, i * n);
    let j = 0;
    for (; j < i; j += 2) most = f64x2.max(most, f64x2.abs(v128.load(at(row, j))));
    // An even row index leaves the diagonal entry alone; in an odd one the last pair ended with it.
    if (j === i) single = max(single, abs(get(row, i)));
    if (im === 0) continue;
    const rowIm = at(im, i * n);
    for (j = 0; j + 1 < i; j += 2) most = f64x2.max(most, f64x2.abs(v128.load(at(rowIm, j))));
    if (j < i) single = max(single, abs(get(rowIm, j)));
  }
  return max(single, max(f64x2.extract_lane(most, 0), f64x2.extract_lane(most, 1)));
}

/** The power of two just below x, kept where its inverse is a double as well. */
function powerOfTwoNear(x: f64): f64 {
  const exponent = ((reinterpret<u64>(x) >> 52) & 0x7ff) as i64;
  return reinterpret<f64>(max(23, min(2023, exponent)) << 52);
}

function scaleLower(n: i32, a: usize, factor: f64): void {
  for (let i = 0; i < n; i++) scale(i + 1, at(a, i * n), factor);
}

/** Multiplies by the power of two; adding zero turns −0 into 0. */
function rescale(n: i32, values: usize, unit: f64): void {
  for (let k = 0; k < n; k++) put(values, k, get(values, k) * unit + 0);
}

/** Sets {@link windowStart} and returns the number of eigenvalues wanted. */
function placeWindow(n: i32, values: usize, from: i32, to: i32, low: f64, high: f64): i32 {
  let first = max(0, from);
  let last = min(n, to);
  while (first < last && get(values, first) < low) first++;
  while (last > first && get(values, last - 1) > high) last--;
  windowStart = first;
  return max(0, last - first);
}

/** {@link placeWindow}, and the rows inside the window to the front. */
function shiftWindow(n: i32, values: usize, re: usize, im: usize, from: i32, to: i32, low: f64, high: f64): i32 {
  const wanted = placeWindow(n, values, from, to, low, high);
  copy(re, at(re, windowStart * n), wanted * n);
  if (im !== 0) copy(im, at(im, windowStart * n), wanted * n);
  return wanted;
}

/** A real row times the diagonal of phases. */
function multiplyPhases(n: i32, row: usize, phaseRe: usize, phaseIm: usize, re: usize, im: usize): void {
  let j = 0;
  for (; j + 1 < n; j += 2) {
    const x = v128.load(at(row, j));
    v128.store(at(re, j), f64x2.mul(x, v128.load(at(phaseRe, j))));
    v128.store(at(im, j), f64x2.mul(x, v128.load(at(phaseIm, j))));
  }
  if (j < n) {
    put(re, j, get(row, j) * get(phaseRe, j));
    put(im, j, get(row, j) * get(phaseIm, j));
  }
}
