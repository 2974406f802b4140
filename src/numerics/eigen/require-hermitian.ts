import { GoodBasisError } from "../../errors.js";
import { UNIT_ROUNDOFF } from "../rounding.js";
import type { UpperTriangle } from "./types.js";

/** Distance from Hermitian that is accepted, in n u times the largest row: a part of the 20 n u that are promised. */
const ALLOWED = 8;

/** Rows and columns of a square tile of the check: two tiles, one from each triangle, stay in the first-level cache. */
const TILE = 16;

/**
 * Refuses a matrix with NaN or infinite entries; with `"check"` also one that is further from Hermitian than
 * {@link ALLOWED} n u times the largest Euclidean norm of a row.
 *
 * The distance is that from the Hermitian matrix that the lower triangle stands for, which is the one solved, in the Frobenius
 * norm. The norm of a row is at most ‖A‖₂; so the residual of A exceeds that of the matrix solved by at most
 * {@link ALLOWED} n u ‖A‖₂, and both together stay within the 20 n u that are promised.
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

/** Refuses a matrix whose triangles are further from conjugate than rounding explains, naming the pair that is furthest. */
function refuseUpper(where: string, n: number, re: Float64Array, im: Float64Array | undefined, at: number): void {
  // In units of the largest entry, so that no square overflows or is lost.
  const unit = largestPart(re, im, at, at + n * n) || 1;
  let norm = 0;
  let defect = 0;
  let furthest = 0;
  let [row, col] = [0, 0];
  for (let i = 0; i < n; i++) {
    let square = 0;
    for (let j = 0; j < n; j++) {
      const k = at + i * n + j;
      const [x, y] = [(re[k] as number) / unit, im === undefined ? 0 : (im[k] as number) / unit];
      square += x * x + y * y;
      if (j > i) continue;
      const l = at + j * n + i;
      const p = x - (re[l] as number) / unit;
      // On the diagonal the imaginary part itself: the solver takes it as zero.
      const q = im === undefined || i === j ? y : y + (im[l] as number) / unit;
      const pair = p * p + q * q;
      defect += pair;
      if (pair <= furthest) continue;
      furthest = pair;
      [row, col] = [i, j];
    }
    norm = Math.max(norm, square);
  }
  const allowed = ALLOWED * n * UNIT_ROUNDOFF * Math.sqrt(norm);
  if (Math.sqrt(defect) <= allowed) return;
  throw new GoodBasisError(
    "not-hermitian",
    `${where}: entries (${row}, ${col}) and (${col}, ${row}) are not conjugate: they differ by ${Math.sqrt(furthest) * unit}, and ` +
      `the triangles by ${Math.sqrt(defect) * unit} in the Frobenius norm, where ${allowed * unit} is allowed; pass (A + A†) / 2 if ` +
      'A is meant to be Hermitian, or { upper: "ignore" } to let the lower triangle stand for the matrix',
    { row, col },
  );
}

/** Largest modulus of a real or imaginary part. */
function largestPart(re: Float64Array, im: Float64Array | undefined, from: number, to: number): number {
  let largest = 0;
  for (let k = from; k < to; k++) {
    largest = Math.max(largest, Math.abs(re[k] as number), im === undefined ? 0 : Math.abs(im[k] as number));
  }
  return largest;
}
