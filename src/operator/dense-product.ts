import type { Dense } from "../numerics/dense.js";
import { multiplyParts } from "../numerics/dense-parts.js";
import { roundUp } from "../numerics/rounding.js";
import { denseForm, denseOf } from "./dense-form.js";
import { moduliAbove, raisedRadii, type Uncertain, uniformError } from "./radius.js";

/** A product or commutator and the radii of its elements, row-major. */
export interface DenseResult {
  readonly value: Dense;
  readonly radius: Float64Array;
}

/**
 * AB with radii, over dense rows: per element Σ_k ( |a|(r_b + c|b|) + r_a(|b| + r_b) ). Nothing underflows: entries are 2^−450
 * at least and radii are raised to 2^−520, see `isDenseCase`, so that a place without terms is the only one to get zero.
 *
 * @param rounding - c, the relative error of a sum of `terms` products
 * @param terms - the largest number of products in a sum
 */
export function denseProduct(a: Uncertain, b: Uncertain, rounding: number, terms: number): DenseResult {
  const n = a.csr.rows;
  const value = multiplyParts(n, denseForm(a.csr), denseForm(b.csr));
  const times = (x: Float64Array, y: Float64Array): Float64Array => realProduct(n, x, y);
  return { value, radius: denseRadii(a, b, rounding, terms, times) };
}

/** XY for real matrices. */
export function realProduct(n: number, x: Float64Array, y: Float64Array): Float64Array {
  return multiplyParts(n, { re: x, im: undefined }, { re: y, im: undefined }).re;
}

/**
 * The radii of a product, or of a commutator, whose moduli `times` combines.
 *
 * @param times - XY, or XY + YX, for matrices of non-negative numbers
 */
export function denseRadii(
  a: Uncertain,
  b: Uncertain,
  rounding: number,
  terms: number,
  times: (x: Float64Array, y: Float64Array) => Float64Array,
): Float64Array {
  const ua = uniformError(a.radius);
  const ub = uniformError(b.radius);
  const modA = denseOf(a.csr, moduliAbove(a.csr));
  const modB = denseOf(b.csr, moduliAbove(b.csr));
  if (ua !== undefined && ub !== undefined) {
    const relative = ua + ub + ua * ub + rounding;
    if (relative === 0) return new Float64Array(modA.length);
    const out = times(modA, modB);
    for (let p = 0; p < out.length; p++) out[p] = roundUp(relative * (out[p] as number), 2 * terms + 12);
    return out;
  }
  const radB = denseOf(b.csr, raisedRadii(b));
  const out = times(
    modA,
    radB.map((r, p) => r + rounding * (modB[p] as number)),
  );
  const own =
    ua === 0
      ? undefined
      : times(
          denseOf(a.csr, raisedRadii(a)),
          radB.map((r, p) => r + (modB[p] as number)),
        );
  for (let p = 0; p < out.length; p++) {
    out[p] = roundUp((out[p] as number) + (own === undefined ? 0 : (own[p] as number)), 2 * terms + 12);
  }
  return out;
}
