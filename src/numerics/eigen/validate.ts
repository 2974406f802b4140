import { GoodBasisError } from "../../errors.js";
import { UNIT_ROUNDOFF } from "../rounding.js";
import type { EigenWindow } from "./types.js";

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
  if (Number.isInteger(n) && n >= 0 && re.length === length && (im === undefined || im.length === length)) return;
  throw new GoodBasisError(
    "shape",
    `${where}: expected arrays of n² numbers${count === 1 ? "" : ` for each of ${count} matrices`} for n = ${n}, got ` +
      `${re.length}${im === undefined ? "" : ` and ${im.length}`}; pass the full square, row by row`,
    { n, count, re: re.length, im: im?.length },
  );
}

/**
 * Refuses NaN and infinite entries in the lower triangle.
 *
 * @param at - index of the first entry of the matrix
 * @throws GoodBasisError `not-finite`, with row and column
 */
export function requireFinite(where: string, n: number, re: Float64Array, im: Float64Array | undefined, at = 0): void {
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
  if (probe + probeIm === 0) return;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
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

/**
 * Refuses a matrix whose upper triangle, or diagonal, is not the conjugate of the lower one to within n units roundoff of
 * the largest entry.
 *
 * @param at - index of the first entry of the matrix
 * @throws GoodBasisError `not-hermitian`, with row and column; also where an entry of the upper triangle is NaN
 */
export function refuseUpper(where: string, n: number, re: Float64Array, im: Float64Array | undefined, at = 0): void {
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
          `${tolerance} is allowed; pass (A + A†) / 2 if A is meant to be Hermitian`,
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
