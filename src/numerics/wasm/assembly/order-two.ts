// The eigenproblem of order two in closed form.

import { get, put } from "./memory.ts";
import { NEGLIGIBLE_SQUARE } from "./reduce-real.ts";

/**
 * One stable Jacobi rotation of the smaller angle: with b = |b| p the entry below the diagonal, diag(1, p) makes the
 * matrix real. Source: Jacobi, J. reine angew. Math. 30, 51 (1846); stable formulas: Rutishauser, Numer. Math. 9, 1
 * (1966).
 *
 * @param re - 2 × 2; the lower triangle is read
 * @param im - imaginary parts, or 0
 * @param factor - multiplies the matrix beforehand, so that its entries are about one
 * @param values - receives the two eigenvalues, ascending
 * @param vectorsRe - receives the eigenvectors as rows, real parts
 * @param vectorsIm - the imaginary parts, or 0
 */
export function eigenOfOrderTwo(
  re: usize,
  im: usize,
  factor: f64,
  values: usize,
  vectorsRe: usize,
  vectorsIm: usize,
): void {
  const a = factor * get(re, 0);
  const d = factor * get(re, 3);
  const x = factor * get(re, 2);
  const y = im === 0 ? 0 : factor * get(im, 2);
  const square = x * x + y * y;
  const b = square > NEGLIGIBLE_SQUARE ? sqrt(square) : 0;
  const phaseRe = b === 0 ? 1 : x / b;
  const phaseIm = b === 0 ? 0 : y / b;
  let t: f64 = 0;
  if (b > 0) {
    const ratio = (d - a) / (2 * b);
    const root = sqrt(ratio * ratio + 1);
    t = ratio >= 0 ? 1 / (ratio + root) : -1 / (root - ratio);
  }
  const c = 1 / sqrt(t * t + 1);
  const s = t * c;
  const lower = a - t * b;
  const upper = d + t * b;
  // Row of `lower`: (c, −s p); row of `upper`: (s, c p).
  const first = lower <= upper ? 0 : 2;
  const second = 2 - first;
  put(values, first >> 1, lower);
  put(values, second >> 1, upper);
  put(vectorsRe, first, c);
  put(vectorsRe, first + 1, -s * phaseRe);
  put(vectorsRe, second, s);
  put(vectorsRe, second + 1, c * phaseRe);
  if (vectorsIm === 0) return;
  put(vectorsIm, first, 0);
  put(vectorsIm, first + 1, -s * phaseIm);
  put(vectorsIm, second, 0);
  put(vectorsIm, second + 1, c * phaseIm);
}
