import { gamma, roundUp } from "../numerics/rounding.js";

/** How many eigenvalues lie below a number. */
export interface Count {
  readonly below: number;
  /** The count holds for some matrix within this of the given one: N(λ < σ − error) ≤ below ≤ N(λ ≤ σ + error). */
  readonly error: number;
}

/** The pivoting threshold (1 + √17)/8. */
const ALPHA = (1 + Math.sqrt(17)) / 8;

/**
 * Counts the eigenvalues of a dense Hermitian matrix below σ: the inertia of A − σ by Sylvester's law, from A − σ = P†(L D L†)P
 * with the pivots of Bunch and Kaufman, Math. Comp. 31, 163 (1977). What the factorisation leaves is evaluated and bounded
 * afterwards, so the count is rigorous whatever the rounding did.
 *
 * @param n - dimension
 * @param re - real parts, row-major n × n; only the lower triangle is read
 * @param im - imaginary parts
 * @param sigma - where to count
 */
export function countBelow(n: number, re: Float64Array, im: Float64Array, sigma: number): Count {
  const fr = re.slice();
  const fi = im.slice();
  for (let i = 0; i < n; i++) fr[i * n + i] = (re[i * n + i] as number) - sigma;
  const pivots = new Uint8Array(n);
  const order = Int32Array.from({ length: n }, (_, i) => i);
  for (let k = 0; k < n; ) k += eliminate(n, fr, fi, pivots, order, k);
  return assess(n, fr, fi, pivots, order, re, im, sigma);
}

/**
 * One step from column k on; returns the size of the pivot, which is marked in `pivots`.
 *
 * The pivot is looked for as a rook moves, from column to row until an element is the largest of both, which keeps L small
 * (Ashcraft, Grimes and Lewis, SIAM J. Matrix Anal. Appl. 20, 513 (1998)).
 */
function eliminate(
  n: number,
  a: Float64Array,
  b: Float64Array,
  pivots: Uint8Array,
  order: Int32Array,
  k: number,
): number {
  const size = (i: number, j: number): number => {
    const at = i >= j ? i * n + j : j * n + i;
    return Math.hypot(a[at] as number, b[at] as number);
  };
  /** The largest element of a row off the diagonal, and where it is. */
  const search = (row: number): { most: number; at: number } => {
    let most = 0;
    let at = row;
    for (let j = k; j < n; j++) {
      const x = j === row ? 0 : size(row, j);
      if (x > most) {
        most = x;
        at = j;
      }
    }
    return { most, at };
  };
  let here = k;
  let { most, at } = search(k);
  const none = Math.max(size(k, k), most) === 0;
  let width = 1;
  if (size(k, k) < ALPHA * most) {
    for (;;) {
      const next = search(at);
      if (size(at, at) >= ALPHA * next.most) {
        here = at;
        break;
      }
      if (next.at === here || next.most <= most) {
        width = 2;
        break;
      }
      here = at;
      at = next.at;
      most = next.most;
    }
  }
  swap(n, a, b, order, k, here);
  if (width === 2) swap(n, a, b, order, k + 1, at);
  pivots[k] = width;
  if (none) return width;
  if (width === 1) eliminateOne(n, a, b, k);
  else eliminateTwo(n, a, b, k);
  return width;
}

/** Exchanges rows and columns p and q of the Hermitian matrix whose lower triangle is stored, p < q. */
function swap(n: number, a: Float64Array, b: Float64Array, order: Int32Array, p: number, q: number): void {
  if (p === q) return;
  const exchange = (x: number, y: number, sign: number): void => {
    const re = a[x] as number;
    const im = b[x] as number;
    a[x] = a[y] as number;
    b[x] = sign * (b[y] as number);
    a[y] = re;
    b[y] = sign * im;
  };
  for (let j = 0; j < p; j++) exchange(p * n + j, q * n + j, 1);
  exchange(p * n + p, q * n + q, 1);
  for (let j = p + 1; j < q; j++) exchange(j * n + p, q * n + j, -1);
  b[q * n + p] = -(b[q * n + p] as number);
  for (let i = q + 1; i < n; i++) exchange(i * n + p, i * n + q, 1);
  const kept = order[p] as number;
  order[p] = order[q] as number;
  order[q] = kept;
}

function eliminateOne(n: number, a: Float64Array, b: Float64Array, k: number): void {
  const d = a[k * n + k] as number;
  const lr = new Float64Array(n);
  const li = new Float64Array(n);
  for (let i = k + 1; i < n; i++) {
    lr[i] = (a[i * n + k] as number) / d;
    li[i] = (b[i * n + k] as number) / d;
  }
  for (let i = k + 1; i < n; i++) {
    const x = a[i * n + k] as number;
    const y = b[i * n + k] as number;
    if (x !== 0 || y !== 0) subtract(n, a, b, i, k + 1, x, y, lr, li);
    a[i * n + k] = lr[i] as number;
    b[i * n + k] = li[i] as number;
  }
}

