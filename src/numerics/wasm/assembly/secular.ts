// The secular equation of one merge of divide and conquer, and the vectors that belong to its roots.

import { at, get, lanes, put } from "./memory.ts";

const UNIT_ROUNDOFF: f64 = 1.1102230246251565e-16;
/** Steps allowed for one root; from step BISECT_FROM on every second one halves the bracket, which settles it. */
const MAX_STEPS: i32 = 400;
const BISECT_FROM: i32 = 16;

/** Whether the last call of {@link secularRoot} met its bound of steps. */
export let secularFailed: bool = false;

// Value and slope of the two halves of the sum at the last point that evaluate() saw.
let psi: f64 = 0;
let psiSlope: f64 = 0;
let phi: f64 = 0;
let phiSlope: f64 = 0;
// What sumOver() found.
let partial: f64 = 0;
let partialSlope: f64 = 0;

/**
 * Root j of 1 + Σ_i w_i / (d_i − λ) = 0, between d_j and d_{j+1} (the last: between d_{K−1} and d_{K−1} + Σ w_i).
 *
 * The origin is moved to the nearer pole, so that every difference d_i − λ comes out to high relative accuracy; each
 * step fits the two halves of the sum by one pole each, inside a shrinking bracket.
 * Source: Bunch, Nielsen and Sorensen, Numer. Math. 31, 31 (1978); choice of origin and first guess: Li, LAPACK Working
 * Note 89 (1994).
 *
 * @param count - number K of poles
 * @param poles - K poles d_i, strictly ascending
 * @param weights - K positive weights w_i
 * @param total - Σ w_i
 * @param gaps - receives the K differences d_i − λ
 * @returns λ, rounded; {@link secularFailed} tells when the bracket did not settle
 */
export function secularRoot(count: i32, j: i32, poles: usize, weights: usize, total: f64, gaps: usize): f64 {
  secularFailed = false;
  if (count === 1) {
    put(gaps, 0, -get(weights, 0));
    return get(poles, 0) + get(weights, 0);
  }
  const last = j === count - 1;
  // Poles before `split` make the first half of the sum, fitted by the pole left of it; the rest by the pole at it.
  const split = last ? count - 1 : j + 1;
  let origin = get(poles, j);
  const width = last ? total : get(poles, j + 1) - origin;
  subtract(count, poles, origin, gaps);
  let low: f64 = 0;
  let high = width;
  let eta = 0.5 * width;
  for (let step = 0; step < MAX_STEPS; step++) {
    evaluate(count, split, weights, gaps, eta);
    const value = 1 + psi + phi;
    const slope = psiSlope + phiSlope;
    if (step === 0 && !last && value <= 0) {
      origin = get(poles, j + 1);
      subtract(count, poles, origin, gaps);
      eta = -0.5 * width;
      low = eta;
      high = 0;
    } else if (value > 0) high = eta;
    else low = eta;
    const noise = 8 * (abs(psi) + abs(phi)) + 2 + abs(eta) * slope;
    if (step > 0 && abs(value) <= 2 * UNIT_ROUNDOFF * noise) return settle(count, gaps, origin, eta);
    const left = get(gaps, split - 1) - eta;
    const right = get(gaps, split) - eta;
    let a: f64;
    let c: f64;
    if (step === 0) {
      const wLeft = get(weights, split - 1);
      const wRight = get(weights, split);
      c = value - wLeft / left - wRight / right;
      a = c * (left + right) + wLeft + wRight;
    } else {
      c = value - psiSlope * left - phiSlope * right;
      a = (left + right) * value - left * right * slope;
    }
    let next = eta + nearerRoot(a, left * right * value, c, last);
    if (!(next > low && next < high) || (step >= BISECT_FROM && step % 2 === 0)) next = 0.5 * (low + high);
    if (next === low || next === high) return settle(count, gaps, origin, eta);
    const moved = abs(next - eta);
    eta = next;
    if (moved <= 2 * UNIT_ROUNDOFF * abs(eta)) return settle(count, gaps, origin, eta);
  }
  secularFailed = true;
  return origin + eta;
}

/** The two halves of the sum, and their slopes, at the point eta from the origin. */
function evaluate(count: i32, split: i32, weights: usize, gaps: usize, eta: f64): void {
  sumOver(0, split, weights, gaps, eta);
  psi = partial;
  psiSlope = partialSlope;
  sumOver(split, count, weights, gaps, eta);
  phi = partial;
  phiSlope = partialSlope;
}

