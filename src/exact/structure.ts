import type { ExactRows } from "./rows.js";
import type { Surd } from "./surd.js";

/** Whether nothing stands off the diagonal. */
export function isDiagonalRows({ ptr, col }: ExactRows): boolean {
  for (let row = 0; row + 1 < ptr.length; row++) {
    for (let e = ptr[row] as number; e < (ptr[row + 1] as number); e++) if (col[e] !== row) return false;
  }
  return true;
}

/** Whether no row and no column holds two entries. */
export function isMonomialRows({ ptr, col }: ExactRows): boolean {
  for (let row = 0; row + 1 < ptr.length; row++) if ((ptr[row + 1] as number) - (ptr[row] as number) > 1) return false;
  return new Set(col).size === col.length;
}

/**
 * Whether A equals A†.
 *
 * @param columns - the transpose of `rows`
 */
export function isHermitianRows(rows: ExactRows, columns: ExactRows): boolean {
  if (!rows.ptr.every((p, k) => p === columns.ptr[k]) || !rows.col.every((c, e) => c === columns.col[e])) return false;
  const [a, b] = [rows.entries.surds, columns.entries.surds];
  return a.every((x, e) => x.equals((b[e] as Surd).conjugate()));
}
