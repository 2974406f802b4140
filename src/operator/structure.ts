import { modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { diagonalCsr, frobenius, transposeOrder } from "../numerics/sparse.js";
import { uncertainAdjoint, uncertainSum } from "./arithmetic.js";
import { uncertainProduct } from "./products.js";
import { modulusAbove, radiusAt, type Uncertain } from "./radius.js";

/**
 * Relative asymmetry, in the Frobenius norm, below which a matrix counts as Hermitian, unitary or normal even where its radii
 * are smaller. It only decides what is attempted: the asymmetry itself enters every bound.
 */
export const HERMITIAN_TOLERANCE = 1e-13;

/** How far a matrix is from Hermitian. */
export interface HermitianDefect {
  /** Frobenius norm of A − A†. */
  readonly size: number;
  /** Row of the worst element, 0-based. */
  readonly row: number;
  /** Its column. */
  readonly col: number;
  /** |a_ij − a_ji*| there. */
  readonly value: number;
}

/** Whether entry `e` may be zero within its radius. */
function mayVanish(matrix: Uncertain, e: number): boolean {
  const { csr, radius } = matrix;
  if (radius instanceof Float64Array) return modulusAbove(csr, e) <= (radius[e] as number);
  return csr.re[e] === 0 && (csr.im === undefined || csr.im[e] === 0);
}

/** Whether everything off the diagonal may vanish. */
export function isDiagonal(matrix: Uncertain): boolean {
  return everyEntry(matrix.csr, (e, row, col) => row === col || mayVanish(matrix, e));
}

/** Whether no row and no column holds two entries that surely differ from zero. */
export function isMonomial(matrix: Uncertain): boolean {
  const rows = new Uint8Array(matrix.csr.rows);
  const cols = new Uint8Array(matrix.csr.cols);
  return everyEntry(matrix.csr, (e, row, col) => {
    if (mayVanish(matrix, e)) return true;
    if (rows[row] === 1 || cols[col] === 1) return false;
    rows[row] = 1;
    cols[col] = 1;
    return true;
  });
}

/** Whether every imaginary part may vanish. */
export function isReal(matrix: Uncertain): boolean {
  const { im } = matrix.csr;
  if (im === undefined) return true;
  return everyEntry(matrix.csr, (e) => Math.abs(im[e] as number) <= radiusAt(matrix, e));
}

function everyEntry(csr: Csr, test: (e: number, row: number, col: number) => boolean): boolean {
  for (let row = 0; row < csr.rows; row++) {
    const end = csr.ptr[row + 1] as number;
    for (let e = csr.ptr[row] as number; e < end; e++) if (!test(e, row, csr.col[e] as number)) return false;
  }
  return true;
}

/** Walks over the union of the patterns of A and Aᵀ: `visit(row, col, e, f)`, e the entry (row, col), f (col, row), or −1. */
function walkPairs(csr: Csr, visit: (row: number, col: number, e: number, f: number) => void): void {
  const { csr: flipped, order } = transposeOrder(csr);
  for (let row = 0; row < csr.rows; row++) {
    let e = csr.ptr[row] as number;
    let f = flipped.ptr[row] as number;
    const eEnd = csr.ptr[row + 1] as number;
    const fEnd = flipped.ptr[row + 1] as number;
    while (e < eEnd || f < fEnd) {
      const c = e < eEnd ? (csr.col[e] as number) : csr.cols;
      const d = f < fEnd ? (flipped.col[f] as number) : csr.cols;
      if (c < d) visit(row, c, e++, -1);
      else if (d < c) visit(row, d, -1, order[f++] as number);
      else visit(row, c, e++, order[f++] as number);
    }
  }
}

/** The Hermitian defect, and whether every element of A − A† is within the radii and two units roundoff. */
export function hermitianCheck(matrix: Uncertain): { defect: HermitianDefect; within: boolean } {
  const { csr } = matrix;
  if (isHermitianToTheBit(csr)) return { defect: { size: 0, row: 0, col: 0, value: 0 }, within: true };
  let row = 0;
  let col = 0;
  let value = 0;
  let within = true;
  const differences: number[] = [];
  walkPairs(csr, (r, c, e, f) => {
    const re = part(csr.re, e) - part(csr.re, f);
    const im = part(csr.im, e) + part(csr.im, f);
    if (re === 0 && im === 0) return;
    const difference = modulus(re, im);
    differences.push(difference);
    if (difference > value) {
      row = r;
      col = c;
      value = difference;
    }
    const radii = (e < 0 ? 0 : radiusAt(matrix, e)) + (f < 0 ? 0 : radiusAt(matrix, f));
    const size = Math.max(e < 0 ? 0 : modulusAbove(csr, e), f < 0 ? 0 : modulusAbove(csr, f));
    if (difference > radii + 2 * UNIT_ROUNDOFF * size) within = false;
  });
  let sum = 0;
  for (const difference of differences) sum += (difference / value) ** 2;
  return { defect: { size: value * Math.sqrt(sum), row, col, value }, within };
}

/** Whether every entry has its conjugate across the diagonal; entries of one row of Aᵀ come in the order of the rows of A. */
function isHermitianToTheBit({ rows, ptr, col, re, im }: Csr): boolean {
  const next = ptr.slice(0, rows);
  for (let r = 0; r < rows; r++) {
    const end = ptr[r + 1] as number;
    for (let e = ptr[r] as number; e < end; e++) {
      const c = col[e] as number;
      const f = next[c] as number;
      if (f >= (ptr[c + 1] as number) || col[f] !== r || re[e] !== re[f]) return false;
      if (im !== undefined && im[e] !== -(im[f] as number)) return false;
      next[c] = f + 1;
    }
  }
  return true;
}

function part(values: Float64Array | undefined, e: number): number {
  return values === undefined || e < 0 ? 0 : (values[e] as number);
}

/**
 * (A + A†)/2; the radius of an element is the larger one of the pair, plus half of its asymmetry, plus one rounding.
 */
export function hermitianPart(matrix: Uncertain): Uncertain {
  const { csr } = matrix;
  const ptr = new Int32Array(csr.rows + 1);
  const col: number[] = [];
  const re: number[] = [];
  const im: number[] = [];
  const radius: number[] = [];
  walkPairs(csr, (r, c, e, f) => {
    const x = part(csr.re, e);
    const y = part(csr.im, e);
    const u = part(csr.re, f);
    const v = part(csr.im, f);
    const re2 = x / 2 + u / 2;
    const im2 = y / 2 - v / 2;
    const own = Math.max(e < 0 ? 0 : radiusAt(matrix, e), f < 0 ? 0 : radiusAt(matrix, f));
    const asymmetry = modulus(x - u, y + v) / 2;
    const rounding = x === u && y === -v ? 0 : 2 * UNIT_ROUNDOFF * modulus(re2, im2);
    col.push(c);
    re.push(re2);
    im.push(im2);
    radius.push(asymmetry + rounding === 0 ? own : roundUp(own + asymmetry + rounding, 16));
    ptr[r + 1] = col.length;
  });
  // A row without any entry was not visited.
  for (let r = 0; r < csr.rows; r++) if (ptr[r + 1] === 0) ptr[r + 1] = ptr[r] as number;
  const values = csr.im === undefined ? undefined : new Float64Array(im);
  return {
    csr: { rows: csr.rows, cols: csr.cols, ptr, col: new Int32Array(col), re: new Float64Array(re), im: values },
    radius: new Float64Array(radius),
  };
}

/** The size of a defect in the Frobenius norm, and whether every element of it may vanish. */
export interface Defect {
  readonly size: number;
  readonly within: boolean;
}

function defectOf(difference: Uncertain): Defect {
  return { size: frobenius(difference.csr), within: everyEntry(difference.csr, (e) => mayVanish(difference, e)) };
}

/** A A† − 1. */
export function unitaryCheck(matrix: Uncertain): Defect {
  const product = uncertainProduct(matrix, uncertainAdjoint(matrix));
  const one = diagonalCsr(new Float64Array(matrix.csr.rows).fill(1));
  return defectOf(uncertainSum(product, { csr: one, radius: "exact" }, -1));
}

/** A A† − A† A. */
export function normalCheck(matrix: Uncertain): Defect {
  const dagger = uncertainAdjoint(matrix);
  return defectOf(uncertainSum(uncertainProduct(matrix, dagger), uncertainProduct(dagger, matrix), -1));
}

/**
 * Squared lengths of rows and columns with a bound on the error of each: enough to see without any product that most matrices
 * are neither unitary nor normal.
 */
export function lengths(matrix: Uncertain): { rows: Float64Array; cols: Float64Array; error: Float64Array } {
  const { csr } = matrix;
  const rows = new Float64Array(csr.rows);
  const cols = new Float64Array(csr.cols);
  const error = new Float64Array(csr.rows);
  const slack = 4 * (csr.rows + 8) * UNIT_ROUNDOFF;
  everyEntry(csr, (e, row, col) => {
    const size = modulusAbove(csr, e);
    const radius = radiusAt(matrix, e);
    const square = size * size;
    const spread = radius * (2 * size + radius) + slack * square;
    rows[row] = (rows[row] as number) + square;
    cols[col] = (cols[col] as number) + square;
    error[row] = (error[row] as number) + spread;
    error[col] = (error[col] as number) + spread;
    return true;
  });
  return { rows, cols, error };
}

/** The connected parts: part number of each ket, numbered by their first ket, and their number. */
export function connectedParts(matrix: Uncertain): { components: Int32Array; count: number } {
  const n = matrix.csr.rows;
  const parent = new Int32Array(n);
  for (let k = 0; k < n; k++) parent[k] = k;
  const root = (k: number): number => {
    let at = k;
    while (parent[at] !== at) {
      parent[at] = parent[parent[at] as number] as number;
      at = parent[at] as number;
    }
    return at;
  };
  everyEntry(matrix.csr, (e, row, col) => {
    if (row === col || mayVanish(matrix, e)) return true;
    const a = root(row);
    const b = root(col);
    if (a < b) parent[b] = a;
    else if (b < a) parent[a] = b;
    return true;
  });
  const components = new Int32Array(n);
  let count = 0;
  for (let k = 0; k < n; k++) {
    const first = root(k);
    components[k] = first === k ? count++ : (components[first] as number);
  }
  return { components, count };
}
