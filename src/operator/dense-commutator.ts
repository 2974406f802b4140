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
 * AB − BA with radii, in one pass over dense rows: per element
 *
 *     Σ_k ( |a|(r_b + c|b|) + r_a(|b| + r_b) )  +  the same with a and b exchanged  +  underflow,
 *
 * c the relative error of a sum of `terms` products (see the sparse form in products.ts).
 */
export function denseCommutator(
  a: Uncertain,
  b: Uncertain,
  rounding: number,
  underflow: number,
  terms: number,
): DenseCommutator {
  const n = a.csr.rows;
  const complex = a.csr.im !== undefined || b.csr.im !== undefined;
  const [left, right] = [denseOf(a.csr, a.csr.re), denseOf(b.csr, b.csr.re)];
  const [leftIm, rightIm] = [imaginaryOf(a.csr), imaginaryOf(b.csr)];
  const re = new Float64Array(n * n);
  const im = complex ? new Float64Array(n * n) : undefined;
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < n; k++) {
      const x = left[i * n + k] as number;
      const u = right[i * n + k] as number;
      const y = leftIm === undefined ? 0 : (leftIm[i * n + k] as number);
      const v = rightIm === undefined ? 0 : (rightIm[i * n + k] as number);
      for (let j = 0, p = i * n, q = k * n; j < n; j++, p++, q++) {
        const bRe = right[q] as number;
        const aRe = left[q] as number;
        re[p] = (re[p] as number) + (x * bRe - u * aRe);
        if (im === undefined) continue;
        const bIm = rightIm === undefined ? 0 : (rightIm[q] as number);
        const aIm = leftIm === undefined ? 0 : (leftIm[q] as number);
        re[p] = (re[p] as number) - (y * bIm - v * aIm);
        im[p] = (im[p] as number) + (x * bIm + y * bRe - (u * aIm + v * aRe));
      }
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
  const out = new Float64Array(n * n);
  const modA = denseOf(a.csr, moduliAbove(a.csr));
  const modB = denseOf(b.csr, moduliAbove(b.csr));
  if (ua !== undefined && ub !== undefined) {
    const relative = ua + ub + ua * ub + rounding;
    addProducts(n, modA, modB, out);
    addProducts(n, modB, modA, out);
    for (let p = 0; p < out.length; p++) out[p] = bound(relative * (out[p] as number), underflow, terms);
    return out;
  }
  const radA = denseOf(a.csr, radiiOf(a));
  const radB = denseOf(b.csr, radiiOf(b));
  const scaled = (mod: Float64Array, rad: Float64Array): Float64Array =>
    mod.map((x, p) => (rad[p] as number) + rounding * x);
  const wide = (mod: Float64Array, rad: Float64Array): Float64Array => mod.map((x, p) => x + (rad[p] as number));
  addProducts(n, modA, scaled(modB, radB), out);
  addProducts(n, radA, wide(modB, radB), out);
  addProducts(n, modB, scaled(modA, radA), out);
  addProducts(n, radB, wide(modA, radA), out);
  for (let p = 0; p < out.length; p++) out[p] = bound(out[p] as number, underflow, terms);
  return out;
}

function bound(sum: number, underflow: number, terms: number): number {
  return sum === 0 ? 0 : roundUp(sum + underflow, 4 * terms + 12);
}

/** out += XY for non-negative dense matrices. */
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

function imaginaryOf(csr: Csr): Float64Array | undefined {
  return csr.im === undefined ? undefined : denseOf(csr, csr.im);
}