function eliminateTwo(n: number, a: Float64Array, b: Float64Array, k: number): void {
  const p = a[k * n + k] as number;
  const q = a[(k + 1) * n + k + 1] as number;
  const c = a[(k + 1) * n + k] as number;
  const s = b[(k + 1) * n + k] as number;
  const det = p * q - (c * c + s * s);
  const lr = [new Float64Array(n), new Float64Array(n)] as const;
  const li = [new Float64Array(n), new Float64Array(n)] as const;
  for (let i = k + 2; i < n; i++) {
    const x = a[i * n + k] as number;
    const y = b[i * n + k] as number;
    const u = a[i * n + k + 1] as number;
    const v = b[i * n + k + 1] as number;
    // (w0, w1) D⁻¹ with D = [[p, conj z], [z, q]], z = c + is
    lr[0][i] = (x * q - (u * c - v * s)) / det;
    li[0][i] = (y * q - (u * s + v * c)) / det;
    lr[1][i] = (u * p - (x * c + y * s)) / det;
    li[1][i] = (v * p - (y * c - x * s)) / det;
  }
  for (let i = k + 2; i < n; i++) {
    for (const t of [0, 1] as const) {
      const x = a[i * n + k + t] as number;
      const y = b[i * n + k + t] as number;
      if (x !== 0 || y !== 0) subtract(n, a, b, i, k + 2, x, y, lr[t], li[t]);
    }
    for (const t of [0, 1] as const) {
      a[i * n + k + t] = lr[t][i] as number;
      b[i * n + k + t] = li[t][i] as number;
    }
  }
}

/** Row i, columns from .. i: subtracts (x + iy) conj(l_j). */
function subtract(
  n: number,
  a: Float64Array,
  b: Float64Array,
  i: number,
  from: number,
  x: number,
  y: number,
  lr: Float64Array,
  li: Float64Array,
): void {
  const row = i * n;
  for (let j = from; j <= i; j++) {
    const u = lr[j] as number;
    const v = li[j] as number;
    a[row + j] = (a[row + j] as number) - (x * u + y * v);
    b[row + j] = (b[row + j] as number) - (y * u - x * v);
  }
  b[row + i] = 0;
}

/** Counts the negative pivots and bounds ‖P(A − σ)P† − L D L†‖ by its evaluated Frobenius norm and the rounding of that. */
function assess(
  n: number,
  fr: Float64Array,
  fi: Float64Array,
  pivots: Uint8Array,
  order: Int32Array,
  re: Float64Array,
  im: Float64Array,
  sigma: number,
): Count {
  const lr = new Float64Array(n * n);
  const li = new Float64Array(n * n);
  const mr = new Float64Array(n * n);
  const mi = new Float64Array(n * n);
  let below = 0;
  let sure = true;
  let square = 0;
  let moduli = 0;
  for (let i = 0; i < n; i++) {
    for (let k = 0; k < i; k++) {
      if (pivots[k] === 2 && i === k + 1) continue;
      lr[i * n + k] = fr[i * n + k] as number;
      li[i * n + k] = fi[i * n + k] as number;
    }
    lr[i * n + i] = 1;
    for (let k = 0; k <= i; k++) square += (lr[i * n + k] as number) ** 2 + (li[i * n + k] as number) ** 2;
  }
  for (let k = 0; k < n; k += pivots[k] as number) {
    const p = fr[k * n + k] as number;
    if (pivots[k] === 1) {
      if (p < 0) below++;
      for (let i = k; i < n; i++) {
        mr[i * n + k] = p * (lr[i * n + k] as number);
        mi[i * n + k] = p * (li[i * n + k] as number);
        moduli += (mr[i * n + k] as number) ** 2 + (mi[i * n + k] as number) ** 2;
      }
      continue;
    }
    const q = fr[(k + 1) * n + k + 1] as number;
    const c = fr[(k + 1) * n + k] as number;
    const s = fi[(k + 1) * n + k] as number;
    // such a pivot has one eigenvalue of each sign: |z|² is well above |pq|
    if (c * c + s * s > Math.abs(p * q) * (1 + gamma(16))) below++;
    else sure = false;
    for (let i = k; i < n; i++) {
      const x = lr[i * n + k] as number;
      const y = li[i * n + k] as number;
      const u = lr[i * n + k + 1] as number;
      const v = li[i * n + k + 1] as number;
      mr[i * n + k] = x * p + (u * c - v * s);
      mi[i * n + k] = y * p + (u * s + v * c);
      mr[i * n + k + 1] = x * c + y * s + u * q;
      mi[i * n + k + 1] = y * c - x * s + v * q;
      const first = Math.hypot(x, y);
      const second = Math.hypot(u, v);
      const z = Math.hypot(c, s);
      moduli += (first * Math.abs(p) + second * z) ** 2 + (first * z + second * Math.abs(q)) ** 2;
    }
  }
  let defect = 0;
  let scale = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      let x = 0;
      let y = 0;
      for (let k = 0; k <= j; k++) {
        const a = mr[i * n + k] as number;
        const b = mi[i * n + k] as number;
        const u = lr[j * n + k] as number;
        const v = li[j * n + k] as number;
        x += a * u + b * v;
        y += b * u - a * v;
      }
      const p = order[i] as number;
      const q = order[j] as number;
      const at = p >= q ? p * n + q : q * n + p;
      const u = (re[at] as number) - (p === q ? sigma : 0);
      const v = p >= q ? (im[at] as number) : -(im[at] as number);
      const weight = i === j ? 1 : 2;
      scale += weight * (u * u + v * v);
      defect += weight * ((x - u) ** 2 + (y - v) ** 2);
    }
  }
  // a 2 × 2 pivot's column reaches one beyond the diagonal of M, where L has no entry: nothing is left out of the sums
  const rounding = Math.SQRT2 * gamma(n + 12) * Math.sqrt(square) * Math.sqrt(moduli) + gamma(8) * Math.sqrt(scale);
  const error = roundUp(Math.sqrt(defect) + rounding, n * n + 32);
  // pivots that underflow leave no number: nothing is known then
  return { below, error: sure && Number.isFinite(error) ? error : Number.POSITIVE_INFINITY };
}
