// Small symmetric tridiagonal eigenproblems: implicit QL, a sweep of rotations applied at a time.

import { at, get, put } from "./memory.ts";

const UNIT_ROUNDOFF: f64 = 1.1102230246251565e-16;
/** Sweeps allowed for one eigenvalue; about two are usual. */
const MAX_SWEEPS: i32 = 60;
/** Below this a sum of two squares may have lost digits to underflow. */
const SAFE_SQUARE: f64 = reinterpret<f64>((1023 - 900) << 52);

/**
 * All eigenpairs of a symmetric tridiagonal block by implicit QL.
 * Source: Bowdler, Martin, Reinsch and Wilkinson, Numer. Math. 11, 293 (1968); implicit shifts: Martin and Wilkinson,
 * Numer. Math. 12, 377 (1968). An off-diagonal entry is dropped when it is below the unit roundoff beside its two
 * diagonal neighbours, or below `floor`.
 *
 * @param size - order of the block
 * @param diagonal - its entries; on return the eigenvalues, in no particular order
 * @param off - entry i couples i and i + 1; `size` doubles, destroyed
 * @param v - first number of the block in rows of `stride` doubles; holds the identity, comes back as eigenvectors
 * @param floor - absolute threshold for off-diagonal entries
 * @param rotations - scratch, 2 · `size` doubles
 * @returns whether it converged
 */
export function implicitQl(
  size: i32,
  diagonal: usize,
  off: usize,
  v: usize,
  stride: i32,
  floor: f64,
  rotations: usize,
): bool {
  for (let low = 0; low < size; low++) {
    for (let sweep = 0; ; sweep++) {
      const high = firstNegligible(low, size - 1, diagonal, off, floor);
      if (high === low) break;
      if (sweep === MAX_SWEEPS) return false;
      const reached = qlSweep(low, high, diagonal, off, rotations);
      applySweep(reached, high, size, v, stride, rotations);
    }
  }
  return true;
}

/** Index of the first negligible off-diagonal entry from `low` on, `last` where there is none. */
function firstNegligible(low: i32, last: i32, diagonal: usize, off: usize, floor: f64): i32 {
  let m = low;
  for (; m < last; m++) {
    const beside = abs(get(diagonal, m)) + abs(get(diagonal, m + 1));
    if (abs(get(off, m)) <= max(UNIT_ROUNDOFF * beside, floor)) break;
  }
  return m;
}

/**
 * One implicit sweep from row `high` up to row `low`. Cosine and sine of the rotation of rows i and i + 1 go to the
 * doubles 2 i and 2 i + 1 of `rotations`.
 *
 * @returns the index of the last rotation, `low` unless the sweep broke off
 */
function qlSweep(low: i32, high: i32, diagonal: usize, off: usize, rotations: usize): i32 {
  const first = get(diagonal, low);
  const coupling = get(off, low);
  const ratio = (get(diagonal, low + 1) - first) / (2 * coupling);
  const root = sqrt(ratio * ratio + 1);
  let g = get(diagonal, high) - first + coupling / (ratio >= 0 ? ratio + root : ratio - root);
  let s: f64 = 1;
  let c: f64 = 1;
  let p: f64 = 0;
  for (let i = high - 1; i >= low; i--) {
    const f = s * get(off, i);
    const b = c * get(off, i);
    const square = f * f + g * g;
    if (square > SAFE_SQUARE) {
      // Square root and reciprocal wait for the square alone, not for each other: this chain is what a sweep costs.
      const r = sqrt(square);
      const inverse = r * (1 / square);
      put(off, i + 1, r);
      s = f * inverse;
      c = g * inverse;
    } else {
      const r = hypotenuse(f, g);
      put(off, i + 1, r);
      if (r === 0) {
        // The chase met an exact zero: the block falls apart here, and the next sweep starts on the pieces.
        put(diagonal, i + 1, get(diagonal, i + 1) - p);
        put(off, high, 0);
        return i + 1;
      }
      s = f / r;
      c = g / r;
    }
    g = get(diagonal, i + 1) - p;
    const h = (get(diagonal, i) - g) * s + 2 * c * b;
    p = s * h;
    put(diagonal, i + 1, g + p);
    g = c * h - b;
    put(rotations, 2 * i, c);
    put(rotations, 2 * i + 1, s);
  }
  put(diagonal, low, get(diagonal, low) - p);
  put(off, low, g);
  put(off, high, 0);
  return low;
}

/** √(x² + y²) for numbers whose squares underflow; NaN stays NaN. */
function hypotenuse(x: f64, y: f64): f64 {
  const large = max(abs(x), abs(y));
  if (large === 0) return 0;
  const a = x / large;
  const b = y / large;
  return large * sqrt(a * a + b * b);
}

/**
 * Applies a sweep of rotations of the rows i and i + 1, i = `high` − 1 down to `low`, to the first `cols` columns: four
 * at a time, the row that two rotations share held in registers between them.
 */
function applySweep(low: i32, high: i32, cols: i32, v: usize, stride: i32, rotations: usize): void {
  const step = (stride as usize) << 3;
  const last = at(rotations, 2 * (high - 1));
  let k = 0;
  for (; k + 3 < cols; k += 4) {
    let p = at(v, high * stride + k);
    let y0 = v128.load(p);
    let y1 = v128.load(p, 16);
    let rotation = last;
    for (let i = high - 1; i >= low; i--) {
      const c = v128.load64_splat(rotation);
      const s = v128.load64_splat(rotation, 8);
      const q = p - step;
      const x0 = v128.load(q);
      const x1 = v128.load(q, 16);
      v128.store(p, f64x2.add(f64x2.mul(s, x0), f64x2.mul(c, y0)));
      v128.store(p, f64x2.add(f64x2.mul(s, x1), f64x2.mul(c, y1)), 16);
      y0 = f64x2.sub(f64x2.mul(c, x0), f64x2.mul(s, y0));
      y1 = f64x2.sub(f64x2.mul(c, x1), f64x2.mul(s, y1));
      p = q;
      rotation -= 16;
    }
    v128.store(p, y0);
    v128.store(p, y1, 16);
  }
  for (; k < cols; k++) {
    let p = at(v, high * stride + k);
    let y = f64.load(p);
    let rotation = last;
    for (let i = high - 1; i >= low; i--) {
      const c = f64.load(rotation);
      const s = f64.load(rotation, 8);
      const x = f64.load(p - step);
      f64.store(p, s * x + c * y);
      y = c * x - s * y;
      p -= step;
      rotation -= 16;
    }
    f64.store(p, y);
  }
}
