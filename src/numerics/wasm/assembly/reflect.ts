// Eigenvectors of the tridiagonal matrix back to those of the full one: row ← H_{n−1} ⋯ H_1 row.

import { at, get, lanes, put } from "./memory.ts";

/**
 * Applies real reflectors one by one to `count` rows of n doubles; row i of `y` holds y_i in its columns 0 … i − 1.
 * Source: Householder, J. ACM 5, 339 (1958).
 */
export function reflectReal(n: i32, y: usize, tau: usize, count: i32, rows: usize): void {
  // Four rows stay in the first-level cache while all reflectors pass over them.
  const step = (n as usize) << 3;
  let r = 0;
  for (; r + 3 < count; r += 4) {
    for (let i = 1; i < n; i++) {
      const t = get(tau, i);
      if (t !== 0) reflectFourRows(i, t, at(y, i * n), at(rows, r * n), step);
    }
  }
  for (; r < count; r++) {
    for (let i = 1; i < n; i++) {
      const t = get(tau, i);
      if (t !== 0) reflectOneRow(i, t, at(y, i * n), at(rows, r * n));
    }
  }
}

/** {@link reflectFourRows} for one row, with the same sums in the same order: a row has the same bits in any company. */
function reflectOneRow(n: i32, t: f64, y: usize, row: usize): void {
  let a = f64x2.splat(0);
  let b = a;
  const end = ((n as usize) << 3) & ~15;
  let o: usize = 0;
  for (; o + 16 < end; o += 32) {
    a = f64x2.add(a, f64x2.mul(v128.load(y + o), v128.load(row + o)));
    b = f64x2.add(b, f64x2.mul(v128.load(y + o, 16), v128.load(row + o, 16)));
  }
  if (o < end) a = f64x2.add(a, f64x2.mul(v128.load(y + o), v128.load(row + o)));
  let s = lanes(f64x2.add(a, b));
  if (n & 1) s += get(y, n - 1) * get(row, n - 1);
  s *= t;
  a = f64x2.splat(s);
  for (o = 0; o < end; o += 16) {
    v128.store(row + o, f64x2.sub(v128.load(row + o), f64x2.mul(a, v128.load(y + o))));
  }
  if (n & 1) put(row, n - 1, get(row, n - 1) - s * get(y, n - 1));
}

