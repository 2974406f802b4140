// Complex Hermitian to real tridiagonal form: the complex companion of reduceReal, real and imaginary parts apart.

import { at, clear, copy, dot, get, lanes, put, room, scale } from "./memory.ts";
import { combine, NEGLIGIBLE_SQUARE } from "./reduce-real.ts";

/** Bytes of scratch that {@link reduceComplex} asks for. */
export function reduceComplexScratch(n: i32): usize {
  return 6 * room(n);
}

// Vectors of the step at hand, set by reduceComplex: u, w and y of the pending update and of the product.
let ur: usize = 0;
let ui: usize = 0;
let wr: usize = 0;
let wi: usize = 0;
let yr: usize = 0;
let yi: usize = 0;

/**
 * A = Q D T D† Q† with Q = H_{n−1} ⋯ H_1, H_i = I − τ_i y_i y_i† with real τ_i, T real, and D a diagonal of unit
 * phases. The reflector keeps the phase of the pivot, which makes τ real.
 * Source: Householder, J. ACM 5, 339 (1958); complex matrices: Mueller, Numer. Math. 8, 72 (1966).
 *
 * @param re - n × n, entries about one or less; the lower triangle is read; on return row i holds the real parts of
 * y_i in its columns 0 … i − 1
 * @param im - the same for the imaginary parts; those of the diagonal are taken as zero
 * @param diagonal - receives the diagonal of T
 * @param off - receives its n − 1 off-diagonal entries, not negative
 * @param tau - receives τ_i, zero for no reflector
 * @param phaseRe - receives the real parts of D
 * @param phaseIm - receives the imaginary parts of D
 */
export function reduceComplex(
  n: i32,
  re: usize,
  im: usize,
  diagonal: usize,
  off: usize,
  tau: usize,
  phaseRe: usize,
  phaseIm: usize,
  scratch: usize,
): void {
  ur = scratch;
  ui = ur + room(n);
  wr = ui + room(n);
  wi = wr + room(n);
  yr = wi + room(n);
  yi = yr + room(n);
  memory.fill(scratch, 0, 4 * room(n));
  let pending = false;
  for (let i = n - 1; i > 0; i--) {
    const rowRe = at(re, i * n);
    const rowIm = at(im, i * n);
    if (pending) updateRow(i, rowRe, rowIm);
    put(diagonal, i, get(rowRe, i));
    const tail = dot(i - 1, rowRe, rowRe) + dot(i - 1, rowIm, rowIm);
    const pivotRe = get(rowRe, i - 1);
    const pivotIm = -get(rowIm, i - 1);
    if (tail <= NEGLIGIBLE_SQUARE) {
      put(phaseRe, i, pivotRe);
      put(phaseIm, i, pivotIm);
      put(tau, i, 0);
      clear(rowRe, i);
      clear(rowIm, i);
      if (pending) {
        updateAndMultiply(i, n, re, im, rowRe, rowIm);
        memory.fill(scratch, 0, 4 * room(n));
        pending = false;
      }
      continue;
    }
    const square = pivotRe * pivotRe + pivotIm * pivotIm;
    const modulus = sqrt(square);
    const norm = sqrt(square + tail);
    // Below this the square has lost digits, and any unit phase does: the pivot is nothing beside the norm.
    const clearPhase = square > NEGLIGIBLE_SQUARE;
    const c = clearPhase ? pivotRe / modulus : 1;
    const s = clearPhase ? pivotIm / modulus : 0;
    const t = (modulus + norm) / norm;
    scale(i - 1, rowRe, 1 / (modulus + norm));
    scale(i - 1, rowIm, -1 / (modulus + norm));
    put(rowRe, i - 1, c);
    put(rowIm, i - 1, s);
    put(phaseRe, i, -c * norm);
    put(phaseIm, i, -s * norm);
    put(tau, i, t);
    clear(yr, i);
    clear(yi, i);
    updateAndMultiply(i, n, re, im, rowRe, rowIm);
    const shift = -0.5 * t * t * (dot(i, yr, rowRe) + dot(i, yi, rowIm));
    combine(i, t, shift, yr, rowRe, wr);
    combine(i, t, shift, yi, rowIm, wi);
    copy(ur, rowRe, i);
    copy(ui, rowIm, i);
    pending = true;
  }
  put(diagonal, 0, get(re, 0));
  gatherPhases(n, off, phaseRe, phaseIm);
}

/** Turns the complex entries (i − 1, i) of the tridiagonal matrix into moduli and the running product of phases. */
function gatherPhases(n: i32, off: usize, phaseRe: usize, phaseIm: usize): void {
  put(phaseRe, 0, 1);
  put(phaseIm, 0, 0);
  for (let i = 1; i < n; i++) {
    const a = get(phaseRe, i);
    const b = get(phaseIm, i);
    const square = a * a + b * b;
    const modulus = square > NEGLIGIBLE_SQUARE ? sqrt(square) : 0;
    const c = modulus > 0 ? a / modulus : 1;
    const s = modulus > 0 ? -b / modulus : 0;
    const p = get(phaseRe, i - 1);
    const q = get(phaseIm, i - 1);
    const x = p * c - q * s;
    const y = p * s + q * c;
    const unit = 1 / sqrt(x * x + y * y);
    put(off, i - 1, modulus);
    put(phaseRe, i, x * unit);
    put(phaseIm, i, y * unit);
  }
}