function sumOver(from: i32, to: i32, weights: usize, gaps: usize, eta: f64): void {
  const one = f64x2.splat(1);
  const shift = f64x2.splat(eta);
  let a = f64x2.splat(0);
  let b = a;
  let i = from;
  for (; i + 1 < to; i += 2) {
    const inverse = f64x2.div(one, f64x2.sub(v128.load(at(gaps, i)), shift));
    const term = f64x2.mul(v128.load(at(weights, i)), inverse);
    a = f64x2.add(a, term);
    b = f64x2.add(b, f64x2.mul(term, inverse));
  }
  partial = lanes(a);
  partialSlope = lanes(b);
  if (i < to) {
    const inverse = 1 / (get(gaps, i) - eta);
    const term = get(weights, i) * inverse;
    partial += term;
    partialSlope += term * inverse;
  }
}

/** to_i ← from_i − x over n doubles. */
function subtract(n: i32, from: usize, x: f64, to: usize): void {
  const shift = f64x2.splat(x);
  let i = 0;
  for (; i + 1 < n; i += 2) v128.store(at(to, i), f64x2.sub(v128.load(at(from, i)), shift));
  if (i < n) put(to, i, get(from, i) - x);
}

function settle(count: i32, gaps: usize, origin: f64, eta: f64): f64 {
  subtract(count, gaps, eta, gaps);
  return origin + eta;
}

/** The root of c x² − a x + b = 0 between the two poles, or beyond both for the last one; without cancellation. */
function nearerRoot(a: f64, b: f64, c: f64, last: bool): f64 {
  const root = sqrt(abs(a * a - 4 * b * c));
  if (last) return a >= 0 ? (c === 0 ? b / a : (a + root) / (2 * c)) : (2 * b) / (a - root);
  return a <= 0 ? (c === 0 ? b / a : (a - root) / (2 * c)) : (2 * b) / (a + root);
}

/**
 * The vector z for which the computed roots are the exact ones: z_i² = Π_j (λ_j − d_i) / Π_{j≠i} (d_j − d_i).
 * Source: Gu and Eisenstat, SIAM J. Matrix Anal. Appl. 16, 172 (1995), after Löwner, Math. Z. 38, 177 (1934).
 *
 * @param gaps - K × K: row j holds d_i − λ_j
 * @param z - on entry only the signs count; on return the recomputed components
 * @param product - scratch, K doubles
 */
export function recomputeWeights(count: i32, poles: usize, gaps: usize, z: usize, product: usize): void {
  for (let i = 0; i < count; i++) put(product, i, 1);
  for (let j = 0; j < count; j++) {
    const row = at(gaps, j * count);
    const pole = get(poles, j);
    multiplyRatios(0, j, row, poles, pole, product);
    put(product, j, get(product, j) * get(row, j));
    multiplyRatios(j + 1, count, row, poles, pole, product);
  }
  for (let i = 0; i < count; i++) put(z, i, copysign(sqrt(abs(get(product, i))), get(z, i)));
}

/** product_i ← product_i · row_i / (poles_i − pole) from index `from` to `to`. */
function multiplyRatios(from: i32, to: i32, row: usize, poles: usize, pole: f64, product: usize): void {
  const shift = f64x2.splat(pole);
  let i = from;
  for (; i + 1 < to; i += 2) {
    const ratio = f64x2.div(v128.load(at(row, i)), f64x2.sub(v128.load(at(poles, i)), shift));
    v128.store(at(product, i), f64x2.mul(v128.load(at(product, i)), ratio));
  }
  if (i < to) put(product, i, get(product, i) * (get(row, i) / (get(poles, i) - pole)));
}

/**
 * Turns a row of differences into the unit eigenvector z_i / (d_i − λ) (Löwner's formula), its components in the order
 * of `column`.
 *
 * @param temporary - scratch, K doubles
 */
export function secularVector(count: i32, z: usize, row: usize, column: usize, temporary: usize): void {
  let sum = f64x2.splat(0);
  let i = 0;
  for (; i + 1 < count; i += 2) {
    const x = f64x2.div(v128.load(at(z, i)), v128.load(at(row, i)));
    v128.store(at(temporary, i), x);
    sum = f64x2.add(sum, f64x2.mul(x, x));
  }
  let square = lanes(sum);
  if (i < count) {
    const x = get(z, i) / get(row, i);
    put(temporary, i, x);
    square += x * x;
  }
  const factor = 1 / sqrt(square);
  for (let k = 0; k < count; k++) put(row, k, factor * get(temporary, i32.load(column + ((k as usize) << 2))));
}