/** row ← row − t (yᵀ row) y over n doubles, for four rows `step` bytes apart. */
function reflectFourRows(n: i32, t: f64, y: usize, row0: usize, step: usize): void {
  const row1 = row0 + step;
  const row2 = row1 + step;
  const row3 = row2 + step;
  let a0 = f64x2.splat(0);
  let a1 = a0;
  let a2 = a0;
  let a3 = a0;
  let b0 = a0;
  let b1 = a0;
  let b2 = a0;
  let b3 = a0;
  const end = ((n as usize) << 3) & ~15;
  let o: usize = 0;
  // Two sums a row: one alone would wait for its own last addition.
  for (; o + 16 < end; o += 32) {
    const p = v128.load(y + o);
    const q = v128.load(y + o, 16);
    a0 = f64x2.add(a0, f64x2.mul(p, v128.load(row0 + o)));
    b0 = f64x2.add(b0, f64x2.mul(q, v128.load(row0 + o, 16)));
    a1 = f64x2.add(a1, f64x2.mul(p, v128.load(row1 + o)));
    b1 = f64x2.add(b1, f64x2.mul(q, v128.load(row1 + o, 16)));
    a2 = f64x2.add(a2, f64x2.mul(p, v128.load(row2 + o)));
    b2 = f64x2.add(b2, f64x2.mul(q, v128.load(row2 + o, 16)));
    a3 = f64x2.add(a3, f64x2.mul(p, v128.load(row3 + o)));
    b3 = f64x2.add(b3, f64x2.mul(q, v128.load(row3 + o, 16)));
  }
  if (o < end) {
    const p = v128.load(y + o);
    a0 = f64x2.add(a0, f64x2.mul(p, v128.load(row0 + o)));
    a1 = f64x2.add(a1, f64x2.mul(p, v128.load(row1 + o)));
    a2 = f64x2.add(a2, f64x2.mul(p, v128.load(row2 + o)));
    a3 = f64x2.add(a3, f64x2.mul(p, v128.load(row3 + o)));
  }
  let s0 = lanes(f64x2.add(a0, b0));
  let s1 = lanes(f64x2.add(a1, b1));
  let s2 = lanes(f64x2.add(a2, b2));
  let s3 = lanes(f64x2.add(a3, b3));
  if (n & 1) {
    const p = get(y, n - 1);
    s0 += p * get(row0, n - 1);
    s1 += p * get(row1, n - 1);
    s2 += p * get(row2, n - 1);
    s3 += p * get(row3, n - 1);
  }
  s0 *= t;
  s1 *= t;
  s2 *= t;
  s3 *= t;
  a0 = f64x2.splat(s0);
  a1 = f64x2.splat(s1);
  a2 = f64x2.splat(s2);
  a3 = f64x2.splat(s3);
  for (o = 0; o < end; o += 16) {
    const p = v128.load(y + o);
    v128.store(row0 + o, f64x2.sub(v128.load(row0 + o), f64x2.mul(a0, p)));
    v128.store(row1 + o, f64x2.sub(v128.load(row1 + o), f64x2.mul(a1, p)));
    v128.store(row2 + o, f64x2.sub(v128.load(row2 + o), f64x2.mul(a2, p)));
    v128.store(row3 + o, f64x2.sub(v128.load(row3 + o), f64x2.mul(a3, p)));
  }
  if (n & 1) {
    const p = get(y, n - 1);
    put(row0, n - 1, get(row0, n - 1) - s0 * p);
    put(row1, n - 1, get(row1, n - 1) - s1 * p);
    put(row2, n - 1, get(row2, n - 1) - s2 * p);
    put(row3, n - 1, get(row3, n - 1) - s3 * p);
  }
}

/** The complex companion of {@link reflectReal}. */
export function reflectComplex(
  n: i32,
  yRe: usize,
  yIm: usize,
  tau: usize,
  count: i32,
  rowsRe: usize,
  rowsIm: usize,
): void {
  // A pair of rows stays in the first-level cache while all reflectors pass over it.
  const step = (n as usize) << 3;
  let r = 0;
  for (; r + 1 < count; r += 2) {
    for (let i = 1; i < n; i++) {
      const t = get(tau, i);
      if (t === 0) continue;
      reflectTwoRows(i, t, at(yRe, i * n), at(yIm, i * n), at(rowsRe, r * n), at(rowsIm, r * n), step);
    }
  }
  if (r === count) return;
  for (let i = 1; i < n; i++) {
    reflectRow(i, get(tau, i), at(yRe, i * n), at(yIm, i * n), at(rowsRe, r * n), at(rowsIm, r * n));
  }
}

/** row ← row − t (y† row) y over n numbers. */
function reflectRow(n: i32, t: f64, yr: usize, yi: usize, re: usize, im: usize): void {
  let S = f64x2.splat(0);
  let T = S;
  let j = 0;
  for (; j + 1 < n; j += 2) {
    const a = v128.load(at(yr, j));
    const b = v128.load(at(yi, j));
    const x = v128.load(at(re, j));
    const y = v128.load(at(im, j));
    S = f64x2.add(S, f64x2.add(f64x2.mul(a, x), f64x2.mul(b, y)));
    T = f64x2.add(T, f64x2.sub(f64x2.mul(a, y), f64x2.mul(b, x)));
  }
  let s = lanes(S);
  let u = lanes(T);
  if (j < n) {
    s += get(yr, j) * get(re, j) + get(yi, j) * get(im, j);
    u += get(yr, j) * get(im, j) - get(yi, j) * get(re, j);
  }
  s *= t;
  u *= t;
  S = f64x2.splat(s);
  T = f64x2.splat(u);
  for (j = 0; j + 1 < n; j += 2) {
    const a = v128.load(at(yr, j));
    const b = v128.load(at(yi, j));
    v128.store(at(re, j), f64x2.sub(v128.load(at(re, j)), f64x2.sub(f64x2.mul(S, a), f64x2.mul(T, b))));
    v128.store(at(im, j), f64x2.sub(v128.load(at(im, j)), f64x2.add(f64x2.mul(S, b), f64x2.mul(T, a))));
  }
  if (j < n) {
    const a = get(yr, j);
    const b = get(yi, j);
    put(re, j, get(re, j) - (s * a - u * b));
    put(im, j, get(im, j) - (s * b + u * a));
  }
}

