import type { Dense } from "../numerics/dense.js";
import { hermitianEigen } from "../numerics/eigen.js";
import { UNIT_ROUNDOFF } from "../numerics/rounding.js";

/** Eigenvalues and vectors of a normal matrix. */
export interface NormalEigen {
  readonly valuesRe: Float64Array;
  readonly valuesIm: Float64Array;
  /** Orthonormal vectors as rows, row-major n × n. */
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** A dense complex matrix, row-major. */
interface Full {
  readonly re: Float64Array;
  readonly im: Float64Array;
}

/** One of the two Hermitian parts of a block, its mean value taken out. */
interface Part extends Dense {
  /** Frobenius norm. */
  readonly deviation: number;
}

/**
 * Eigenvalues and orthonormal vectors of a normal matrix A = X + iY, by its two commuting Hermitian parts in turn.
 *
 * Rounding errors ε of one part mix vectors that it tells apart by a gap g by ε/g, which costs the other part ε times its
 * spread over g. So a block is split by the part that spreads more, and only where a gap is wide: above the spread over 2d,
 * which some gap between d values always is. What stays together is split again, by either part, until nothing spreads
 * beyond rounding. Values are Rayleigh quotients. On two commuting Hermitian matrices as one task: Bunse-Gerstner, Byers and
 * Mehrmann, SIAM J. Matrix Anal. Appl. 14, 927 (1993).
 *
 * @param n - dimension
 * @param matrix - row-major n × n
 * @param noise - what spreads no further than this, or than rounding, is one value
 */
export function normalEigen(n: number, matrix: Dense, noise: number): NormalEigen {
  const unit = unitOf(matrix);
  const a = { re: scaled(matrix.re, unit), im: scaled(matrix.im ?? new Float64Array(n * n), unit) };
  const rows = { re: new Float64Array(n * n), im: new Float64Array(n * n) };
  for (let k = 0; k < n; k++) rows.re[k * n + k] = 1;
  const floor = noise / unit + 4 * UNIT_ROUNDOFF * Math.sqrt(n * (squares(a.re) + squares(a.im)));
  const valuesRe = new Float64Array(n);
  const valuesIm = new Float64Array(n);
  const open: { from: number; size: number }[] = [{ from: 0, size: n }];
  for (let block = open.pop(); block !== undefined; block = open.pop()) {
    const { from, size } = block;
    const inside = size === n ? a : restricted(n, a, rows, from, size);
    const x = hermitianPart(size, inside.re, inside.im);
    // iY is what is left of A; the Hermitian part of −iA, whose parts are (im, −re)
    const y = hermitianPart(size, inside.im, scaled(inside.re, -1));
    const [wide, narrow] = x.deviation >= y.deviation ? [x, y] : [y, x];
    if (size === 1 || wide.deviation <= floor) {
      for (let k = 0; k < size; k++) {
        valuesRe[from + k] = unit * (inside.re[k * size + k] as number);
        valuesIm[from + k] = unit * (inside.im[k * size + k] as number);
      }
      continue;
    }
    const { values, re, im } = hermitianEigen(size, wide.re, wide.im, { upper: "ignore" });
    turn(n, rows, from, size, re, im);
    const spread = (values[size - 1] as number) - (values[0] as number);
    // two values of a matrix differ by at most √2 times its Frobenius norm
    const gap = Math.min(spread, Math.SQRT2 * narrow.deviation) / (2 * size);
    for (let k = 1, start = 0; k <= size; k++) {
      if (k < size && (values[k] as number) - (values[k - 1] as number) <= gap) continue;
      open.push({ from: from + start, size: k - start });
      start = k;
    }
  }
  return { valuesRe, valuesIm, ...rows };
}

/** The power of two at or below the largest part, so that no square leaves the range. */
function unitOf(matrix: Dense): number {
  let largest = 0;
  for (const part of [matrix.re, matrix.im ?? []]) for (const x of part) largest = Math.max(largest, Math.abs(x));
  return largest === 0 ? 1 : 2 ** Math.max(-1000, Math.floor(Math.log2(largest)));
}

function scaled(values: Float64Array, unit: number): Float64Array {
  return values.map((x) => x / unit);
}

function squares(values: Float64Array): number {
  let sum = 0;
  for (let k = 0; k < values.length; k++) sum += (values[k] as number) ** 2;
  return sum;
}

/** (A + A†)/2 without its mean value. */
function hermitianPart(n: number, re: Float64Array, im: Float64Array): Part {
  const x = new Float64Array(n * n);
  const y = new Float64Array(n * n);
  let mean = 0;
  for (let i = 0; i < n; i++) mean += (re[i * n + i] as number) / n;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const p = i * n + j;
      const q = j * n + i;
      x[p] = ((re[p] as number) + (re[q] as number)) / 2 - (i === j ? mean : 0);
      y[p] = ((im[p] as number) - (im[q] as number)) / 2;
    }
  }
  const imaginary = squares(y);
  return { re: x, im: imaginary === 0 ? undefined : y, deviation: Math.sqrt(squares(x) + imaginary) };
}

/** conj(Q) A Qᵀ for the rows from .. from + d − 1 of Q: the matrix of A in that subspace. */
function restricted(n: number, a: Full, rows: Full, from: number, d: number): Full {
  const re = new Float64Array(d * d);
  const im = new Float64Array(d * d);
  const wr = new Float64Array(n);
  const wi = new Float64Array(n);
  for (let b = 0; b < d; b++) {
    const q = (from + b) * n;
    for (let i = 0; i < n; i++) {
      let sr = 0;
      let si = 0;
      for (let j = 0; j < n; j++) {
        const u = a.re[i * n + j] as number;
        const v = a.im[i * n + j] as number;
        const x = rows.re[q + j] as number;
        const y = rows.im[q + j] as number;
        sr += u * x - v * y;
        si += u * y + v * x;
      }
      wr[i] = sr;
      wi[i] = si;
    }
    for (let k = 0; k < d; k++) {
      const p = (from + k) * n;
      let sr = 0;
      let si = 0;
      for (let i = 0; i < n; i++) {
        const x = rows.re[p + i] as number;
        const y = rows.im[p + i] as number;
        sr += x * (wr[i] as number) + y * (wi[i] as number);
        si += x * (wi[i] as number) - y * (wr[i] as number);
      }
      re[k * d + b] = sr;
      im[k * d + b] = si;
    }
  }
  return { re, im };
}

/** Replaces the rows from .. from + d − 1 of Q by U times them. */
function turn(n: number, rows: Full, from: number, d: number, ur: Float64Array, ui: Float64Array | undefined): void {
  const first = from * n;
  const oldRe = rows.re.slice(first, first + d * n);
  const oldIm = rows.im.slice(first, first + d * n);
  rows.re.fill(0, first, first + d * n);
  rows.im.fill(0, first, first + d * n);
  for (let k = 0; k < d; k++) {
    for (let b = 0; b < d; b++) {
      const u = ur[k * d + b] as number;
      const v = ui === undefined ? 0 : (ui[k * d + b] as number);
      for (let c = 0, p = first + k * n, q = b * n; c < n; c++, p++, q++) {
        const x = oldRe[q] as number;
        const y = oldIm[q] as number;
        rows.re[p] = (rows.re[p] as number) + (u * x - v * y);
        rows.im[p] = (rows.im[p] as number) + (u * y + v * x);
      }
    }
  }
}
