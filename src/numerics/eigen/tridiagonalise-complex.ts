import { NEGLIGIBLE_SQUARE, type Tridiagonal } from "./tridiagonal.js";

/**
 * Reduces a complex Hermitian matrix to real tridiagonal form, A = Q D T D† Q† with Q = H_{n−1} ⋯ H_2 H_1,
 * H_i = I − τ_i y_i y_i† with real τ_i, and D a diagonal of unit phases.
 *
 * The complex companion of `tridiagonaliseReal`: same order, same fused pass. The reflector keeps the phase of the
 * pivot, which makes τ real; the phases of the off-diagonal entries are gathered into D.
 * Source: Householder, J. ACM 5, 339 (1958); complex matrices: Mueller, Numer. Math. 8, 72 (1966).
 *
 * @param n - dimension
 * @param re - row-major n × n, entries of modulus about one or less; only the lower triangle is read; on return row i
 * holds the real parts of y_i in its columns 0 … i − 1
 * @param im - the same for the imaginary parts; those of the diagonal are taken as zero
 * @param t - receives diagonal, off-diagonal (moduli, not negative) and the scalars τ_i
 * @param phases - receives D: n real parts, then n imaginary parts
 * @param work - 6 n numbers, overwritten
 */
export function tridiagonaliseComplex(
  n: number,
  re: Float64Array,
  im: Float64Array,
  t: Tridiagonal,
  phases: Float64Array,
  work: Float64Array,
): void {
  const { diagonal, off, tau } = t;
  const wr = 2 * n;
  const wi = 3 * n;
  const yr = 4 * n;
  const yi = 5 * n;
  work.fill(0, 0, 4 * n);
  let pending = false;
  for (let i = n - 1; i > 0; i--) {
    const row = i * n;
    if (pending) updateRow(i, n, re, im, work);
    diagonal[i] = re[row + i] as number;
    let tail = 0;
    for (let j = 0; j < i - 1; j++) {
      const a = re[row + j] as number;
      const b = im[row + j] as number;
      tail += a * a + b * b;
      im[row + j] = -b;
    }
    const pivotRe = re[row + i - 1] as number;
    const pivotIm = -(im[row + i - 1] as number);
    if (tail <= NEGLIGIBLE_SQUARE) {
      phases[i] = pivotRe;
      phases[n + i] = pivotIm;
      tau[i] = 0;
      re.fill(0, row, row + i);
      im.fill(0, row, row + i);
      if (pending) {
        updateAndMultiply(i, n, re, im, work, row);
        work.fill(0, 0, 4 * n);
        pending = false;
      }
      continue;
    }
    const modulus = Math.sqrt(pivotRe * pivotRe + pivotIm * pivotIm);
    const norm = Math.sqrt(pivotRe * pivotRe + pivotIm * pivotIm + tail);
    // Below this the square of the modulus has lost digits, and any unit phase does: the pivot is nothing beside the
    // norm.
    const clear = modulus * modulus > NEGLIGIBLE_SQUARE;
    const phaseRe = clear ? pivotRe / modulus : 1;
    const phaseIm = clear ? pivotIm / modulus : 0;
    const scale = 1 / (modulus + norm);
    const tauI = (modulus + norm) / norm;
    for (let j = 0; j < i - 1; j++) {
      re[row + j] = (re[row + j] as number) * scale;
      im[row + j] = (im[row + j] as number) * scale;
    }
    re[row + i - 1] = phaseRe;
    im[row + i - 1] = phaseIm;
    phases[i] = -phaseRe * norm;
    phases[n + i] = -phaseIm * norm;
    tau[i] = tauI;
    work.fill(0, yr, yr + i);
    work.fill(0, yi, yi + i);
    updateAndMultiply(i, n, re, im, work, row);
    let inner = 0;
    for (let j = 0; j < i; j++) {
      inner += (work[yr + j] as number) * (re[row + j] as number) + (work[yi + j] as number) * (im[row + j] as number);
    }
    const shift = -0.5 * tauI * tauI * inner;
    for (let j = 0; j < i; j++) {
      const a = re[row + j] as number;
      const b = im[row + j] as number;
      work[wr + j] = tauI * (work[yr + j] as number) + shift * a;
      work[wi + j] = tauI * (work[yi + j] as number) + shift * b;
      work[j] = a;
      work[n + j] = b;
    }
    pending = true;
  }
  diagonal[0] = re[0] as number;
  gatherPhases(n, off, phases);
}