/** {@link reflectRow} for two rows `step` bytes apart: they share the loads of y, and their sums overlap. */
function reflectTwoRows(n: i32, t: f64, yr: usize, yi: usize, re: usize, im: usize, step: usize): void {
  let S = f64x2.splat(0);
  let T = S;
  let U = S;
  let V = S;
  const end = ((n as usize) << 3) & ~15;
  for (let o: usize = 0; o < end; o += 16) {
    const a = v128.load(yr + o);
    const b = v128.load(yi + o);
    let x = v128.load(re + o);
    let y = v128.load(im + o);
    S = f64x2.add(S, f64x2.add(f64x2.mul(a, x), f64x2.mul(b, y)));
    T = f64x2.add(T, f64x2.sub(f64x2.mul(a, y), f64x2.mul(b, x)));
    x = v128.load(re + step + o);
    y = v128.load(im + step + o);
    U = f64x2.add(U, f64x2.add(f64x2.mul(a, x), f64x2.mul(b, y)));
    V = f64x2.add(V, f64x2.sub(f64x2.mul(a, y), f64x2.mul(b, x)));
  }
  let s = lanes(S);
  let w = lanes(T);
  let p = lanes(U);
  let q = lanes(V);
  const re2 = re + step;
  const im2 = im + step;
  if (n & 1) {
    const a = get(yr, n - 1);
    const b = get(yi, n - 1);
    s += a * get(re, n - 1) + b * get(im, n - 1);
    w += a * get(im, n - 1) - b * get(re, n - 1);
    p += a * get(re2, n - 1) + b * get(im2, n - 1);
    q += a * get(im2, n - 1) - b * get(re2, n - 1);
  }
  s *= t;
  w *= t;
  p *= t;
  q *= t;
  S = f64x2.splat(s);
  T = f64x2.splat(w);
  U = f64x2.splat(p);
  V = f64x2.splat(q);
  for (let o: usize = 0; o < end; o += 16) {
    const a = v128.load(yr + o);
    const b = v128.load(yi + o);
    v128.store(re + o, f64x2.sub(v128.load(re + o), f64x2.sub(f64x2.mul(S, a), f64x2.mul(T, b))));
    v128.store(im + o, f64x2.sub(v128.load(im + o), f64x2.add(f64x2.mul(S, b), f64x2.mul(T, a))));
    v128.store(re2 + o, f64x2.sub(v128.load(re2 + o), f64x2.sub(f64x2.mul(U, a), f64x2.mul(V, b))));
    v128.store(im2 + o, f64x2.sub(v128.load(im2 + o), f64x2.add(f64x2.mul(U, b), f64x2.mul(V, a))));
  }
  if (n & 1) {
    const a = get(yr, n - 1);
    const b = get(yi, n - 1);
    put(re, n - 1, get(re, n - 1) - (s * a - w * b));
    put(im, n - 1, get(im, n - 1) - (s * b + w * a));
    put(re2, n - 1, get(re2, n - 1) - (p * a - q * b));
    put(im2, n - 1, get(im2, n - 1) - (p * b + q * a));
  }
}
