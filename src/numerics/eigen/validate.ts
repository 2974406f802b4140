import { GoodBasisError } from "../../errors.js";
import { UNIT_ROUNDOFF } from "../rounding.js";
import type { EigenWindow, UpperTriangle } from "./types.js";

/**
 * Refuses arrays that are not `count` square matrices of order n.
 *
 * @throws GoodBasisError `shape`
 */
export function requireShape(
  where: string,
  n: number,
  count: number,
  re: Float64Array,
  im: Float64Array | undefined,
): void {
  const length = count * n * n;
  if (!(re instanceof Float64Array) || !(im === undefined || im instanceof Float64Array)) {
    throw new GoodBasisError(
      "shape",
      `${where}: expected the entries as Float64Array, real and imaginary parts apart, got another kind of value; ` +
        "pass Float64Array.from(rows.flat()), or operator.dense().re and .im",
    );
  }
  if (Number.isInteger(n) && n >= 0 && re.length === length && (im === undefined || im.length === length)) return;
  throw new GoodBasisError(
    "shape",
    `${where}: expected arrays of n² numbers${count === 1 ? "" : ` for each of ${count} matrices`} for n = ${n}, got ` +
      `${re.length}${im === undefined ? "" : ` and ${im.length}`}; pass the full square, row by row`,
    { n, count, re: re.length, im: im?.length },
  );
}

/** Rows and columns of a square tile of the check: two tiles, one from each triangle, stay in the first-level cache. */
const TILE = 16;

/**
 * Refuses a matrix with NaN or infinite entries; with `"check"` also one whose upper triangle, or diagonal, is not the
 * conjugate of the lower one to within n units roundoff of the largest entry.
 *
 * One pass in the ordinary case: a matrix whose triangles agree to the last bit is recognised without its largest entry.
 *
 * @param upper - `"check"`, or `"ignore"` to look at the lower triangle alone
 * @param at - index of the first entry of the matrix
 * @throws GoodBasisError `not-finite` or `not-hermitian`, with row and column
 */
export function requireHermitian(
  where: string,
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  upper: UpperTriangle,
  at = 0,
): void {
  const check = upper === "check";
  if (check ? isExactlyHermitian(n, re, im, at) : hasOnlyFinite(n, re, im, at)) return;
  refuseInfinite(where, n, re, im, check, at);
  if (check) refuseUpper(where, n, re, im, at);
}

/** Whether the lower triangle is finite. */
function hasOnlyFinite(n: number, re: Float64Array, im: Float64Array | undefined, at: number): boolean {
  // 0 · x is NaN where x is not finite. Two sums, so that neither addition waits for the other.
  let probe = 0;
  let probeIm = 0;
  for (let i = 0; i < n; i++) {
    const row = at + i * n;
    if (im === undefined) for (let k = row; k <= row + i; k++) probe += 0 * (re[k] as number);
    else {
      for (let k = row; k <= row + i; k++) {
        probe += 0 * (re[k] as number);
        probeIm += 0 * (im[k] as number);
      }
    }
  }
  return probe + probeIm === 0;
}

/** Whether the matrix is finite and its upper triangle exactly the conjugate of the lower one. */
function isExactlyHermitian(n: number, re: Float64Array, im: Float64Array | undefined, at: number): boolean {
  return isMirrored(n, re, 1, at) && (im === undefined || isMirrored(n, im, -1, at));
}

/**
 * Whether m_ji = sign · m_ij throughout, and finite; tile by tile, since the one runs along rows and the other along columns.
 */
function isMirrored(n: number, m: Float64Array, sign: number, at: number): boolean {
  // NaN is unequal to itself; 0 · x is NaN where x is infinite.
  let probe = 0;
  for (let i0 = 0; i0 < n; i0 += TILE) {
    const i1 = Math.min(n, i0 + TILE);
    for (let j0 = 0; j0 <= i0; j0 += TILE) {
      for (let i = i0; i < i1; i++) {
        const row = at + i * n;
        const j1 = Math.min(i + 1, j0 + TILE);
        for (let j = j0, l = at + j0 * n + i; j < j1; j++, l += n) {
          const x = m[row + j] as number;
          if (x !== sign * (m[l] as number)) return false;
          probe += 0 * x;
        }
      }
    }
  }
  return probe === 0;
}

/** Names the first entry that is NaN or infinite, in the lower triangle or in the whole matrix. */
function refuseInfinite(
  where: string,
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  whole: boolean,
  at: number,
): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < (whole ? n : i + 1); j++) {
      const k = at + i * n + j;
      if (Number.isFinite(re[k]) && (im === undefined || Number.isFinite(im[k]))) continue;
      throw new GoodBasisError(
        "not-finite",
        `${where}: entry (${i}, ${j}) is ${re[k]}${im === undefined ? "" : ` + ${im[k]} i`}; ` +
          "only finite entries have an eigenproblem",
        { row: i, col: j },
      );
    }
  }
}

/** Names the first pair of entries, or the diagonal one, that is further from conjugate than rounding explains. */
function refuseUpper(where: string, n: number, re: Float64Array, im: Float64Array | undefined, at: number): void {
  let largest = 0;
  for (let k = at; k < at + n * n; k++) {
    largest = Math.max(largest, Math.abs(re[k] as number), im === undefined ? 0 : Math.abs(im[k] as number));
  }
  const tolerance = n * UNIT_ROUNDOFF * largest;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const k = at + i * n + j;
      const l = at + j * n + i;
      const x = Math.abs((re[k] as number) - (re[l] as number));
      const y = im === undefined ? 0 : Math.abs((im[k] as number) + (im[l] as number));
      if (x <= tolerance && y <= tolerance) continue;
      throw new GoodBasisError(
        "not-hermitian",
        `${where}: entries (${i}, ${j}) and (${j}, ${i}) are not conjugate: they differ by ${Math.max(x, y)}, ` +
          `${tolerance} is allowed; pass (A + A†) / 2 if A is meant to be Hermitian, or { upper: "ignore" } to let the ` +
          "lower triangle stand for the matrix",
        { row: i, col: j },
      );
    }
  }
}

/**
 * Refuses a window that is none.
 *
 * @throws GoodBasisError `option`
 */
export function requireWindow(
  where: string,
  n: number,
  { from = 0, to = n, low = Number.NEGATIVE_INFINITY, high = Number.POSITIVE_INFINITY }: EigenWindow,
): void {
  const indices = Number.isInteger(from) && Number.isInteger(to) && from >= 0 && to <= n && from <= to;
  if (indices && low <= high) return;
  throw new GoodBasisError(
    "option",
    `${where}: expected a window with 0 ≤ from ≤ to ≤ ${n} and low ≤ high, got from ${from}, to ${to}, low ${low}, ` +
      `high ${high}; leave out what is not to restrict`,
    { from, to, low, high },
  );
}