/**
 * Turns the complex off-diagonal entries (i − 1, i), kept in `phases`, into moduli and the running product of phases.
 */
function gatherPhases(n: number, off: Float64Array, phases: Float64Array): void {
  phases[0] = 1;
  phases[n] = 0;
  for (let i = 1; i < n; i++) {
    const a = phases[i] as number;
    const b = phases[n + i] as number;
    const square = a * a + b * b;
    const modulus = square > NEGLIGIBLE_SQUARE ? Math.sqrt(square) : 0;
    const c = modulus > 0 ? a / modulus : 1;
    const s = modulus > 0 ? -b / modulus : 0;
    const p = phases[i - 1] as number;
    const q = phases[n + i - 1] as number;
    const x = p * c - q * s;
    const y = p * s + q * c;
    const unit = 1 / Math.sqrt(x * x + y * y);
    off[i - 1] = modulus;
    phases[i] = x * unit;
    phases[n + i] = y * unit;
  }
}

/** Applies the pending update A ← A − u w† − w u† to row i, diagonal included. */
function updateRow(i: number, n: number, re: Float64Array, im: Float64Array, work: Float64Array): void {
  const wr = 2 * n;
  const wi = 3 * n;
  const row = i * n;
  const a = work[i] as number;
  const b = work[n + i] as number;
  const c = work[wr + i] as number;
  const d = work[wi + i] as number;
  for (let j = 0; j <= i; j++) {
    const p = work[wr + j] as number;
    const q = work[wi + j] as number;
    const s = work[j] as number;
    const t = work[n + j] as number;
    re[row + j] = (re[row + j] as number) - (a * p + b * q + (c * s + d * t));
    im[row + j] = (im[row + j] as number) - (b * p - a * q + (d * s - c * t));
  }
}

/**
 * One pass over the leading m × m triangle: A ← A − u w† − w u†, y ← y + A x with the new A. `work` holds u, w and y,
 * real and imaginary parts, n numbers each; x is the row of `re` and `im` that starts at `x`.
 */
function updateAndMultiply(
  m: number,
  n: number,
  re: Float64Array,
  im: Float64Array,
  work: Float64Array,
  x: number,
): void {
  const wr = 2 * n;
  const wi = 3 * n;
  const yr = 4 * n;
  const yi = 5 * n;
  for (let r = 0; r < m; r++) {
    const row = r * n;
    const ua = work[r] as number;
    const ub = work[n + r] as number;
    const wa = work[wr + r] as number;
    const wb = work[wi + r] as number;
    const xa = re[x + r] as number;
    const xb = im[x + r] as number;
    let sa = 0;
    let sb = 0;
    for (let c = 0; c < r; c++) {
      const p = work[wr + c] as number;
      const q = work[wi + c] as number;
      const s = work[c] as number;
      const t = work[n + c] as number;
      const a = (re[row + c] as number) - (ua * p + ub * q + (wa * s + wb * t));
      const b = (im[row + c] as number) + (ua * q - ub * p + (wa * t - wb * s));
      re[row + c] = a;
      im[row + c] = b;
      const f = re[x + c] as number;
      const g = im[x + c] as number;
      sa += a * f - b * g;
      sb += a * g + b * f;
      work[yr + c] = (work[yr + c] as number) + (a * xa + b * xb);
      work[yi + c] = (work[yi + c] as number) + (a * xb - b * xa);
    }
    const diagonal = (re[row + r] as number) - 2 * (ua * wa + ub * wb);
    re[row + r] = diagonal;
    work[yr + r] = (work[yr + r] as number) + sa + diagonal * xa;
    work[yi + r] = (work[yi + r] as number) + sb + diagonal * xb;
  }
}
