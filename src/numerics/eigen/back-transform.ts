import type { Dense } from "../dense.js";
import { addProduct, type Panel } from "./packed-product.js";

/**
 * Applies the reflectors one by one to every row: row ← H_{n−1} ⋯ H_1 row, for small matrices (Householder, J. ACM 5, 339
 * (1958)).
 *
 * @param n - order
 * @param y - row i holds y_i in its columns 0 … i − 1
 * @param tau - τ_i, zero where there is no reflector
 * @param rows - n rows of n numbers, changed in place
 */
export function applyReflectors(n: number, y: Dense, tau: Float64Array, rows: Dense): void {
  const { re, im } = rows;
  for (let i = 1; i < n; i++) {
    const t = tau[i] as number;
    if (t === 0) continue;
    if (im === undefined || y.im === undefined) reflectReal(n, i, t, y.re, re);
    else reflectComplex(n, i, t, y.re, y.im, re, im);
  }
}

/** Two rows at a time: their sums do not wait for one another. */
function reflectReal(n: number, i: number, tau: number, y: Float64Array, v: Float64Array): void {
  const at = i * n;
  for (let row = 0; row < n; row += 2) {
    const p = row * n;
    // The last row of an odd number is its own partner: both write the same numbers.
    const q = row + 1 < n ? p + n : p;
    let s = 0;
    let t = 0;
    for (let j = 0; j < i; j++) {
      const yj = y[at + j] as number;
      s += yj * (v[p + j] as number);
      t += yj * (v[q + j] as number);
    }
    s *= tau;
    t *= tau;
    for (let j = 0; j < i; j++) {
      const yj = y[at + j] as number;
      const first = (v[p + j] as number) - s * yj;
      const second = (v[q + j] as number) - t * yj;
      v[p + j] = first;
      v[q + j] = second;
    }
  }
}

function reflectComplex(
  n: number,
  i: number,
  tau: number,
  yr: Float64Array,
  yi: Float64Array,
  vr: Float64Array,
  vi: Float64Array,
): void {
  const p = i * n;
  for (let row = 0; row < n * n; row += n) {
    let s = 0;
    let t = 0;
    for (let j = 0; j < i; j++) {
      const a = yr[p + j] as number;
      const b = yi[p + j] as number;
      const x = vr[row + j] as number;
      const y = vi[row + j] as number;
      s += a * x + b * y;
      t += a * y - b * x;
    }
    s *= tau;
    t *= tau;
    for (let j = 0; j < i; j++) {
      const a = yr[p + j] as number;
      const b = yi[p + j] as number;
      vr[row + j] = (vr[row + j] as number) - (s * a - t * b);
      vi[row + j] = (vi[row + j] as number) - (s * b + t * a);
    }
  }
}

/**
 * The same as {@link applyReflectors} in blocks: as they act on rows from the right, the reflectors of a block multiply
 * to I − Y† T Y with T upper triangular, applied to all rows by matrix products.
 *
 * Source: Schreiber and Van Loan, SIAM J. Sci. Stat. Comput. 10, 53 (1989).
 *
 * @param n - order
 * @param y - row i holds y_i in its columns 0 … i − 1; what lies beyond is overwritten with zeros
 * @param tau - τ_i, zero where there is no reflector
 * @param rows - n rows of n numbers, changed in place
 * @param width - reflectors in a block
 * @param scratch - scratch for {@link addProduct}
 */
export function applyReflectorBlocks(
  n: number,
  y: Dense,
  tau: Float64Array,
  rows: Dense,
  width: number,
  scratch: Float64Array,
): void {
  const complex = rows.im !== undefined && y.im !== undefined;
  const room = (length: number): Dense => ({
    re: new Float64Array(length),
    im: complex ? new Float64Array(length) : undefined,
  });
  const gram = room(width * width);
  const factor = room(width * width);
  const scaled = room(width * n);
  const overlap = room(width * n);
  for (let first = 1; first < n; first += width) {
    const k = Math.min(width, n - first);
    const length = first + k - 1;
    if (tau.subarray(first, first + k).every((t) => t === 0)) continue;
    for (let i = first; i < first + k; i++) {
      y.re.fill(0, i * n + i, i * n + length);
      y.im?.fill(0, i * n + i, i * n + length);
    }
    const block = view(y, first * n, n, 1);
    const adjoint = view(y, first * n, 1, n, true);
    const gramView = view(gram, 0, k, 1);
    const scaledView = view(scaled, 0, length, 1);
    const overlapView = view(overlap, 0, k, 1);
    const target = view(rows, 0, n, 1);
    clear(gram, k * k);
    addComplexProduct(k, k, length, 1, block, adjoint, gramView, scratch);
    compactFactor(k, first, tau, gram, factor);
    clear(scaled, k * length);
    addComplexProduct(k, length, k, 1, view(factor, 0, k, 1), block, scaledView, scratch);
    clear(overlap, n * k);
    addComplexProduct(n, k, length, 1, target, adjoint, overlapView, scratch);
    addComplexProduct(n, length, k, -1, overlapView, scaledView, target, scratch);
  }
}

/**
 * The k × k upper triangular factor T of I − Y† T Y (acting on rows from the right), from τ and the Gram matrix Y Y†.
 */
function compactFactor(k: number, first: number, tau: Float64Array, gram: Dense, factor: Dense): void {
  clear(factor, k * k);
  for (let j = 0; j < k; j++) {
    const t = tau[first + j] as number;
    factor.re[j * k + j] = t;
    for (let a = 0; a < j; a++) {
      let s = 0;
      let u = 0;
      for (let b = a; b < j; b++) {
        const x = factor.re[a * k + b] as number;
        const g = gram.re[b * k + j] as number;
        s += x * g;
        if (factor.im !== undefined && gram.im !== undefined) {
          const w = factor.im[a * k + b] as number;
          const h = gram.im[b * k + j] as number;
          s -= w * h;
          u += x * h + w * g;
        }
      }
      factor.re[a * k + j] = -t * s;
      if (factor.im !== undefined) factor.im[a * k + j] = -t * u;
    }
  }
}

/** A {@link Panel} with an imaginary part, or with none; `imSign` −1 conjugates. */
interface ComplexPanel {
  readonly re: Panel;
  readonly im: Panel | undefined;
  readonly imSign: number;
}

function view(m: Dense, at: number, rowStep: number, colStep: number, conjugate = false): ComplexPanel {
  return {
    re: { data: m.re, at, rowStep, colStep },
    im: m.im === undefined ? undefined : { data: m.im, at, rowStep, colStep },
    imSign: conjugate ? -1 : 1,
  };
}

function clear(m: Dense, length: number): void {
  m.re.fill(0, 0, length);
  m.im?.fill(0, 0, length);
}

/** C ← C + alpha A B for matrices that are all real or all complex; four real products for the latter. */
function addComplexProduct(
  m: number,
  n: number,
  k: number,
  alpha: number,
  a: ComplexPanel,
  b: ComplexPanel,
  c: ComplexPanel,
  scratch: Float64Array,
): void {
  addProduct(m, n, k, alpha, a.re, b.re, c.re, scratch);
  if (a.im === undefined || b.im === undefined || c.im === undefined) return;
  addProduct(m, n, k, -alpha * a.imSign * b.imSign, a.im, b.im, c.re, scratch);
  addProduct(m, n, k, alpha * b.imSign, a.re, b.im, c.im, scratch);
  addProduct(m, n, k, alpha * a.imSign, a.im, b.re, c.im, scratch);
}
