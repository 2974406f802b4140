import { modulus } from "../complex.js";
import type { Csr } from "../csr.js";

/** The modulus of entry `e`, to within 8 units roundoff; exact for a real matrix. */
function entryModulus(a: Csr, e: number): number {
  const x = a.re[e] as number;
  return a.im === undefined ? Math.abs(x) : modulus(x, a.im[e] as number);
}

/** The largest number of entries in a row. */
export function maxRowEntries(a: Csr): number {
  let most = 0;
  for (let r = 0; r < a.rows; r++) {
    const count = (a.ptr[r + 1] as number) - (a.ptr[r] as number);
    if (count > most) most = count;
  }
  return most;
}

/** The largest column sum of moduli, ‖A‖₁; not rounded up. */
export function norm1(a: Csr): number {
  return largestColumnSum(a, (e) => entryModulus(a, e));
}

/** The largest row sum of moduli, ‖A‖∞; not rounded up. */
export function normInf(a: Csr): number {
  return largestRowSum(a, (e) => entryModulus(a, e));
}

/** The largest column sum of numbers attached to the entries. */
function largestColumnSum(a: Csr, value: (e: number) => number): number {
  const sums = new Float64Array(a.cols);
  for (let e = 0; e < a.col.length; e++) {
    const c = a.col[e] as number;
    sums[c] = (sums[c] as number) + value(e);
  }
  let largest = 0;
  for (let c = 0; c < a.cols; c++) if ((sums[c] as number) > largest) largest = sums[c] as number;
  return largest;
}

/** The largest row sum of numbers attached to the entries. */
function largestRowSum(a: Csr, value: (e: number) => number): number {
  let largest = 0;
  for (let r = 0; r < a.rows; r++) {
    let sum = 0;
    const end = a.ptr[r + 1] as number;
    for (let e = a.ptr[r] as number; e < end; e++) sum += value(e);
    if (sum > largest) largest = sum;
  }
  return largest;
}

/** √(Σ x²) of a list, scaled so that no square overflows or is lost; not rounded up. */
export function euclidean(values: Float64Array): number {
  let largest = 0;
  for (let e = 0; e < values.length; e++) {
    const x = Math.abs(values[e] as number);
    if (x > largest) largest = x;
  }
  return scaledRoot(largest, values, undefined);
}

/** The Frobenius norm √(Σ |a_ij|²), scaled so that no square overflows or is lost; not rounded up. */
export function frobenius(a: Csr): number {
  return scaledRoot(maxPart(a), a.re, a.im);
}

/** The largest modulus of a real or imaginary part. */
export function maxPart(a: Csr): number {
  let largest = 0;
  for (let e = 0; e < a.re.length; e++) {
    const x = Math.abs(a.re[e] as number);
    if (x > largest) largest = x;
  }
  if (a.im === undefined) return largest;
  for (let e = 0; e < a.im.length; e++) {
    const y = Math.abs(a.im[e] as number);
    if (y > largest) largest = y;
  }
  return largest;
}

function scaledRoot(largest: number, re: Float64Array, im: Float64Array | undefined): number {
  if (largest === 0 || largest === Number.POSITIVE_INFINITY) return largest;
  // A power of two scales without rounding; numbers of ordinary size need none.
  const unit = largest > 1e-140 && largest < 1e140 ? 1 : 2 ** Math.max(-1000, Math.floor(Math.log2(largest)));
  let sum = 0;
  for (let e = 0; e < re.length; e++) {
    const x = (re[e] as number) / unit;
    sum += x * x;
  }
  if (im !== undefined) {
    for (let e = 0; e < im.length; e++) {
      const y = (im[e] as number) / unit;
      sum += y * y;
    }
  }
  return unit * Math.sqrt(sum);
}
