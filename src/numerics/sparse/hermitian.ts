import type { Csr } from "../csr.js";

/**
 * Whether a matrix equals its adjoint to the last bit, stored zeros included. O(entries); a matrix that does not is mostly
 * recognised in its first rows.
 */
export function isHermitian(a: Csr): boolean {
  const { rows, ptr, col, re, im } = a;
  if (rows !== a.cols) return false;
  // In every row, the first entry whose mirror image has not been met: left of the diagonal all have been, when its turn comes.
  const next = ptr.slice(0, rows);
  for (let row = 0; row < rows; row++) {
    const end = ptr[row + 1] as number;
    for (let e = next[row] as number; e < end; e++) {
      const c = col[e] as number;
      if (c < row) return false;
      if (c === row) {
        if (im !== undefined && im[e] !== 0) return false;
        continue;
      }
      const f = next[c] as number;
      if (f === ptr[c + 1] || col[f] !== row || re[f] !== re[e]) return false;
      if (im !== undefined && im[f] !== -(im[e] as number)) return false;
      next[c] = f + 1;
    }
  }
  return true;
}

/**
 * Both triangles of an anti-Hermitian matrix whose upper one, diagonal included, is given: U − (U without its diagonal)†. What
 * rounding left in the real parts of the diagonal is put to zero, where it belongs.
 */
export function completeAntiHermitian(upper: Csr): Csr {
  const { rows, cols, ptr: from, col: fromCol, re: fromRe, im: fromIm } = upper;
  const ptr = new Int32Array(rows + 1);
  for (let row = 0; row < rows; row++) {
    const end = from[row + 1] as number;
    ptr[row + 1] = (ptr[row + 1] as number) + end - (from[row] as number);
    for (let e = from[row] as number; e < end; e++) {
      const c = fromCol[e] as number;
      if (c !== row) ptr[c + 1] = (ptr[c + 1] as number) + 1;
    }
  }
  for (let row = 0; row < rows; row++) ptr[row + 1] = (ptr[row + 1] as number) + (ptr[row] as number);
  const length = ptr[rows] as number;
  const col = new Int32Array(length);
  const re = new Float64Array(length);
  const im = fromIm && new Float64Array(length);
  // Where the next entry of each row goes; what lies left of the diagonal has all come when the row's own turn comes.
  const next = ptr.slice(0, rows);
  for (let row = 0; row < rows; row++) {
    const end = from[row + 1] as number;
    for (let e = from[row] as number, f = next[row] as number; e < end; e++, f++) {
      const c = fromCol[e] as number;
      const x = c === row ? 0 : (fromRe[e] as number);
      const y = fromIm === undefined ? 0 : (fromIm[e] as number);
      col[f] = c;
      re[f] = x;
      if (im !== undefined) im[f] = y;
      if (c === row) continue;
      const g = next[c] as number;
      next[c] = g + 1;
      col[g] = row;
      re[g] = 0 - x;
      if (im !== undefined) im[g] = y;
    }
  }
  return { rows, cols, ptr, col, re, im };
}
