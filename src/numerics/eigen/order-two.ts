import { NEGLIGIBLE_SQUARE } from "./tridiagonal.js";

/** Where the two eigenvalues and eigenvectors go; the arrays of a result of order two. */
interface Pair {
  readonly values: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/**
 * The eigenproblem of order two by one stable Jacobi rotation, in closed form.
 *
 * With b = |b| p the entry below the diagonal, diag(1, p) makes the matrix real; the rotation is the one of the smaller
 * angle. Source: Jacobi, J. reine angew. Math. 30, 51 (1846); stable formulas: Rutishauser, Numer. Math. 9, 1 (1966).
 *
 * @param re - 2 × 2, row-major; only the lower triangle is read
 * @param im - imaginary parts, or absent
 * @param factor - multiplies the matrix beforehand, so that its entries are about one
 * @param to - receives eigenvalues (of the multiplied matrix, ascending) and eigenvectors as rows
 */
export function eigen2(re: Float64Array, im: Float64Array | undefined, factor: number, to: Pair): void {
  const a = factor * (re[0] as number);
  const d = factor * (re[3] as number);
  const x = factor * (re[2] as number);
  const y = im === undefined ? 0 : factor * (im[2] as number);
  const modulus = im === undefined ? Math.abs(x) : Math.hypot(x, y);
  const b = modulus * modulus > NEGLIGIBLE_SQUARE ? modulus : 0;
  const phaseRe = b === 0 ? 1 : x / b;
  const phaseIm = b === 0 ? 0 : y / b;
  let t = 0;
  if (b > 0) {
    const ratio = (d - a) / (2 * b);
    t = ratio >= 0 ? 1 / (ratio + Math.sqrt(ratio * ratio + 1)) : -1 / (Math.sqrt(ratio * ratio + 1) - ratio);
  }
  const c = 1 / Math.sqrt(t * t + 1);
  const s = t * c;
  const lower = a - t * b;
  const upper = d + t * b;
  // Row of `lower`: (c, −s p); row of `upper`: (s, c p).
  const first = lower <= upper ? 0 : 2;
  const second = 2 - first;
  to.values[first >> 1] = lower;
  to.values[second >> 1] = upper;
  to.re[first] = c;
  to.re[first + 1] = -s * phaseRe;
  to.re[second] = s;
  to.re[second + 1] = c * phaseRe;
  if (to.im !== undefined) {
    to.im[first + 1] = -s * phaseIm;
    to.im[second + 1] = c * phaseIm;
  }
}
