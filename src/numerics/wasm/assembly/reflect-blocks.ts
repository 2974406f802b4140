// Eigenvectors of the tridiagonal matrix back to those of the full one, many reflectors at a time.

import { at, clear, get, put, room } from "./memory.ts";
import { addProduct } from "./packed-product.ts";

/** Rows that pass through a block of reflectors together; their strips of products stay in the second-level cache. */
const STRIP: i32 = 128;

/** Bytes of scratch for {@link reflectBlocksReal} and {@link reflectBlocksComplex}. */
export function reflectScratch(n: i32, width: i32, complex: bool): usize {
  const square = room(width * width);
  const wide = room(width * n);
  if (!complex) return 2 * square + 2 * wide;
  return 4 * square + 4 * wide + 3 * room(STRIP * width) + 2 * room(STRIP * n);
}

/**
 * The same as `reflectReal` in blocks: on rows, from the right, the reflectors of a block multiply to
 * I − Yᵀ T Y with T upper triangular, applied by matrix products.
 * Source: Schreiber and Van Loan, SIAM J. Sci. Stat. Comput. 10, 53 (1989).
 *
 * @param width - reflectors in a block
 * @param y - as there; what lies at and beyond the diagonal is overwritten with zeros
 */
export function reflectBlocksReal(
  n: i32,
  width: i32,
  y: usize,
  tau: usize,
  count: i32,
  rows: usize,
  scratch: usize,
  forProducts: usize,
): void {
  const gram = scratch;
  const factor = gram + room(width * width);
  const scaled = factor + room(width * width);
  const overlap = scaled + room(width * n);
  for (let first = 1; first < n; first += width) {
    const k = min(width, n - first);
    const length = first + k - 1;
    const block = at(y, first * n);
    if (noReflectors(first, k, tau)) continue;
    clearBeyond(n, first, k, length, y);
    clear(gram, k * k);
    addProduct(k, k, length, 1, block, n, 1, block, 1, n, gram, k, forProducts);
    compactFactor(k, at(tau, first), gram, 0, factor, 0);
    clear(scaled, k * length);
    addProduct(k, length, k, 1, factor, k, 1, block, n, 1, scaled, length, forProducts);
    clear(overlap, count * k);
    addProduct(count, k, length, 1, rows, n, 1, block, 1, n, overlap, k, forProducts);
    addProduct(count, length, k, -1, overlap, k, 1, scaled, length, 1, rows, n, forProducts);
  }
}

function noReflectors(first: i32, count: i32, tau: usize): bool {
  for (let i = first; i < first + count; i++) if (get(tau, i) !== 0) return false;
  return true;
}

/** Row i of a block of reflectors ends before column i. */
function clearBeyond(n: i32, first: i32, count: i32, length: i32, y: usize): void {
  for (let i = first; i < first + count; i++) if (length > i) clear(at(y, i * n + i), length - i);
}

/**
 * The k × k upper triangular factor T of I − Y† T Y, from τ and the Gram matrix Y Y†; the imaginary parts are read and
 * written where `factorIm` is not zero.
 */
function compactFactor(k: i32, tau: usize, gram: usize, gramIm: usize, factor: usize, factorIm: usize): void {
  clear(factor, k * k);
  if (factorIm !== 0) clear(factorIm, k * k);
  for (let j = 0; j < k; j++) {
    const t = get(tau, j);
    put(factor, j * k + j, t);
    for (let a = 0; a < j; a++) {
      let s: f64 = 0;
      let u: f64 = 0;
      for (let b = a; b < j; b++) {
        const x = get(factor, a * k + b);
        const g = get(gram, b * k + j);
        s += x * g;
        if (factorIm !== 0) {
          const w = get(factorIm, a * k + b);
          const h = get(gramIm, b * k + j);
          s -= w * h;
          u += x * h + w * g;
        }
      }
      put(factor, a * k + j, -t * s);
      if (factorIm !== 0) put(factorIm, a * k + j, -t * u);
    }
  }
}

/**
 * The complex companion of {@link reflectBlocksReal}. The two large products of a block are formed with three real
 * multiplications, (a + ib)(c + id) = (ac − bd) + i((a + b)(c + d) − ac − bd): their error is small beside the norm of
 * the factors, not entry by entry (Higham, SIAM J. Matrix Anal. Appl. 13, 681 (1992)), which is all that unit rows ask.
 */
