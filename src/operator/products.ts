import type { Csr } from "../numerics/csr.js";
import { type Dense, multiplyDense } from "../numerics/dense.js";
import { gamma, roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import {
  addModuliProduct,
  commutator,
  diagonalOf,
  fromDense,
  maxRowEntries,
  multiply,
  toDense,
} from "../numerics/sparse.js";
import { DENSE_COMMUTATOR_TO, denseCommutator } from "./dense-commutator.js";
import {
  boundModulus,
  fitsGrid,
  gridOf,
  isAwayFromUnderflow,
  isPowers,
  moduliAbove,
  modulusAbove,
  type Radius,
  radiiOf,
  radiusAt,
  type Uncertain,
  uniformError,
} from "./radius.js";
import { settle } from "./settle.js";

/** Smallest dimension for which the dense kernel is worth its set-up. */
const DENSE_FROM = 24;

/** Whether more than a quarter of all places hold an entry. */
export function isDenselyFilled(csr: Csr): boolean {
  return 4 * csr.col.length > csr.rows * csr.cols;
}

/**
 * AB with radii, per entry
 *
 *     Σ_k ( |a_ik| r_kj + r_ik |b_kj| + r_ik r_kj )  +  c Σ_k |a_ik| |b_kj|  +  underflow,
 *
 * c = γ_K for real and √2 γ_{K+1} for complex factors with at most K terms a sum (Higham, Accuracy and Stability of Numerical
 * Algorithms, §3.1 and §3.6; each part of a complex sum has errors γ Σ|a||b| by Cauchy–Schwarz). Nothing is added for
 * rounding where the arithmetic is exact: dyadic numbers that fit into 53 bits, and factors that only permute and scale by
 * powers of two.
 */
export function uncertainProduct(a: Uncertain, b: Uncertain): Uncertain {
  const complex = a.csr.im !== undefined || b.csr.im !== undefined;
  const terms = hasSingleColumns(b.csr) ? 1 : Math.max(1, maxRowEntries(a.csr));
  const rounding = isExactProduct(a.csr, b.csr, terms) ? 0 : productRounding(terms, complex);
  const underflow = rounding === 0 ? 0 : 2 * terms * UNDERFLOW;
  if (isDenseCase(a.csr, b.csr)) return denseProduct(a, b, rounding, underflow, terms);
  const csr = multiply(a.csr, b.csr);
  return settle("times", csr, productRadius(csr, [[a, b]], rounding, underflow, terms));
}

function productRounding(terms: number, complex: boolean): number {
  return complex ? Math.SQRT2 * (1 + 2 * UNIT_ROUNDOFF) * gamma(terms + 1) : gamma(terms);
}

function isExactProduct(a: Csr, b: Csr, terms: number): boolean {
  if (terms === 1 && isPowers(a)) return isAwayFromUnderflow(b);
  if (terms === 1 && isPowers(b)) return isAwayFromUnderflow(a);
  return isOnGrid(a, b, terms);
}

/** Whether no column holds two entries: every entry of a product with it on the right is then one term. */
function hasSingleColumns(csr: Csr): boolean {
  const seen = new Uint8Array(csr.cols);
  for (let e = 0; e < csr.col.length; e++) {
    const c = csr.col[e] as number;
    if (seen[c] === 1) return false;
    seen[c] = 1;
  }
  return true;
}

/** The radii of Σ ±XY over the given factor pairs at the entries of `csr`. */
function productRadius(
  csr: Csr,
  pairs: readonly (readonly [Uncertain, Uncertain])[],
  rounding: number,
  underflow: number,
  terms: number,
): Radius {
  const uniform = pairs.every(([a, b]) => uniformError(a.radius) !== undefined && uniformError(b.radius) !== undefined);
  const out = new Float64Array(csr.col.length);
  let relative = 0;
  for (const [a, b] of pairs) {
    const ua = uniformError(a.radius) ?? 0;
    const ub = uniformError(b.radius) ?? 0;
    if (uniform) {
      relative = ua + ub + ua * ub + rounding;
      if (relative === 0) continue;
      // One term without rounding, one factor exact: the result has the half unit of its own entries.
      if (relative === UNIT_ROUNDOFF && terms === 1 && pairs.length === 1) return "default";
      const right = moduliAbove(b.csr);
      for (let f = 0; f < right.length; f++) right[f] = relative * (right[f] as number);
      addModuliProduct(csr, a.csr, moduliAbove(a.csr), b.csr, right, out);
    } else {
      const { left, first, second, third } = radiusFactors(a, b, rounding);
      addModuliProduct(csr, a.csr, left, b.csr, first, out);
      if (second !== undefined) addModuliProduct(csr, a.csr, second, b.csr, third, out);
    }
  }
  if (uniform && relative === 0 && underflow === 0) return "exact";
  for (let g = 0; g < out.length; g++) out[g] = roundUp((out[g] as number) + underflow, 2 * terms + 8);
  return out;
}

/** |a| (r_b + c|b|) and r_a (|b| + r_b): the four factors. */
function radiusFactors(
  a: Uncertain,
  b: Uncertain,
  rounding: number,
): { left: Float64Array; first: Float64Array; second: Float64Array | undefined; third: Float64Array } {
  const first = radiiOf(b).slice();
  const third = moduliAbove(b.csr);
  for (let f = 0; f < first.length; f++) {
    const modulus = third[f] as number;
    const radius = first[f] as number;
    first[f] = radius + rounding * modulus;
    third[f] = modulus + radius;
  }
  return { left: moduliAbove(a.csr), first, second: a.radius === "exact" ? undefined : radiiOf(a), third };
}

function isDenseCase(a: Csr, b: Csr): boolean {
  const n = a.rows;
  if (n < DENSE_FROM || a.cols !== n || b.cols !== n) return false;
  return isDenselyFilled(a) && isDenselyFilled(b) && isAwayFromUnderflow(a) && isAwayFromUnderflow(b);
}

function denseProduct(a: Uncertain, b: Uncertain, rounding: number, underflow: number, terms: number): Uncertain {
  const n = a.csr.rows;
  const value = multiplyDense(n, toDense(a.csr), toDense(b.csr));
  if (rounding === 0 && a.radius === "exact" && b.radius === "exact") {
    return settle("times", fromDense(n, n, value.re, value.im), "exact");
  }
  const { left, first, second, third } = radiusFactors(a, b, rounding);
  const bounds = multiplyDense(n, spread(a.csr, left), spread(b.csr, first)).re;
  const more = second === undefined ? undefined : multiplyDense(n, spread(a.csr, second), spread(b.csr, third)).re;
  for (let k = 0; k < bounds.length; k++) {
    const sum = (bounds[k] as number) + (more === undefined ? 0 : (more[k] as number));
    bounds[k] = sum === 0 ? 0 : roundUp(sum + underflow, 2 * terms + 8);
  }
  return settle("times", ...keepNonzero(n, value, bounds));
}

/** Numbers attached to the entries, spread over a dense matrix. */
function spread(csr: Csr, values: Float64Array): Dense {
  return toDense({ ...csr, re: values, im: undefined });
}

/** Sparse rows of all places where the value or its radius is not zero. */
function keepNonzero(n: number, value: Dense, bounds: Float64Array): [Csr, Float64Array] {
  const pattern = fromDense(
    n,
    n,
    bounds.map((radius, k) => (radius !== 0 || value.re[k] !== 0 || (value.im?.[k] ?? 0) !== 0 ? 1 : 0)),
  );
  const count = pattern.col.length;
  const re = new Float64Array(count);
  const im = value.im === undefined ? undefined : new Float64Array(count);
  const radius = new Float64Array(count);
  for (let row = 0; row < n; row++) {
    const end = pattern.ptr[row + 1] as number;
    for (let e = pattern.ptr[row] as number; e < end; e++) {
      const k = row * n + (pattern.col[e] as number);
      re[e] = value.re[k] as number;
      radius[e] = bounds[k] as number;
      if (im !== undefined && value.im !== undefined) im[e] = value.im[k] as number;
    }
  }
  return [{ ...pattern, re, im }, radius];
}

/**
 * AB − BA with radii as in {@link uncertainProduct}, the terms of both products counted together. With a diagonal factor it is
 * (a_i − a_j) b_ij with radius (r_i + r_j)(|b| + r_b) + |a_i − a_j| r_b and the rounding of a difference and a product.
 */
export function uncertainCommutator(a: Uncertain, b: Uncertain): Uncertain {
  if (diagonalOf(a.csr) !== undefined) {
    const csr = commutator(a.csr, b.csr);
    return settle("commutator", csr, diagonalRadius(csr, a, b));
  }
  if (diagonalOf(b.csr) !== undefined) {
    const csr = commutator(a.csr, b.csr);
    return settle("commutator", csr, diagonalRadius(csr, b, a));
  }
  const complex = a.csr.im !== undefined || b.csr.im !== undefined;
  const terms = maxRowEntries(a.csr) + maxRowEntries(b.csr);
  const rounding = isOnGrid(a.csr, b.csr, terms) ? 0 : productRounding(terms, complex);
  const underflow = rounding === 0 ? 0 : 2 * terms * UNDERFLOW;
  const n = a.csr.rows;
  if (n <= DENSE_COMMUTATOR_TO && isDenselyFilled(a.csr) && isDenselyFilled(b.csr)) {
    const { value, radius } = denseCommutator(a, b, rounding, underflow, terms);
    return settle("commutator", ...keepNonzero(n, value, radius));
  }
  const csr = commutator(a.csr, b.csr);
  const pairs = [
    [a, b],
    [b, a],
  ] as const;
  return settle("commutator", csr, productRadius(csr, pairs, rounding, underflow, terms));
}

/** Whether every partial sum of up to `terms` products is a double-precision number. */
function isOnGrid(a: Csr, b: Csr, terms: number): boolean {
  const left = gridOf(a);
  const right = left === undefined ? undefined : gridOf(b);
  return (
    left !== undefined && right !== undefined && fitsGrid(left.bits + right.bits, 2 * terms * left.max * right.max)
  );
}

function diagonalRadius(csr: Csr, d: Uncertain, b: Uncertain): Radius {
  const exact = isOnGrid(d.csr, b.csr, 2);
  if (exact && d.radius === "exact" && b.radius === "exact") return "exact";
  const complex = csr.im !== undefined || d.csr.im !== undefined || b.csr.im !== undefined;
  const rounding = exact ? 0 : complex ? Math.SQRT2 * (1 + 2 * UNIT_ROUNDOFF) * gamma(4) : gamma(2);
  const n = csr.rows;
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  const own = new Float64Array(n);
  for (let r = 0; r < n; r++) {
    const e = d.csr.ptr[r] as number;
    if (e === d.csr.ptr[r + 1]) continue;
    re[r] = d.csr.re[e] as number;
    im[r] = d.csr.im === undefined ? 0 : (d.csr.im[e] as number);
    own[r] = radiusAt(d, e);
  }
  const out = new Float64Array(csr.col.length);
  for (let row = 0, g = 0; row < n; row++) {
    const end = b.csr.ptr[row + 1] as number;
    for (let f = b.csr.ptr[row] as number; f < end; f++) {
      const c = b.csr.col[f] as number;
      if (c === row) continue;
      const gap = boundModulus((re[row] as number) - (re[c] as number), (im[row] as number) - (im[c] as number));
      const modulus = modulusAbove(b.csr, f);
      const radius = radiusAt(b, f);
      const spreadOf = (own[row] as number) + (own[c] as number);
      const sum = spreadOf * (modulus + radius) + gap * (radius + rounding * modulus);
      const tiny = gap === 0 || exact ? 0 : 2 * UNDERFLOW;
      out[g++] = roundUp(sum + tiny, 16);
    }
  }
  return out;
}
