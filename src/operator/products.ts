import type { Csr } from "../numerics/csr.js";
import { partsRounding } from "../numerics/dense-parts.js";
import { gamma, roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { addModuliProduct, commutator, diagonalOf, maxRowEntries, multiply } from "../numerics/sparse.js";
import { denseCommutator } from "./dense-commutator.js";
import { keepNonzero } from "./dense-form.js";
import { denseProduct } from "./dense-product.js";
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
  raisedRadii,
  type Uncertain,
  uniformError,
} from "./radius.js";
import { settle } from "./settle.js";

/** Smallest dimension for which dense rows are worth their set-up. */
const DENSE_FROM = 8;
/** The same for commutators, whose sparse rows cost more. */
const DENSE_COMMUTATOR_FROM = 2;

/** Whether more than a quarter of all places hold an entry. */
export function isDenselyFilled(csr: Csr): boolean {
  return 4 * csr.col.length > csr.rows * csr.cols;
}

/**
 * AB with radii, per entry
 *
 *     Σ_k ( |a_ik| r_kj + r_ik |b_kj| + r_ik r_kj )  +  c Σ_k |a_ik| |b_kj|  +  underflow,
 *
 * c the constant of `partsRounding` for at most K terms a sum. Nothing is added for rounding where the arithmetic is exact:
 * dyadic numbers that fit into 53 bits, and factors that only permute and scale by powers of two.
 */
export function uncertainProduct(a: Uncertain, b: Uncertain): Uncertain {
  const complex = a.csr.im !== undefined || b.csr.im !== undefined;
  const terms = hasSingleColumns(b.csr) ? 1 : Math.max(1, maxRowEntries(a.csr));
  const rounding = isExactProduct(a.csr, b.csr, terms) ? 0 : partsRounding(terms, complex);
  if (isDenseCase(a.csr, b.csr, DENSE_FROM)) {
    const { value, radius } = denseProduct(a, b, rounding, terms);
    return settle("times", ...keepNonzero(a.csr.rows, value, radius));
  }
  const csr = multiply(a.csr, b.csr);
  return settle("times", csr, productRadius(csr, [[a, b]], rounding, terms));
}

function isExactProduct(a: Csr, b: Csr, terms: number): boolean {
  if (terms === 1 && isPowers(a)) return isAwayFromUnderflow(b);
  if (terms === 1 && isPowers(b)) return isAwayFromUnderflow(a);
  return isOnGrid(a, b, terms);
}

/** Whether two square matrices of one order, at least `from`, are filled enough for dense rows, and no product of theirs underflows. */
function isDenseCase(a: Csr, b: Csr, from: number): boolean {
  const n = a.rows;
  if (n < from || a.cols !== n || b.rows !== n || b.cols !== n) return false;
  return isDenselyFilled(a) && isDenselyFilled(b) && isAwayFromUnderflow(a) && isAwayFromUnderflow(b);
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

/**
 * The radii of Σ ±XY over the given factor pairs at the entries of `csr`.
 *
 * Underflow. Where every part is zero or 2^−450 at least there is none, radii being raised to 2^−520. Otherwise, η the
 * smallest positive number: each of at most 2K products in a part of the value is off by η/2, which its sums hardly change
 * (1.42 K η for both parts); so is each of the two products that a term contributes to the radius (K η): 3 K η in all, K the
 * terms of an entry. And c |b| is raised by η before it meets |a|, which may be large.
 */
function productRadius(
  csr: Csr,
  pairs: readonly (readonly [Uncertain, Uncertain])[],
  rounding: number,
  terms: number,
): Radius {
  const safe = pairs.every(([a, b]) => isAwayFromUnderflow(a.csr) && isAwayFromUnderflow(b.csr));
  const uniform = pairs.every(([a, b]) => uniformError(a.radius) !== undefined && uniformError(b.radius) !== undefined);
  const out = new Float64Array(csr.col.length);
  let relative = 0;
  for (const [a, b] of pairs) {
    const ua = uniformError(a.radius) ?? 0;
    const ub = uniformError(b.radius) ?? 0;
    if (uniform && (safe || ua + ub === 0)) {
      relative = ua + ub + ua * ub + rounding;
      if (relative === 0) return "exact";
      // One term without rounding, one factor exact: the result has the half unit of its own entries.
      if (relative === UNIT_ROUNDOFF && terms === 1 && pairs.length === 1) return "default";
      const right = moduliAbove(b.csr);
      for (let f = 0; f < right.length; f++) {
        const modulus = right[f] as number;
        right[f] = modulus === 0 ? 0 : relative * modulus + UNDERFLOW;
      }
      addModuliProduct(csr, a.csr, moduliAbove(a.csr), b.csr, right, out);
    } else {
      const { left, first, second, third } = radiusFactors(a, b, rounding, safe);
      addModuliProduct(csr, a.csr, left, b.csr, first, out);
      if (second !== undefined) addModuliProduct(csr, a.csr, second, b.csr, third, out);
    }
  }
  const underflow = safe ? 0 : 3 * terms * UNDERFLOW;
  for (let g = 0; g < out.length; g++) out[g] = roundUp((out[g] as number) + underflow, 2 * terms + 12);
  return out;
}

/** |a| (r_b + c|b|) and r_a (|b| + r_b): the four factors. */
function radiusFactors(
  a: Uncertain,
  b: Uncertain,
  rounding: number,
  safe: boolean,
): { left: Float64Array; first: Float64Array; second: Float64Array | undefined; third: Float64Array } {
  const radii = safe ? raisedRadii : radiiOf;
  const first = radii(b).slice();
  const third = moduliAbove(b.csr);
  for (let f = 0; f < first.length; f++) {
    const modulus = third[f] as number;
    const radius = first[f] as number;
    first[f] = radius + (rounding === 0 || modulus === 0 ? 0 : rounding * modulus + UNDERFLOW);
    third[f] = modulus + radius;
  }
  return { left: moduliAbove(a.csr), first, second: a.radius === "exact" ? undefined : radii(a), third };
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
  const [left, right] = [maxRowEntries(a.csr), maxRowEntries(b.csr)];
  const terms = left + right;
  const exact = isOnGrid(a.csr, b.csr, terms);
  if (isDenseCase(a.csr, b.csr, DENSE_COMMUTATOR_FROM)) {
    const longest = Math.max(left, right);
    const rounding = exact ? 0 : partsRounding(longest, complex, 1);
    const { value, radius } = denseCommutator(a, b, rounding, longest);
    return settle("commutator", ...keepNonzero(a.csr.rows, value, radius));
  }
  const rounding = exact ? 0 : partsRounding(terms, complex);
  const csr = commutator(a.csr, b.csr);
  const pairs = [
    [a, b],
    [b, a],
  ] as const;
  return settle("commutator", csr, productRadius(csr, pairs, rounding, terms));
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
      const factor = exact || modulus === 0 ? radius : radius + rounding * modulus + UNDERFLOW;
      const sum = spreadOf * (modulus + radius) + gap * factor;
      // Up to four products in the value and two in the radius, each off by half the smallest positive number.
      const certain = (spreadOf === 0 || modulus + radius === 0) && (gap === 0 || factor === 0);
      out[g++] = certain ? 0 : roundUp(sum + 4 * UNDERFLOW, 16);
    }
  }
  return out;
}
