import { GoodBasisError } from "../errors.js";
import type { Csr } from "../numerics/csr.js";
import { roundUp } from "../numerics/rounding.js";
import { Entries, type WholeEntries } from "./entries.js";
import type { ExactRows } from "./rows.js";
import { Surd } from "./surd.js";

/** Sparse rows of doubles, and how far each stored entry may be from the exact one. */
export interface FloatingRows {
  /** The rounded entries. */
  readonly csr: Csr;
  /** One bound on the modulus of the error for each stored entry; `"exact"` where every entry is a double. */
  readonly radius: Float64Array | "exact";
}

/** The exact rows as doubles, each part correctly rounded: its error is at most half a unit in the last place, or none. */
export function floatingOf(where: string, n: number, rows: ExactRows): FloatingRows {
  const count = rows.col.length;
  const re = new Float64Array(count);
  const im = new Float64Array(count);
  const radius = new Float64Array(count);
  for (const [k, x] of rows.entries.surds.entries()) {
    const value = x.toComplex();
    if (!Number.isFinite(value.re) || !Number.isFinite(value.im)) {
      const message = `${where}: ${x.text()} is beyond the range of doubles; scale the operator by a unit first`;
      throw new GoodBasisError("not-finite", message, { value: x.text() });
    }
    re[k] = value.re;
    im[k] = value.im;
    const [byRe, byIm] = [errorOf(x.re, value.re), errorOf(x.im, value.im)];
    radius[k] = byRe === 0 || byIm === 0 ? byRe + byIm : roundUp(byRe + byIm);
  }
  const real = im.every((y) => y === 0);
  const csr = { rows: n, cols: n, ptr: rows.ptr, col: rows.col, re, im: real ? undefined : im };
  return { csr, radius: radius.every((r) => r === 0) ? "exact" : radius };
}

/** A bound on the rounding error of a correctly rounded number; 0 where the double is the number itself. */
function errorOf(x: Surd, rounded: number): number {
  if (x.isRational && Surd.from(rounded).equals(x)) return 0;
  // half a unit in the last place, and for subnormal numbers the whole smallest double instead of its half
  return Math.max(Math.abs(rounded) * 2 ** -53, Number.MIN_VALUE);
}

/** Finest common denominator that is looked for, a power of two. */
const LARGEST_DENOMINATOR = 2 ** 24;

/** Doubles as whole numbers over one small power of two; undefined where they are not that, or one of them is zero. */
function wholeOf({ re, im }: Csr): WholeEntries | undefined {
  let den = 1;
  for (let e = 0; e < re.length; e++) {
    const [x, y] = [re[e] as number, im === undefined ? 0 : (im[e] as number)];
    if (x === 0 && y === 0) return undefined;
    while (!Number.isInteger(x * den) || !Number.isInteger(y * den)) {
      if (den === LARGEST_DENOMINATOR) return undefined;
      den *= 2;
    }
  }
  // + 0 turns −0 into 0
  const scaled = (list: Float64Array): Float64Array => list.map((x) => x * den + 0);
  const whole = { re: scaled(re), im: im?.some((y) => y !== 0) ? scaled(im) : undefined, den };
  const safe = (list: Float64Array): boolean => list.every((x) => Number.isSafeInteger(x));
  return safe(whole.re) && (whole.im === undefined || safe(whole.im)) ? whole : undefined;
}

/**
 * Sparse rows of doubles as exact dyadic numbers; zeros are dropped. Whole numbers over a small power of two stay machine
 * integers.
 *
 * @throws GoodBasisError `not-finite`
 */
export function exactRowsOf(csr: Csr): ExactRows {
  const whole = wholeOf(csr);
  if (whole !== undefined) return { ptr: csr.ptr, col: csr.col, entries: Entries.ofWhole(whole) };
  const ptr = new Int32Array(csr.rows + 1);
  const col: number[] = [];
  const values: Surd[] = [];
  for (let row = 0; row < csr.rows; row++) {
    for (let e = csr.ptr[row] as number; e < (csr.ptr[row + 1] as number); e++) {
      const [re, im] = [csr.re[e] as number, csr.im === undefined ? 0 : (csr.im[e] as number)];
      const value = im === 0 ? Surd.from(re) : Surd.from({ re, im });
      if (value.isZero) continue;
      col.push(csr.col[e] as number);
      values.push(value);
    }
    ptr[row + 1] = col.length;
  }
  return { ptr, col: Int32Array.from(col), entries: Entries.ofSurds(values) };
}
