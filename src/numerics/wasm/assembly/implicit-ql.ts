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
 * @param rotations - scratch, 4 · `size` doubles
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
  // A sweep waits for its own square roots and divisions; the rotations of the sweep before are applied meanwhile.
  let fresh = rotations;
  let pending = at(rotations, 2 * size);
  let pendingLow = 0;
  let pendingHigh = 0;
  for (let low = 0; low < size; low++) {
    for (let sweep = 0; ; sweep++) {
      const high = firstNegligible(low, size - 1, diagonal, off, floor);
      if (high === low) break;
      if (sweep === MAX_SWEEPS) return false;
      pendingLow = qlSweep(low, high, diagonal, off, fresh, pendingLow, pendingHigh, pending, size, v, stride);
      pendingHigh = high;
      const applied = pending;
      pending = fresh;
      fresh = applied;
    }
  }
  for (let i = pendingHigh - 1; i >= pendingLow; i--) rotate(i, pending, size, v, stride);
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
 * doubles 2 i and 2 i + 1 of `rotations`; those of the sweep before, `pendingLow` ≤ i < `pendingHigh`, are applied to the
 * first `cols` columns of v.
 *
 * @returns the index of the last rotation, `low` unless the sweep broke off
 */
function qlSweep(
  low: i32,
  high: i32,
  diagonal: usize,
  off: usize,
  rotations: usize,
  pendingLow: i32,
  pendingHigh: i32,
  pending: usize,
  cols: i32,
  v: usize,
  stride: i32,
): i32 {
  let reached = low;
  let next = pendingHigh - 1;
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
        reached = i + 1;
        break;
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
    if (next >= pendingLow) rotate(next--, pending, cols, v, stride);
  }
  for (; next >= pendingLow; next--) rotate(next, pending, cols, v, stride);
  if (reached === low) {
    put(diagonal, low, get(diagonal, low) - p);
    put(off, low, g);
  }
  put(off, high, 0);
  return reached;
}

/** √(x² + y²) for numbers whose squares underflow; NaN stays NaN. */
function hypotenuse(x: f64, y: f64): f64 {
  const large = max(abs(x), abs(y));
  if (large === 0) return 0;
  const a = x / large;
  const b = y / large;
  return large * sqrt(a * a + b * b);
}

/** Applies rotation i of a sweep to the first `cols` columns of the rows i and i + 1: (x, y) ← (c x − s y, s x + c y). */
function rotate(i: i32, rotations: usize, cols: i32, v: usize, stride: i32): void {
  const c = v128.load64_splat(at(rotations, 2 * i));
  const s = v128.load64_splat(at(rotations, 2 * i + 1));
  let p = at(v, i * stride);
  let q = at(p, stride);
  const end = p + (((cols as usize) << 3) & ~15);
  while (p < end) {
    const x = v128.load(p);
    const y = v128.load(q);
    v128.store(q, f64x2.add(f64x2.mul(s, x), f64x2.mul(c, y)));
    v128.store(p, f64x2.sub(f64x2.mul(c, x), f64x2.mul(s, y)));
    p += 16;
    q += 16;
  }
  if (cols & 1) {
    const x = f64.load(p);
    const y = f64.load(q);
    f64.store(q, f64x2.extract_lane(s, 0) * x + f64x2.extract_lane(c, 0) * y);
    f64.store(p, f64x2.extract_lane(c, 0) * x - f64x2.extract_lane(s, 0) * y);
  }
}
