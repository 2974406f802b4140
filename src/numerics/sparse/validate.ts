import { GoodBasisError } from "../../errors.js";
import type { Csr } from "../csr.js";

/**
 * Refuses what is not a matrix in compressed sparse rows: row starts that do not ascend from zero to the number of entries,
 * columns that are out of range or do not ascend strictly within a row, lists of different lengths, entries that are not
 * finite. O(rows + entries); for what comes from outside, since the kernels read and write where the columns point.
 *
 * @param where - the function that was called
 * @param a - what it was given
 * @throws GoodBasisError `shape`, or `not-finite` for an entry
 */
export function requireCsr(where: string, a: Csr): void {
  const flaw = flawOf(a);
  if (flaw !== undefined) {
    throw new GoodBasisError(
      "shape",
      `${where}: expected a matrix in compressed sparse rows, got ${flaw}; pass operator.csr, or rows, cols, ptr, col (Int32Array), ` +
        "re and im (Float64Array) with the columns of every row ascending",
    );
  }
  const bad = firstInfinite(a);
  if (bad < 0) return;
  const { re, im } = a;
  throw new GoodBasisError(
    "not-finite",
    `${where}: stored entry ${bad}, in column ${a.col[bad]}, is ${re[bad]}${im === undefined ? "" : ` + ${im[bad]} i`}; ` +
      "pass finite entries",
    { entry: bad, col: a.col[bad] },
  );
}

/** What is wrong with the form of a matrix, or `undefined`. */
function flawOf(a: Csr): string | undefined {
  if (typeof a !== "object" || a === null) return "another kind of value";
  const { rows, cols, ptr, col, re, im } = a;
  if (!isCount(rows) || !isCount(cols)) return "rows and cols that are not whole numbers from 0 to 2^31 − 1";
  if (!(ptr instanceof Int32Array && col instanceof Int32Array)) return "ptr or col that is no Int32Array";
  if (!(re instanceof Float64Array && (im === undefined || im instanceof Float64Array))) {
    return "re or im that is no Float64Array";
  }
  if (ptr.length !== rows + 1) return `${ptr.length} row starts for ${rows} rows (one more than rows is needed)`;
  const count = col.length;
  if (re.length !== count || (im !== undefined && im.length !== count)) {
    return `${count} columns for ${re.length}${im === undefined ? "" : ` and ${im.length}`} numbers`;
  }
  if (ptr[0] !== 0 || ptr[rows] !== count) return `row starts from ${ptr[0]} to ${ptr[rows]} for ${count} entries`;
  for (let row = 0; row < rows; row++) {
    const end = ptr[row + 1] as number;
    // Below the last row start, since they ascend up to it: no entry out of range is read.
    if (end < (ptr[row] as number) || end > count) return `row starts that descend after row ${row}`;
    let previous = -1;
    for (let e = ptr[row] as number; e < end; e++) {
      const c = col[e] as number;
      if (c <= previous || c >= cols) {
        return c < 0 || c >= cols
          ? `column ${c} of ${cols} in row ${row}`
          : `row ${row} with columns that do not ascend`;
      }
      previous = c;
    }
  }
  return undefined;
}

const isCount = (n: unknown): boolean => typeof n === "number" && Number.isInteger(n) && n >= 0 && n < 2 ** 31;

/** Number of the first entry that is NaN or infinite, or −1. */
function firstInfinite({ re, im }: Csr): number {
  // 0 · x is NaN where x is not finite.
  let probe = 0;
  for (let e = 0; e < re.length; e++) probe += 0 * (re[e] as number);
  if (im !== undefined) for (let e = 0; e < im.length; e++) probe += 0 * (im[e] as number);
  if (probe === 0) return -1;
  return re.findIndex((x, e) => !Number.isFinite(x) || (im !== undefined && !Number.isFinite(im[e])));
}
