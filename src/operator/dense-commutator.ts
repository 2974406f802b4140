import type { Csr } from "../numerics/csr.js";
import type { Dense } from "../numerics/dense.js";
import { roundUp } from "../numerics/rounding.js";
import { moduliAbove, radiiOf, type Uncertain, uniformError } from "./radius.js";

/** Up to this many kets a filled commutator takes plain loops over dense rows: setting up sparse ones would cost more. */
export const DENSE_COMMUTATOR_TO = 48;

/** A commutator and the radii of its elements, row-major. */
export interface DenseCommutator {
  readonly value: Dense;
  readonly radius: Float64Array;
}

/**
 * AB − BA with radii, over dense rows: per element
 *
 *     Σ_k ( |a|(r_b + c|b|) + r_a(|b| + r_b) )  +  the same with a and b exchanged  +  underflow,
 *
 * c the relative error of a sum of `terms` products (see the sparse form in products.ts). For two matrices that are Hermitian to
 * the last bit, BA is (AB)†: one product does.
 */
export function denseCommutator(
  a: Uncertain,
  b: Uncertain,
  rounding: number,
  underflow: number,
  terms: number,
): DenseCommutator {
  const n = a.csr.rows;
  const left = denseForm(a.csr);
  const right = denseForm(b.csr);
  const hermitian = isHermitian(n, left) && isHermitian(n, right);
  const forward = product(n, left, right);
  const backward = hermitian ? undefined : product(n, right, left);
  const re = new Float64Array(n * n);
  const im = forward.im === undefined ? undefined : new Float64Array(n * n);
  for (let r = 0; r < n; r++) {
    for (let c = 0; c < n; c++) {
      const p = r * n + c;
      const mirror = c * n + r;
      re[p] = (forward.re[p] as number) - ((backward === undefined ? forward.re[mirror] : backward.re[p]) as number);
      if (im === undefined || forward.im === undefined) continue;
      const back = backward?.im === undefined ? -(forward.im[mirror] as number) : (backward.im[p] as number);
      im[p] = (forward.im[p] as number) - back;
    }
  }
  return { value: { re, im }, radius: commutatorRadius(a, b, rounding, underflow, terms) };
}

function commutatorRadius(
  a: Uncertain,
  b: Uncertain,
  rounding: number,
  underflow: number,
  terms: number,
): Float64Array {
  const n = a.csr.rows;
  const ua = uniformError(a.radius);
  const ub = uniformError(b.radius);
  const modA = denseOf(a.csr, moduliAbove(a.csr));
  const modB = denseOf(b.csr, moduliAbove(b.csr));
  const out = new Float64Array(n * n);
  if (ua !== undefined && ub !== undefined) {
    const relative = ua + ub + ua * ub + rounding;
    addBothWays(n, modA, modB, out);
    for (let p = 0; p < out.length; p++) out[p] = bound(relative * (out[p] as number), underflow, terms);
    return out;
  }
  const radA = denseOf(a.csr, radiiOf(a));
  const radB = denseOf(b.csr, radiiOf(b));
  // AB takes |a|(r_b + c|b|) + r_a(|b| + r_b), and BA the same four products the other way round
  const first = modB.map((x, p) => (radB[p] as number) + rounding * x);
  const second = modB.map((x, p) => x + (radB[p] as number));
  addBothWays(n, modA, first, out);
  addBothWays(n, radA, second, out);
  for (let p = 0; p < out.length; p++) out[p] = bound(out[p] as number, underflow, terms);
  return out;
}

/** out += XY + YX for non-negative dense matrices; one product where both are symmetric. */
function addBothWays(n: number, x: Float64Array, y: Float64Array, out: Float64Array): void {
  if (!isSymmetric(n, x, 1) || !isSymmetric(n, y, 1)) {
    addProducts(n, x, y, out);
    addProducts(n, y, x, out);
    return;
  }
  const once = new Float64Array(n * n);
  addProducts(n, x, y, once);
  for (let r = 0; r < n; r++) {
    for (let c = 0; c < n; c++) {
      const p = r * n + c;
      out[p] = (out[p] as number) + (once[p] as number) + (once[c * n + r] as number);
    }
  }
}

function product(n: number, a: Dense, b: Dense): Dense {
  const re = new Float64Array(n * n);
  addProducts(n, a.re, b.re, re);
  if (a.im === undefined && b.im === undefined) return { re, im: undefined };
  const im = new Float64Array(n * n);
  if (a.im !== undefined) addProducts(n, a.im, b.re, im);
  if (b.im !== undefined) addProducts(n, a.re, b.im, im);
  if (a.im !== undefined && b.im !== undefined) {
    const negated = a.im.map((y) => -y);
    addProducts(n, negated, b.im, re);
  }
  return { re, im };
}

function isHermitian(n: number, a: Dense): boolean {
  return isSymmetric(n, a.re, 1) && (a.im === undefined || isSymmetric(n, a.im, -1));
}

function isSymmetric(n: number, x: Float64Array, sign: number): boolean {
  for (let r = 0; r < n; r++) {
    for (let c = 0; c <= r; c++) if (x[r * n + c] !== sign * (x[c * n + r] as number)) return false;
  }
  return true;
}

function bound(sum: number, underflow: number, terms: number): number {
  return sum === 0 ? 0 : roundUp(sum + underflow, 4 * terms + 12);
}

/** out += XY. */
function addProducts(n: number, x: Float64Array, y: Float64Array, out: Float64Array): void {
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < n; k++) {
      const s = x[i * n + k] as number;
      if (s === 0) continue;
      for (let j = 0, p = i * n, q = k * n; j < n; j++, p++, q++) out[p] = (out[p] as number) + s * (y[q] as number);
    }
  }
}

function denseOf(csr: Csr, values: Float64Array): Float64Array {
  const n = csr.rows;
  const out = new Float64Array(n * n);
  for (let r = 0; r < n; r++) {
    for (let e = csr.ptr[r] as number; e < (csr.ptr[r + 1] as number); e++) {
      out[r * n + (csr.col[e] as number)] = values[e] as number;
    }
  }
  return out;
}

function denseForm(csr: Csr): Dense {
  return { re: denseOf(csr, csr.re), im: csr.im === undefined ? undefined : denseOf(csr, csr.im) };
}
