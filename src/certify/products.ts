import type { Csr } from "../numerics/csr.js";
import { gamma, roundUp, UNDERFLOW } from "../numerics/rounding.js";
import { maxRowEntries } from "../numerics/sparse.js";
import type { Operator } from "../operator/operator.js";
import { imageError } from "./residuals.js";

/**
 * Bound on ‖Q Q† − 1‖_F from its computed elements. Each is a sum of at most m products, in error by at most
 * √2 γ_{m+2} ‖q_μ‖ ‖q_ν‖; two vectors with no common ket are exactly orthogonal.
 */
export function gramDefect(vectors: Csr): number {
  const error = gramElementError(vectors);
  let sum = 0;
  forEachProduct(vectors, vectors, (r, c, re, im, common) => {
    if (common === 0) return;
    const x = re - (r === c ? 1 : 0);
    if (x === 0 && im === 0 && single(vectors, r) && single(vectors, c)) return;
    sum += (r === c ? 1 : 2) * (Math.sqrt(x * x + im * im) + error) ** 2;
  });
  return roundUp(Math.sqrt(sum), vectors.rows * vectors.rows + 8);
}

/** Bound on the error of one computed inner product of two of the vectors, for norms up to 1.004. */
export function gramElementError(vectors: Csr): number {
  return Math.SQRT2 * gamma(maxRowEntries(vectors) + 4) * 1.01;
}

/** A row that is one ket with coefficient 1: its products are exact. */
function single(vectors: Csr, row: number): boolean {
  const p = vectors.ptr[row] as number;
  return (vectors.ptr[row + 1] as number) - p === 1 && vectors.re[p] === 1;
}

/**
 * Calls back with Σ_k conj(a_rk) b_ck for every r ≤ c, and whether the two rows share a ket.
 *
 * Each row of `b` is spread out once and every row of `a` gathered from it.
 */
export function forEachProduct(
  a: Csr,
  b: Csr,
  visit: (r: number, c: number, re: number, im: number, common: number) => void,
): void {
  const spreadRe = new Float64Array(b.cols);
  const spreadIm = new Float64Array(b.cols);
  const mark = new Int32Array(b.cols).fill(-1);
  for (let c = 0; c < b.rows; c++) {
    for (let q = b.ptr[c] as number; q < (b.ptr[c + 1] as number); q++) {
      const k = b.col[q] as number;
      mark[k] = c;
      spreadRe[k] = b.re[q] as number;
      spreadIm[k] = b.im === undefined ? 0 : (b.im[q] as number);
    }
    for (let r = 0; r <= c; r++) {
      let re = 0;
      let im = 0;
      let common = 0;
      const end = a.ptr[r + 1] as number;
      for (let p = a.ptr[r] as number; p < end; p++) {
        const k = a.col[p] as number;
        if (mark[k] !== c) continue;
        common++;
        const x = a.re[p] as number;
        const u = spreadRe[k] as number;
        const v = spreadIm[k] as number;
        if (a.im === undefined) {
          re += x * u;
          im += x * v;
        } else {
          const y = a.im[p] as number;
          re += x * u + y * v;
          im += x * v - y * u;
        }
      }
      visit(r, c, re, im, common);
    }
  }
}

/** Bound on the error of one element: the image's error, and a sum of at most m products with ‖q‖ ‖Vq‖ as the scale. */
export function elementErrorBound(operator: Operator, vectors: Csr): number {
  const sum = Math.SQRT2 * gamma(maxRowEntries(vectors) + 4) * operator.norm;
  const underflow = operator.norm === 0 ? 0 : 4 * maxRowEntries(vectors) * UNDERFLOW;
  return roundUp((imageError(operator) + sum) * (1 + 2 ** -18) + underflow);
}
