// The product of two dense square matrices, real or complex.

import { at, clear, get, put, room } from "./memory.ts";
import { addProduct, productScratch } from "./packed-product.ts";

/** Rows of A that are multiplied together; what belongs to them stays in the second-level cache. */
const STRIP: i32 = 256;

/** Bytes of scratch that {@link multiplyDense} asks for. */
export function denseScratch(n: i32, bothComplex: bool): usize {
  const sums: usize = bothComplex ? room(n * n) + 2 * room(STRIP * n) : 0;
  return sums + productScratch();
}

/**
 * C = A B, row-major n × n. Imaginary parts have address 0 in a real matrix; the result has them where A or B has.
 *
 * Two complex factors take three real multiplications, (a + ib)(c + id) = (ac − bd) + i((a + b)(c + d) − ac − bd)
 * (Higham, SIAM J. Matrix Anal. Appl. 13, 681 (1992)), or four, ac − bd and ad + bc; the bounds on their rounding are
 * stated at `productDense` and at `partsRounding`.
 *
 * @param three - whether two complex factors take three multiplications
 * @param scratch - {@link denseScratch} bytes
 */
export function multiplyDense(
  n: i32,
  aRe: usize,
  aIm: usize,
  bRe: usize,
  bIm: usize,
  cRe: usize,
  cIm: usize,
  three: bool,
  scratch: usize,
): void {
  clear(cRe, n * n);
  if (cIm !== 0) clear(cIm, n * n);
  if (aIm === 0 || bIm === 0) {
    addProduct(n, n, n, 1, aRe, n, 1, bRe, n, 1, cRe, n, scratch);
    if (aIm !== 0) addProduct(n, n, n, 1, aIm, n, 1, bRe, n, 1, cIm, n, scratch);
    if (bIm !== 0) addProduct(n, n, n, 1, aRe, n, 1, bIm, n, 1, cIm, n, scratch);
    return;
  }
  if (!three) {
    const half = scratch;
    const products = half + room(n * n);
    addProduct(n, n, n, 1, aRe, n, 1, bRe, n, 1, cRe, n, products);
    clear(half, n * n);
    addProduct(n, n, n, -1, aIm, n, 1, bIm, n, 1, half, n, products);
    add(n * n, cRe, half, cRe);
    addProduct(n, n, n, 1, aRe, n, 1, bIm, n, 1, cIm, n, products);
    clear(half, n * n);
    addProduct(n, n, n, 1, aIm, n, 1, bRe, n, 1, half, n, products);
    add(n * n, cIm, half, cIm);
    return;
  }
  const bSum = scratch;
  const aSum = bSum + room(n * n);
  const part = aSum + room(STRIP * n);
  const forProducts = part + room(STRIP * n);
  add(n * n, bRe, bIm, bSum);
  for (let row = 0; row < n; row += STRIP) {
    const rows = min(STRIP, n - row);
    const a = at(aRe, row * n);
    const b = at(aIm, row * n);
    const re = at(cRe, row * n);
    const im = at(cIm, row * n);
    add(rows * n, a, b, aSum);
    addProduct(rows, n, n, 1, aSum, n, 1, bSum, n, 1, im, n, forProducts);
    clear(part, rows * n);
    addProduct(rows, n, n, 1, a, n, 1, bRe, n, 1, part, n, forProducts);
    settle(rows * n, part, 1, re, im);
    clear(part, rows * n);
    addProduct(rows, n, n, 1, b, n, 1, bIm, n, 1, part, n, forProducts);
    settle(rows * n, part, -1, re, im);
  }
}

/** to ← a + b over n doubles. */
function add(n: i32, a: usize, b: usize, to: usize): void {
  let j = 0;
  for (; j + 1 < n; j += 2) v128.store(at(to, j), f64x2.add(v128.load(at(a, j)), v128.load(at(b, j))));
  if (j < n) put(to, j, get(a, j) + get(b, j));
}

/** re ← re + sign · part and im ← im − part over n doubles. */
function settle(n: i32, part: usize, sign: f64, re: usize, im: usize): void {
  const s = f64x2.splat(sign);
  let j = 0;
  for (; j + 1 < n; j += 2) {
    const x = v128.load(at(part, j));
    v128.store(at(re, j), f64x2.add(v128.load(at(re, j)), f64x2.mul(s, x)));
    v128.store(at(im, j), f64x2.sub(v128.load(at(im, j)), x));
  }
  if (j < n) {
    put(re, j, get(re, j) + sign * get(part, j));
    put(im, j, get(im, j) - get(part, j));
  }
}
