import type { Csr } from "../numerics/csr.js";
import { LARGE_COMPONENT_THOUSANDTHS } from "../numerics/phase.js";

/** {@link LARGE_COMPONENT_THOUSANDTHS} as a fraction. */
const LARGE_COMPONENT = LARGE_COMPONENT_THOUSANDTHS / 1000;

/**
 * Fixes the phase of every row: its first component within a stated factor of the largest becomes real and positive.
 *
 * @returns the same rows, multiplied by a unit phase each
 */
export function fixPhases(rows: Csr): Csr {
  const re = rows.re.slice();
  const im = rows.im?.slice();
  for (let r = 0; r < rows.rows; r++) {
    const from = rows.ptr[r] as number;
    const to = rows.ptr[r + 1] as number;
    let most = 0;
    for (let p = from; p < to; p++) most = Math.max(most, square(re, im, p));
    let pivot = from;
    while (pivot < to && square(re, im, pivot) < LARGE_COMPONENT * LARGE_COMPONENT * most) pivot++;
    if (pivot === to) continue;
    const x = re[pivot] as number;
    const y = im === undefined ? 0 : (im[pivot] as number);
    turnRow(re, im, from, to, x, -y);
    if (im !== undefined) im[pivot] = 0;
  }
  return { ...rows, re, im: im?.some((y) => y !== 0) ? im : undefined };
}

/** Multiplies a row by the unit phase of (x + iy). */
export function turnRow(
  re: Float64Array,
  im: Float64Array | undefined,
  from: number,
  to: number,
  x: number,
  y: number,
): void {
  const modulus = Math.hypot(x, y);
  if (modulus === 0) return;
  const c = x / modulus;
  const s = y / modulus;
  if (s === 0 && c > 0) return;
  for (let p = from; p < to; p++) {
    const a = re[p] as number;
    if (im === undefined) {
      re[p] = a * c;
      continue;
    }
    const b = im[p] as number;
    re[p] = a * c - b * s;
    im[p] = a * s + b * c;
  }
}

function square(re: Float64Array, im: Float64Array | undefined, p: number): number {
  const x = re[p] as number;
  const y = im === undefined ? 0 : (im[p] as number);
  return x * x + y * y;
}