export function reflectBlocksComplex(
  n: i32,
  width: i32,
  yRe: usize,
  yIm: usize,
  tau: usize,
  count: i32,
  rowsRe: usize,
  rowsIm: usize,
  scratch: usize,
  forProducts: usize,
): void {
  const square = room(width * width);
  const wide = room(width * n);
  const tall = room(STRIP * width);
  const gramRe = scratch;
  const gramIm = gramRe + square;
  const factorRe = gramIm + square;
  const factorIm = factorRe + square;
  const scaledRe = factorIm + square;
  const scaledIm = scaledRe + wide;
  const scaledSum = scaledIm + wide;
  const sum = scaledSum + wide;
  const overlapRe = sum + wide;
  const overlapIm = overlapRe + tall;
  const overlapSum = overlapIm + tall;
  const part = overlapSum + tall;
  const stripSum = part + room(STRIP * n);
  for (let first = 1; first < n; first += width) {
    const k = min(width, n - first);
    const length = first + k - 1;
    if (noReflectors(first, k, tau)) continue;
    clearBeyond(n, first, k, length, yRe);
    clearBeyond(n, first, k, length, yIm);
    const re = at(yRe, first * n);
    const im = at(yIm, first * n);
    clear(gramRe, k * k);
    clear(gramIm, k * k);
    // Y Y†: the adjoint is read by columns, its imaginary part with the other sign.
    addProduct(k, k, length, 1, re, n, 1, re, 1, n, gramRe, k, forProducts);
    addProduct(k, k, length, 1, im, n, 1, im, 1, n, gramRe, k, forProducts);
    addProduct(k, k, length, 1, im, n, 1, re, 1, n, gramIm, k, forProducts);
    addProduct(k, k, length, -1, re, n, 1, im, 1, n, gramIm, k, forProducts);
    compactFactor(k, at(tau, first), gramRe, gramIm, factorRe, factorIm);
    clear(scaledRe, k * length);
    clear(scaledIm, k * length);
    addProduct(k, length, k, 1, factorRe, k, 1, re, n, 1, scaledRe, length, forProducts);
    addProduct(k, length, k, -1, factorIm, k, 1, im, n, 1, scaledRe, length, forProducts);
    addProduct(k, length, k, 1, factorRe, k, 1, im, n, 1, scaledIm, length, forProducts);
    addProduct(k, length, k, 1, factorIm, k, 1, re, n, 1, scaledIm, length, forProducts);
    addRows(1, k * length, scaledRe, scaledIm, 1, 0, scaledSum);
    // Re Y − Im Y: real plus imaginary part of the conjugate.
    for (let r = 0; r < k; r++) addRows(1, length, at(re, r * n), at(im, r * n), -1, 0, at(sum, r * length));
    for (let r = 0; r < count; r += STRIP) {
      const height = min(STRIP, count - r);
      const stripRe = at(rowsRe, r * n);
      const stripIm = at(rowsIm, r * n);
      addRows(height, length, stripRe, stripIm, 1, n, stripSum);
      clear(overlapRe, height * k);
      clear(overlapIm, height * k);
      // overlap = strip Y†; with (c + id) = Y† the product bd carries the sign of the conjugation.
      addProduct(height, k, length, 1, stripSum, length, 1, sum, 1, length, overlapIm, k, forProducts);
      clear(part, height * k);
      addProduct(height, k, length, 1, stripRe, n, 1, re, 1, n, part, k, forProducts);
      spread(height, k, part, 1, -1, overlapRe, overlapIm, k);
      clear(part, height * k);
      addProduct(height, k, length, -1, stripIm, n, 1, im, 1, n, part, k, forProducts);
      spread(height, k, part, -1, -1, overlapRe, overlapIm, k);
      addRows(1, height * k, overlapRe, overlapIm, 1, 0, overlapSum);
      // strip ← strip − overlap · scaled
      addProduct(height, length, k, -1, overlapSum, k, 1, scaledSum, length, 1, stripIm, n, forProducts);
      clear(part, height * length);
      addProduct(height, length, k, 1, overlapRe, k, 1, scaledRe, length, 1, part, length, forProducts);
      spread(height, length, part, -1, 1, stripRe, stripIm, n);
      clear(part, height * length);
      addProduct(height, length, k, 1, overlapIm, k, 1, scaledIm, length, 1, part, length, forProducts);
      spread(height, length, part, 1, 1, stripRe, stripIm, n);
    }
  }
}

/** to ← a + sign · b for `rows` rows of `cols` doubles; rows of a and b are `stride` apart, those of `to` contiguous. */
function addRows(rows: i32, cols: i32, a: usize, b: usize, sign: f64, stride: i32, to: usize): void {
  const s = f64x2.splat(sign);
  for (let r = 0; r < rows; r++) {
    const p = at(a, r * stride);
    const q = at(b, r * stride);
    const t = at(to, r * cols);
    let j = 0;
    for (; j + 1 < cols; j += 2) {
      v128.store(at(t, j), f64x2.add(v128.load(at(p, j)), f64x2.mul(s, v128.load(at(q, j)))));
    }
    if (j < cols) put(t, j, get(p, j) + sign * get(q, j));
  }
}

/** re ← re + x · part and im ← im + y · part for contiguous rows of `part` and rows of `stride` doubles. */
function spread(rows: i32, cols: i32, part: usize, x: f64, y: f64, re: usize, im: usize, stride: i32): void {
  const X = f64x2.splat(x);
  const Y = f64x2.splat(y);
  for (let r = 0; r < rows; r++) {
    const p = at(part, r * cols);
    const a = at(re, r * stride);
    const b = at(im, r * stride);
    let j = 0;
    for (; j + 1 < cols; j += 2) {
      const value = v128.load(at(p, j));
      v128.store(at(a, j), f64x2.add(v128.load(at(a, j)), f64x2.mul(X, value)));
      v128.store(at(b, j), f64x2.add(v128.load(at(b, j)), f64x2.mul(Y, value)));
    }
    if (j < cols) {
      put(a, j, get(a, j) + x * get(p, j));
      put(b, j, get(b, j) + y * get(p, j));
    }
  }
}
