import type { Complex } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, roundDown, roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { euclidean, frobenius, maxPart } from "../numerics/sparse.js";
import { moduliAbove, type Uncertain } from "./radius.js";

/**
 * An upper bound on the 2-norm of the matrix of moduli: the smaller of √(‖A‖₁ ‖A‖∞) and ‖A‖_F (Higham, Accuracy and Stability
 * of Numerical Algorithms, §6.2), rounded up.
 */
export function normBound(csr: Csr): number {
  return boundFrom(csr, moduliAbove(csr), frobenius(csr));
}

/**
 * A lower bound on ‖B‖₂ for B = A − c: with e the ket of the row r of largest norm and x = B†e, ‖B‖ ≥ ‖B x‖/‖x‖ ≥ ‖x‖, one step
 * of the power method on B B†. The largest row alone falls short by up to √n (all ones); the step makes up for it there.
 *
 * The computed image is in error by at most √2 γ_{m+4} ‖|B||x|‖ for rows of m entries (complex products, Higham ch. 3), each
 * product may underflow, and x counts as the very numbers that it holds.
 *
 * @param norm - an upper bound on the 2-norm of the matrix of moduli |A|
 * @param c - a multiple of the identity that is taken off first
 */
export function normFloor(csr: Csr, norm: number, c: Complex = { re: 0, im: 0 }): number {
  const { rows, ptr, col } = csr;
  const size = Math.abs(c.re) + Math.abs(c.im);
  const unit = Math.max(maxPart(csr), size);
  if (unit === 0 || !Number.isFinite(norm)) return 0;
  const cRe = c.re / unit;
  const cIm = c.im / unit;
  const re = (e: number): number => (csr.re[e] as number) / unit;
  const im = (e: number): number => (csr.im === undefined ? 0 : (csr.im[e] as number) / unit);
  let heaviest = 0;
  let square = 0;
  let longest = 0;
  for (let r = 0; r < rows; r++) {
    let sum = 0;
    let x = -cRe;
    let y = -cIm;
    const end = ptr[r + 1] as number;
    for (let e = ptr[r] as number; e < end; e++) {
      if (col[e] === r) {
        x += re(e);
        y += im(e);
      } else sum += re(e) ** 2 + im(e) ** 2;
    }
    sum += x * x + y * y;
    longest = Math.max(longest, end - (ptr[r] as number));
    if (sum <= square) continue;
    square = sum;
    heaviest = r;
  }
  if (square === 0) return 0;
  const xRe = new Float64Array(csr.cols);
  const xIm = new Float64Array(csr.cols);
  for (let e = ptr[heaviest] as number; e < (ptr[heaviest + 1] as number); e++) {
    xRe[col[e] as number] = re(e);
    xIm[col[e] as number] = -im(e);
  }
  xRe[heaviest] = (xRe[heaviest] as number) - cRe;
  xIm[heaviest] = (xIm[heaviest] as number) + cIm;
  let image = 0;
  for (let r = 0; r < rows; r++) {
    const u = xRe[r] as number;
    const v = xIm[r] as number;
    let x = cIm * v - cRe * u;
    let y = -cRe * v - cIm * u;
    for (let e = ptr[r] as number; e < (ptr[r + 1] as number); e++) {
      const k = col[e] as number;
      x += re(e) * (xRe[k] as number) - im(e) * (xIm[k] as number);
      y += re(e) * (xIm[k] as number) + im(e) * (xRe[k] as number);
    }
    image += x * x + y * y;
  }
  const row = Math.sqrt(square);
  // entries were divided by the largest part: one rounding each, and what is lost to underflow there is far below 2^−500
  const lost = (Math.SQRT2 * gamma(longest + 8) * (norm + size)) / unit + (csr.col.length + rows) * 2 ** -500;
  const operations = rows + csr.cols + 2 * longest + 16;
  const least = Math.max(row - 4 * UNIT_ROUNDOFF * (row + size / unit), Math.sqrt(image) / row - lost);
  return unit * roundDown(least, operations);
}

/** The mean of the diagonal, tr A/n; not rounded in any direction. */
export function diagonalMean(csr: Csr): Complex {
  let re = 0;
  let im = 0;
  for (let r = 0; r < csr.rows; r++) {
    for (let e = csr.ptr[r] as number; e < (csr.ptr[r + 1] as number); e++) {
      if (csr.col[e] !== r) continue;
      re += (csr.re[e] as number) / csr.rows;
      im += csr.im === undefined ? 0 : (csr.im[e] as number) / csr.rows;
    }
  }
  return { re, im };
}

/** An upper bound on the 2-norm of the matrix of radii. */
export function errorBound(matrix: Uncertain, norm: number): number {
  const { csr, radius } = matrix;
  if (radius === "exact" || norm + csr.col.length === 0) return 0;
  if (radius === "default") return norm === 0 ? 0 : roundUp(UNIT_ROUNDOFF * norm) + csr.rows * UNDERFLOW;
  return boundFrom(csr, radius, euclidean(radius));
}

/** From numbers attached to the entries that are not negative, and the root of the sum of their squares. */
function boundFrom({ rows, cols, ptr, col }: Csr, values: Float64Array, euclid: number): number {
  const columns = new Float64Array(cols);
  let row = 0;
  for (let r = 0; r < rows; r++) {
    let sum = 0;
    const end = ptr[r + 1] as number;
    for (let e = ptr[r] as number; e < end; e++) {
      const x = values[e] as number;
      const c = col[e] as number;
      sum += x;
      columns[c] = (columns[c] as number) + x;
    }
    if (sum > row) row = sum;
  }
  let column = 0;
  for (let c = 0; c < cols; c++) if ((columns[c] as number) > column) column = columns[c] as number;
  if (column === 0) return 0;
  // Equal ones, as of any Hermitian matrix, need no root: the bound then scales with the unit to the last bit. Sums of at most
  // n terms; the Frobenius sum has one for each entry, which pairwise bounds of n² would exceed.
  const holder = roundUp(column === row ? column : Math.sqrt(column) * Math.sqrt(row), rows + cols + 8);
  return Math.min(holder, roundUp(euclid, 2 * col.length + 16));
}
