// Real symmetric to tridiagonal form, one pass over the triangle a step.

import { at, clear, copy, dot, get, lanes, put, room, scale } from "./memory.ts";

/** A row whose entries beside the pivot have squares that add up to no more than this is reduced already. */
export const NEGLIGIBLE_SQUARE: f64 = reinterpret<f64>((1023 - 900) << 52);

/** Bytes of scratch that {@link reduceReal} asks for. */
export function reduceRealScratch(n: i32): usize {
  return 3 * room(n);
}

/**
 * A = Q T Qᵀ with Q = H_{n−1} ⋯ H_2 H_1 and H_i = I − τ_i y_i y_iᵀ, from the last row upward, so that the reflectors
 * lie in contiguous rows; the rank-two update of one step is applied while the product of the next is formed.
 * Source: Householder, J. ACM 5, 339 (1958); row order of tred2, Martin, Reinsch and Wilkinson, Numer. Math. 11, 181
 * (1968).
 *
 * @param a - n × n, entries about one or less; the lower triangle is read; on return row i holds y_i in its columns
 * 0 … i − 1
 * @param diagonal - receives the n diagonal entries
 * @param off - receives the n − 1 off-diagonal ones, entry i coupling i and i + 1
 * @param tau - receives τ_i, zero for no reflector
 */
export function reduceReal(n: i32, a: usize, diagonal: usize, off: usize, tau: usize, scratch: usize): void {
  const u = scratch;
  const w = u + room(n);
  const y = w + room(n);
  clear(u, n);
  clear(w, n);
  let pending = false;
  for (let i = n - 1; i > 0; i--) {
    const row = at(a, i * n);
    if (pending) updateRow(i + 1, row, u, w, get(u, i), get(w, i));
    put(diagonal, i, get(row, i));
    const tail = dot(i - 1, row, row);
    const pivot = get(row, i - 1);
    if (tail <= NEGLIGIBLE_SQUARE) {
      put(off, i - 1, pivot);
      put(tau, i, 0);
      clear(row, i);
      if (pending) {
        updateAndMultiply(i, n, a, u, w, row, y);
        clear(u, n);
        clear(w, n);
        pending = false;
      }
      continue;
    }
    const norm = sqrt(pivot * pivot + tail);
    const beta = pivot > 0 ? -norm : norm;
    const t = (beta - pivot) / beta;
    scale(i - 1, row, 1 / (pivot - beta));
    put(row, i - 1, 1);
    put(off, i - 1, beta);
    put(tau, i, t);
    clear(y, i);
    updateAndMultiply(i, n, a, u, w, row, y);
    combine(i, t, -0.5 * t * t * dot(i, y, row), y, row, w);
    copy(u, row, i);
    pending = true;
  }
  put(diagonal, 0, get(a, 0));
}

/** row_j ← row_j − u_i w_j − w_i u_j over n doubles. */
function updateRow(n: i32, row: usize, u: usize, w: usize, ui: f64, wi: f64): void {
  const x = f64x2.splat(ui);
  const y = f64x2.splat(wi);
  let j = 0;
  for (; j + 1 < n; j += 2) {
    const o = (j as usize) << 3;
    const change = f64x2.add(f64x2.mul(x, v128.load(w + o)), f64x2.mul(y, v128.load(u + o)));
    v128.store(row + o, f64x2.sub(v128.load(row + o), change));
  }
  if (j < n) put(row, j, get(row, j) - (ui * get(w, j) + wi * get(u, j)));
}

/** w_j ← t y_j + shift x_j over n doubles. */
export function combine(n: i32, t: f64, shift: f64, y: usize, x: usize, w: usize): void {
  const p = f64x2.splat(t);
  const q = f64x2.splat(shift);
  let j = 0;
  for (; j + 1 < n; j += 2) {
    const o = (j as usize) << 3;
    v128.store(w + o, f64x2.add(f64x2.mul(p, v128.load(y + o)), f64x2.mul(q, v128.load(x + o))));
  }
  if (j < n) put(w, j, t * get(y, j) + shift * get(x, j));
}

/**
 * One pass over the leading m × m triangle, two rows at a time: A ← A − u wᵀ − w uᵀ, y ← y + A x with the new A.
 */
function updateAndMultiply(m: i32, n: i32, a: usize, u: usize, w: usize, x: usize, y: usize): void {
  const stride = (n as usize) << 3;
  let r = 0;
  for (; r + 1 < m; r += 2) {
    const o = (r as usize) << 3;
    const p = a + (r as usize) * stride;
    const q = p + stride;
    const u0 = v128.load64_splat(u + o);
    const u1 = v128.load64_splat(u + o, 8);
    const w0 = v128.load64_splat(w + o);
    const w1 = v128.load64_splat(w + o, 8);
    const x0 = v128.load64_splat(x + o);
    const x1 = v128.load64_splat(x + o, 8);
    let s0 = f64x2.splat(0);
    let s1 = s0;
    for (let c: usize = 0; c < o; c += 16) {
      const uc = v128.load(u + c);
      const wc = v128.load(w + c);
      const xc = v128.load(x + c);
      const a0 = f64x2.sub(f64x2.sub(v128.load(p + c), f64x2.mul(u0, wc)), f64x2.mul(w0, uc));
      const a1 = f64x2.sub(f64x2.sub(v128.load(q + c), f64x2.mul(u1, wc)), f64x2.mul(w1, uc));
      v128.store(p + c, a0);
      v128.store(q + c, a1);
      s0 = f64x2.add(s0, f64x2.mul(a0, xc));
      s1 = f64x2.add(s1, f64x2.mul(a1, xc));
      v128.store(y + c, f64x2.add(v128.load(y + c), f64x2.add(f64x2.mul(a0, x0), f64x2.mul(a1, x1))));
    }
    const a00 = get(p, r) - 2 * get(u, r) * get(w, r);
    const a10 = get(q, r) - get(u, r + 1) * get(w, r) - get(w, r + 1) * get(u, r);
    const a11 = get(q, r + 1) - 2 * get(u, r + 1) * get(w, r + 1);
    put(p, r, a00);
    put(q, r, a10);
    put(q, r + 1, a11);
    put(y, r, get(y, r) + lanes(s0) + a00 * get(x, r) + a10 * get(x, r + 1));
    put(y, r + 1, get(y, r + 1) + lanes(s1) + a10 * get(x, r) + a11 * get(x, r + 1));
  }
  if (r < m) {
    const p = at(a, r * n);
    const ur = get(u, r);
    const wr = get(w, r);
    const xr = get(x, r);
    let s: f64 = 0;
    for (let c = 0; c < r; c++) {
      const e = get(p, c) - ur * get(w, c) - wr * get(u, c);
      put(p, c, e);
      s += e * get(x, c);
      put(y, c, get(y, c) + e * xr);
    }
    const e = get(p, r) - 2 * ur * wr;
    put(p, r, e);
    put(y, r, get(y, r) + s + e * xr);
  }
}
