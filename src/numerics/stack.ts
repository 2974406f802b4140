import type { Csr } from "./csr.js";

/**
 * The rows of several matrices under one another.
 *
 * @param parts - matrices of `cols` columns each; none gives an empty matrix
 */
export function stackRows(parts: readonly Csr[], cols: number): Csr {
  const only = parts[0];
  if (parts.length === 1 && only !== undefined) return only;
  const rows = parts.reduce((sum, part) => sum + part.rows, 0);
  const total = parts.reduce((sum, part) => sum + part.re.length, 0);
  const ptr = new Int32Array(rows + 1);
  const col = new Int32Array(total);
  const re = new Float64Array(total);
  const im = parts.some((part) => part.im !== undefined) ? new Float64Array(total) : undefined;
  let row = 0;
  let at = 0;
  for (const part of parts) {
    col.set(part.col, at);
    re.set(part.re, at);
    if (im !== undefined && part.im !== undefined) im.set(part.im, at);
    for (let r = 0; r < part.rows; r++) ptr[++row] = at + (part.ptr[r + 1] as number);
    at += part.re.length;
  }
  return { rows, cols, ptr, col, re, im };
}