/** Applies the pending update A ← A − u w† − w u† to row i, diagonal included. */
function updateRow(i: i32, rowRe: usize, rowIm: usize): void {
  const a = get(ur, i);
  const b = get(ui, i);
  const c = get(wr, i);
  const d = get(wi, i);
  const A = f64x2.splat(a);
  const B = f64x2.splat(b);
  const C = f64x2.splat(c);
  const D = f64x2.splat(d);
  const end = (((i + 1) as usize) << 3) & ~15;
  for (let o: usize = 0; o < end; o += 16) {
    const p = v128.load(wr + o);
    const q = v128.load(wi + o);
    const s = v128.load(ur + o);
    const t = v128.load(ui + o);
    const x = f64x2.add(f64x2.add(f64x2.mul(A, p), f64x2.mul(B, q)), f64x2.add(f64x2.mul(C, s), f64x2.mul(D, t)));
    const y = f64x2.add(f64x2.sub(f64x2.mul(B, p), f64x2.mul(A, q)), f64x2.sub(f64x2.mul(D, s), f64x2.mul(C, t)));
    v128.store(rowRe + o, f64x2.sub(v128.load(rowRe + o), x));
    v128.store(rowIm + o, f64x2.sub(v128.load(rowIm + o), y));
  }
  if (i & 1) return;
  const p = get(wr, i);
  const q = get(wi, i);
  const s = get(ur, i);
  const t = get(ui, i);
  put(rowRe, i, get(rowRe, i) - (a * p + b * q + (c * s + d * t)));
  put(rowIm, i, get(rowIm, i) - (b * p - a * q + (d * s - c * t)));
}

/** One pass over the leading m × m triangle: A ← A − u w† − w u†, y ← y + A x with the new A. */
function updateAndMultiply(m: i32, n: i32, re: usize, im: usize, xr: usize, xi: usize): void {
  for (let r = 0; r < m; r++) {
    const pr = at(re, r * n);
    const pi = at(im, r * n);
    const ua = get(ur, r);
    const ub = get(ui, r);
    const wa = get(wr, r);
    const wb = get(wi, r);
    const xa = get(xr, r);
    const xb = get(xi, r);
    const UA = f64x2.splat(ua);
    const UB = f64x2.splat(ub);
    const WA = f64x2.splat(wa);
    const WB = f64x2.splat(wb);
    const XA = f64x2.splat(xa);
    const XB = f64x2.splat(xb);
    let SA = f64x2.splat(0);
    let SB = SA;
    const end = ((r as usize) << 3) & ~15;
    for (let c: usize = 0; c < end; c += 16) {
      const p = v128.load(wr + c);
      const q = v128.load(wi + c);
      const s = v128.load(ur + c);
      const t = v128.load(ui + c);
      const a = f64x2.sub(
        v128.load(pr + c),
        f64x2.add(f64x2.add(f64x2.mul(UA, p), f64x2.mul(UB, q)), f64x2.add(f64x2.mul(WA, s), f64x2.mul(WB, t))),
      );
      const b = f64x2.add(
        v128.load(pi + c),
        f64x2.add(f64x2.sub(f64x2.mul(UA, q), f64x2.mul(UB, p)), f64x2.sub(f64x2.mul(WA, t), f64x2.mul(WB, s))),
      );
      v128.store(pr + c, a);
      v128.store(pi + c, b);
      const f = v128.load(xr + c);
      const g = v128.load(xi + c);
      SA = f64x2.add(SA, f64x2.sub(f64x2.mul(a, f), f64x2.mul(b, g)));
      SB = f64x2.add(SB, f64x2.add(f64x2.mul(a, g), f64x2.mul(b, f)));
      v128.store(yr + c, f64x2.add(v128.load(yr + c), f64x2.add(f64x2.mul(a, XA), f64x2.mul(b, XB))));
      v128.store(yi + c, f64x2.add(v128.load(yi + c), f64x2.sub(f64x2.mul(a, XB), f64x2.mul(b, XA))));
    }
    let sa = lanes(SA);
    let sb = lanes(SB);
    if (r & 1) {
      const c = r - 1;
      const p = get(wr, c);
      const q = get(wi, c);
      const s = get(ur, c);
      const t = get(ui, c);
      const a = get(pr, c) - (ua * p + ub * q + (wa * s + wb * t));
      const b = get(pi, c) + (ua * q - ub * p + (wa * t - wb * s));
      put(pr, c, a);
      put(pi, c, b);
      const f = get(xr, c);
      const g = get(xi, c);
      sa += a * f - b * g;
      sb += a * g + b * f;
      put(yr, c, get(yr, c) + (a * xa + b * xb));
      put(yi, c, get(yi, c) + (a * xb - b * xa));
    }
    const diagonal = get(pr, r) - 2 * (ua * wa + ub * wb);
    put(pr, r, diagonal);
    put(yr, r, get(yr, r) + sa + diagonal * xa);
    put(yi, r, get(yi, r) + sb + diagonal * xb);
  }
}
