import { NEGLIGIBLE_SQUARE, type Tridiagonal } from "./tridiagonal.js";

/**
 * Reduces a real symmetric matrix to tridiagonal form, A = Q T Qᵀ with Q = H_{n−1} ⋯ H_2 H_1 and H_i = I − τ_i y_i
 * y_iᵀ.
 *
 * Works from the last row upward, so that the reflectors lie in contiguous rows. The rank-two update of one step is
 * applied while the matrix-vector product of the next is formed: one pass over the triangle a step.
 * Source: Householder, J. ACM 5, 339 (1958); row order of tred2, Martin, Reinsch and Wilkinson, Numer. Math. 11, 181
 * (1968).
 *
 * @param n - dimension
 * @param a - row-major n × n, entries of modulus about one or less; only the lower triangle is read; on return row i
 * holds y_i in its columns 0 … i − 1
 * @param t - receives diagonal, off-diagonal (`off[i]` couples i and i + 1) and the scalars τ_i (`tau[i]`, 0 for no
 * reflector)
 * @param work - 3 n numbers, overwritten
 */
export function tridiagonaliseReal(n: number, a: Float64Array, t: Tridiagonal, work: Float64Array): void {
  const { diagonal, off, tau } = t;
  const w = n;
  const y = 2 * n;
  work.fill(0, 0, 2 * n);
  let pending = false;
  for (let i = n - 1; i > 0; i--) {
    const row = i * n;
    if (pending) {
      const ui = work[i] as number;
      const wi = work[w + i] as number;
      for (let j = 0; j <= i; j++) {
        a[row + j] = (a[row + j] as number) - (ui * (work[w + j] as number) + wi * (work[j] as number));
      }
    }
    diagonal[i] = a[row + i] as number;
    let tail = 0;
    for (let j = 0; j < i - 1; j++) tail += (a[row + j] as number) * (a[row + j] as number);
    const pivot = a[row + i - 1] as number;
    if (tail <= NEGLIGIBLE_SQUARE) {
      off[i - 1] = pivot;
      tau[i] = 0;
      a.fill(0, row, row + i);
      if (pending) {
        updateAndMultiply(i, n, a, work, row);
        work.fill(0, 0, 2 * n);
        pending = false;
      }
      continue;
    }
    const norm = Math.sqrt(pivot * pivot + tail);
    const beta = pivot > 0 ? -norm : norm;
    const scale = 1 / (pivot - beta);
    const tauI = (beta - pivot) / beta;
    for (let j = 0; j < i - 1; j++) a[row + j] = (a[row + j] as number) * scale;
    a[row + i - 1] = 1;
    off[i - 1] = beta;
    tau[i] = tauI;
    work.fill(0, y, y + i);
    updateAndMultiply(i, n, a, work, row);
    let inner = 0;
    for (let j = 0; j < i; j++) inner += (work[y + j] as number) * (a[row + j] as number);
    const shift = -0.5 * tauI * tauI * inner;
    for (let j = 0; j < i; j++) {
      const x = a[row + j] as number;
      work[w + j] = tauI * (work[y + j] as number) + shift * x;
      work[j] = x;
    }
    pending = true;
  }
  diagonal[0] = a[0] as number;
}

/**
 * One pass over the leading m × m triangle, two rows at a time: A ← A − u wᵀ − w uᵀ, y ← y + A x with the new A.
 * `work` holds u at 0, w at n, y at 2 n; x is the row of `a` that starts at `x`.
 */
function updateAndMultiply(m: number, n: number, a: Float64Array, work: Float64Array, x: number): void {
  const w = n;
  const y = 2 * n;
  let r = 0;
  for (; r + 1 < m; r += 2) {
    const p = r * n;
    const q = p + n;
    const u0 = work[r] as number;
    const u1 = work[r + 1] as number;
    const w0 = work[w + r] as number;
    const w1 = work[w + r + 1] as number;
    const x0 = a[x + r] as number;
    const x1 = a[x + r + 1] as number;
    let s0 = 0;
    let s1 = 0;
    for (let c = 0; c < r; c++) {
      const uc = work[c] as number;
      const wc = work[w + c] as number;
      const xc = a[x + c] as number;
      const a0 = (a[p + c] as number) - u0 * wc - w0 * uc;
      const a1 = (a[q + c] as number) - u1 * wc - w1 * uc;
      a[p + c] = a0;
      a[q + c] = a1;
      s0 += a0 * xc;
      s1 += a1 * xc;
      work[y + c] = (work[y + c] as number) + (a0 * x0 + a1 * x1);
    }
    const a00 = (a[p + r] as number) - 2 * u0 * w0;
    const a10 = (a[q + r] as number) - u1 * w0 - w1 * u0;
    const a11 = (a[q + r + 1] as number) - 2 * u1 * w1;
    a[p + r] = a00;
    a[q + r] = a10;
    a[q + r + 1] = a11;
    work[y + r] = (work[y + r] as number) + s0 + a00 * x0 + a10 * x1;
    work[y + r + 1] = (work[y + r + 1] as number) + s1 + a10 * x0 + a11 * x1;
  }
  if (r < m) {
    const p = r * n;
    const u0 = work[r] as number;
    const w0 = work[w + r] as number;
    const x0 = a[x + r] as number;
    let s0 = 0;
    for (let c = 0; c < r; c++) {
      const a0 = (a[p + c] as number) - u0 * (work[w + c] as number) - w0 * (work[c] as number);
      a[p + c] = a0;
      s0 += a0 * (a[x + c] as number);
      work[y + c] = (work[y + c] as number) + a0 * x0;
    }
    const a00 = (a[p + r] as number) - 2 * u0 * w0;
    a[p + r] = a00;
    work[y + r] = (work[y + r] as number) + s0 + a00 * x0;
  }
}
