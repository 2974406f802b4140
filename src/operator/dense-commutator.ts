import type { Dense } from "../numerics/dense.js";
import { multiplyParts } from "../numerics/dense-parts.js";
import { denseForm } from "./dense-form.js";
import { type DenseResult, denseRadii, realProduct } from "./dense-product.js";
import type { Uncertain } from "./radius.js";

/**
 * AB − BA with radii, over dense rows: per element
 *
 *     Σ_k ( |a|(r_b + c|b|) + r_a(|b| + r_b) )  +  the same with a and b exchanged,
 *
 * c = `partsRounding(K, complex, 1)`, K the largest number of terms in a sum of AB or of BA: each of the two products is off
 * by its own constant, which grows with its own K, and the difference is rounded once more. (The rows of the one matrix may
 * be fuller than those of the other; half of both together would not do.) As in `denseProduct`, nothing underflows.
 *
 * For two matrices that are Hermitian to the last bit, BA is (AB)†: one product does, and the same constant holds, since
 * the error of (AB)† at (i, j) is that of AB at (j, i), and Σ_k |a_jk| |b_ki| = Σ_k |b_ik| |a_kj|.
 *
 * @param rounding - c
 * @param terms - K
 */
export function denseCommutator(a: Uncertain, b: Uncertain, rounding: number, terms: number): DenseResult {
  const n = a.csr.rows;
  const left = denseForm(a.csr);
  const right = denseForm(b.csr);
  const forward = multiplyParts(n, left, right);
  const value =
    isHermitian(n, left) && isHermitian(n, right)
      ? minusAdjoint(n, forward)
      : difference(forward, multiplyParts(n, right, left));
  return { value, radius: denseRadii(a, b, rounding, terms, (x, y) => bothWays(n, x, y)) };
}

function difference(p: Dense, q: Dense): Dense {
  const minus = (x: Float64Array, y: Float64Array): Float64Array => {
    for (let k = 0; k < x.length; k++) x[k] = (x[k] as number) - (y[k] as number);
    return x;
  };
  // Products of the same two matrices: either both have imaginary parts or neither.
  return { re: minus(p.re, q.re), im: p.im === undefined || q.im === undefined ? undefined : minus(p.im, q.im) };
}

/** P − P†. */
function minusAdjoint(n: number, { re, im }: Dense): Dense {
  const outRe = new Float64Array(n * n);
  const outIm = im === undefined ? undefined : new Float64Array(n * n);
  for (let r = 0; r < n; r++) {
    for (let c = 0; c < n; c++) {
      const p = r * n + c;
      const mirror = c * n + r;
      outRe[p] = (re[p] as number) - (re[mirror] as number);
      if (im !== undefined && outIm !== undefined) outIm[p] = (im[p] as number) + (im[mirror] as number);
    }
  }
  return { re: outRe, im: outIm };
}

/** XY + YX for real matrices; one product where both are symmetric. */
function bothWays(n: number, x: Float64Array, y: Float64Array): Float64Array {
  const once = realProduct(n, x, y);
  if (!isSymmetric(n, x, 1) || !isSymmetric(n, y, 1)) {
    const other = realProduct(n, y, x);
    for (let p = 0; p < once.length; p++) once[p] = (once[p] as number) + (other[p] as number);
    return once;
  }
  for (let r = 0; r < n; r++) {
    for (let c = 0; c <= r; c++) {
      const sum = (once[r * n + c] as number) + (once[c * n + r] as number);
      once[r * n + c] = sum;
      once[c * n + r] = sum;
    }
  }
  return once;
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
