import type { ExactOperator } from "../exact/operator.js";
import { recognise } from "../exact/recognise.js";
import type { Surd } from "../exact/surd.js";
import { hermitianEigen } from "../numerics/eigen.js";

/**
 * Fractions and square roots that the floating eigenvalues of a matrix may stand for: guesses, each once.
 *
 * @param matrix - M = N⁻¹ H with H Hermitian
 * @param norms - the diagonal of N
 */
export function guessEigenvalues(matrix: ExactOperator, norms: readonly Surd[]): Surd[] {
  const { n } = matrix;
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  const lengths = norms.map((norm) => Math.sqrt(norm.toNumber()));
  for (const { row, col, value } of matrix.elements()) {
    const scale = (lengths[row] as number) / (lengths[col] as number);
    const { re: x, im: y } = value.toComplex();
    re[row * n + col] = x * scale;
    im[row * n + col] = row === col ? 0 : y * scale;
  }
  if (![...re, ...im].every(Number.isFinite)) return [];
  const complex = im.some((y) => y !== 0);
  const { values } = hermitianEigen(n, re, complex ? im : undefined, { upper: "ignore" });
  const scale = values.reduce((most, x) => Math.max(most, Math.abs(x)), 0);
  const found: Surd[] = [];
  for (const value of values) {
    const guess = recognise(value, { scale })?.value;
    if (guess !== undefined && !found.some((other) => other.equals(guess))) found.push(guess);
  }
  return found;
}
