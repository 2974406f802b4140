import { GoodBasisError } from "../../errors.js";
import { UNIT_ROUNDOFF } from "../rounding.js";

/** Sweeps allowed for one eigenvalue; about two are usual. */
const MAX_SWEEPS = 60;
/** Below this a sum of two squares may have lost digits to underflow. */
const SAFE_SQUARE = 2 ** -900;

/**
 * All eigenpairs of a symmetric tridiagonal block by implicit QL, the rotations applied to rows, a sweep at a time.
 *
 * Source: Bowdler, Martin, Reinsch and Wilkinson, Numer. Math. 11, 293 (1968); implicit shifts: Martin and Wilkinson,
 * Numer. Math. 12, 377 (1968). An off-diagonal entry is dropped when it is below the unit roundoff beside its two
 * diagonal neighbours, or below `floor`.
 *
 * @param size - order of the block
 * @param start - index of its first row in `diagonal`, `off` and `v`
 * @param diagonal - diagonal entries; on return the eigenvalues, in no particular order
 * @param off - `off[start + i]` couples i and i + 1; destroyed, the entry at `start + size − 1` included
 * @param v - row-major with `stride` numbers a row; the rows of the block must hold the identity in the columns of the
 * block and come back as the eigenvectors
 * @param stride - length of a row of `v`
 * @param floor - absolute threshold for off-diagonal entries, about u² times the norm
 * @param rotations - scratch, 2 (start + size) numbers
 * @throws GoodBasisError `no-convergence` after {@link MAX_SWEEPS} sweeps for one eigenvalue
 */
export function implicitQl(
  size: number,
  start: number,
  diagonal: Float64Array,
  off: Float64Array,
  v: Float64Array,
  stride: number,
  floor: number,
  rotations: Float64Array,
): void {
  const last = start + size - 1;
  for (let low = start; low <= last; low++) {
    for (let sweep = 0; ; sweep++) {
      const high = firstNegligible(low, last, diagonal, off, floor);
      if (high === low) break;
      if (sweep === MAX_SWEEPS) {
        throw new GoodBasisError(
          "no-convergence",
          `implicitQl: eigenvalue ${low - start} of a block of order ${size} did not settle in ${MAX_SWEEPS} sweeps; ` +
            "check the matrix for entries that overflow",
          { index: low - start, size },
        );
      }
      const reached = qlSweep(low, high, diagonal, off, rotations);
      applySweep(reached, high, start, start + size, v, stride, rotations);
    }
  }
}

/** Index of the first negligible off-diagonal entry from `low` on, `last` where there is none. */
function firstNegligible(low: number, last: number, diagonal: Float64Array, off: Float64Array, floor: number): number {
  let m = low;
  for (; m < last; m++) {
    const beside = Math.abs(diagonal[m] as number) + Math.abs(diagonal[m + 1] as number);
    if (Math.abs(off[m] as number) <= Math.max(UNIT_ROUNDOFF * beside, floor)) break;
  }
  return m;
}

/**
 * One implicit sweep from row `high` up to row `low`, with the shift of the leading 2 × 2 matrix. Cosine and sine of
 * the rotation of rows i and i + 1 go to `rotations[2 i]` and the entry after it.
 *
 * @returns the index of the last rotation, `low` unless the sweep broke off
 */
function qlSweep(
  low: number,
  high: number,
  diagonal: Float64Array,
  off: Float64Array,
  rotations: Float64Array,
): number {
  const first = diagonal[low] as number;
  const coupling = off[low] as number;
  const ratio = ((diagonal[low + 1] as number) - first) / (2 * coupling);
  const root = Math.sqrt(ratio * ratio + 1);
  let g = (diagonal[high] as number) - first + coupling / (ratio >= 0 ? ratio + root : ratio - root);
  let s = 1;
  let c = 1;
  let p = 0;
  for (let i = high - 1; i >= low; i--) {
    const f = s * (off[i] as number);
    const b = c * (off[i] as number);
    const square = f * f + g * g;
    const r = square > SAFE_SQUARE ? Math.sqrt(square) : Math.hypot(f, g);
    off[i + 1] = r;
    if (r === 0) {
      // The chase met an exact zero: the block falls apart here, and the next sweep starts on the pieces.
      diagonal[i + 1] = (diagonal[i + 1] as number) - p;
      off[high] = 0;
      return i + 1;
    }
    s = f / r;
    c = g / r;
    g = (diagonal[i + 1] as number) - p;
    const h = ((diagonal[i] as number) - g) * s + 2 * c * b;
    p = s * h;
    diagonal[i + 1] = g + p;
    g = c * h - b;
    rotations[2 * i] = c;
    rotations[2 * i + 1] = s;
  }
  diagonal[low] = (diagonal[low] as number) - p;
  off[low] = g;
  off[high] = 0;
  return low;
}

/**
 * Applies a sweep of rotations of the rows i and i + 1, i = `high` − 1 down to `low`, to the columns `from` to `to`:
 * four columns at a time, the row that two rotations share held in registers between them.
 */
function applySweep(
  low: number,
  high: number,
  from: number,
  to: number,
  v: Float64Array,
  stride: number,
  rotations: Float64Array,
): void {
  let k = from;
  for (; k + 3 < to; k += 4) {
    let p = high * stride + k;
    let y0 = v[p] as number;
    let y1 = v[p + 1] as number;
    let y2 = v[p + 2] as number;
    let y3 = v[p + 3] as number;
    for (let i = high - 1; i >= low; i--) {
      const c = rotations[2 * i] as number;
      const s = rotations[2 * i + 1] as number;
      const q = p - stride;
      const x0 = v[q] as number;
      const x1 = v[q + 1] as number;
      const x2 = v[q + 2] as number;
      const x3 = v[q + 3] as number;
      v[p] = s * x0 + c * y0;
      v[p + 1] = s * x1 + c * y1;
      v[p + 2] = s * x2 + c * y2;
      v[p + 3] = s * x3 + c * y3;
      y0 = c * x0 - s * y0;
      y1 = c * x1 - s * y1;
      y2 = c * x2 - s * y2;
      y3 = c * x3 - s * y3;
      p = q;
    }
    v[p] = y0;
    v[p + 1] = y1;
    v[p + 2] = y2;
    v[p + 3] = y3;
  }
  for (; k < to; k++) {
    let p = high * stride + k;
    let y = v[p] as number;
    for (let i = high - 1; i >= low; i--) {
      const c = rotations[2 * i] as number;
      const s = rotations[2 * i + 1] as number;
      const x = v[p - stride] as number;
      v[p] = s * x + c * y;
      y = c * x - s * y;
      p -= stride;
    }
    v[p] = y;
  }
}
