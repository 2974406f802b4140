import { GoodBasisError } from "../../errors.js";
import type { Csr } from "../csr.js";
import { gamma, roundUp, UNDERFLOW } from "../rounding.js";
import { diagonalOf } from "../sparse/build.js";
import { completeAntiHermitian, isHermitian } from "../sparse/hermitian.js";
import { commutator, commutatorUpper, multiply } from "../sparse/product.js";
import type { Bounded } from "./types.js";

/**
 * The product AB of two sparse matrices with a bound on its rounding, in plain TypeScript.
 *
 * The bound: entry (i, j) is a sum of at most m_i products, m_i the number of entries in row i of A. A real one is off by
 * at most γ_{m_i} Σ |a_ik| |b_kj|, a complex one by √2 γ_{m_i + 1} Σ |a_ik| |b_kj| (one rounding more in each product;
 * |re re'| + |im im'| and |re im'| + |im re'| are each at most |a| |b|). Over a row, the Euclidean norm of Σ_k |a_ik| |b_kj|
 * is at most Σ_k |a_ik| ρ_k with ρ_k the norm of row k of B. Underflow: at most 2 m_i products a part, each off by half
 * the smallest positive number η, doubled at most by additions: 3 m_i η an entry. The kernels for resident matrices
 * (`wasm/assembly/sparse.ts`) use the same bound.
 *
 * @param a - left factor
 * @param b - right factor, with as many rows as A has columns
 * @throws GoodBasisError `shape` when the factors do not fit
 */
export function productSparse(a: Csr, b: Csr): Bounded<Csr> {
  if (a.cols !== b.rows) throw shapeError("product", a, b);
  const value = multiply(a, b);
  const norms = rowNorms(b);
  const bound = frobeniusBound(
    a.rows,
    complexPair(a, b),
    (row) => weightedRow(a, row, norms),
    (row) => rowLength(a, row),
  );
  return { value, error: finishBound(bound, a, b, value) };
}

/**
 * The commutator AB − BA of two sparse square matrices with a bound on its rounding, in plain TypeScript. Where both are
 * exactly Hermitian only the upper triangle is formed, and the result is exactly anti-Hermitian.
 *
 * The bound is that of {@link productSparse} for the joint sum: m_i counts the entries of row i of A and of B, the moduli
 * are Σ |a_ik| |b_kj| + |b_ik| |a_kj|. Where one matrix is diagonal an entry is (a_i − a_j) b_ij: two roundings (three if
 * complex) times at most (|a_i| + |a_j|) |b_ij|, which the same expression covers, since m_i is then at least two (or a_i is
 * zero and nothing is rounded in the difference); a difference that overflows makes the bound infinite.
 *
 * Where the lower triangle is the adjoint of the upper one, so is its error, and the same expression covers it: an entry (i, j)
 * has at most as many products as column j of B and of A have entries, which are those of row j, for the matrices are
 * Hermitian; its moduli are those of (j, i), for the same reason. So |error_ji| = |error_ij| is at most what row j allows. What
 * rounding left in the real parts of the diagonal is put to the zero that is exact.
 *
 * @param a - first matrix
 * @param b - second matrix, of the same order
 * @throws GoodBasisError `shape` when the matrices are not square of one order
 */
export function commutatorSparse(a: Csr, b: Csr): Bounded<Csr> {
  if (a.rows !== a.cols || b.rows !== b.cols || a.rows !== b.rows) throw shapeError("commutator", a, b);
  const diagonal = diagonalOf(a) !== undefined || diagonalOf(b) !== undefined;
  const half = !diagonal && isHermitian(a) && isHermitian(b);
  const value = half ? completeAntiHermitian(commutatorUpper(a, b)) : commutator(a, b);
  const normsA = rowNorms(a);
  const normsB = rowNorms(b);
  const bound = frobeniusBound(
    a.rows,
    complexPair(a, b),
    (row) => weightedRow(a, row, normsB) + weightedRow(b, row, normsA),
    (row) => rowLength(a, row) + rowLength(b, row),
  );
  const overflows = diagonal && !isEverywhereFinite(value);
  return { value, error: overflows ? Number.POSITIVE_INFINITY : finishBound(bound, a, b, value) };
}

/** Whether every entry is finite; 0 · x is NaN where x is not. */
function isEverywhereFinite({ re, im }: Csr): boolean {
  let probe = 0;
  for (let e = 0; e < re.length; e++) probe += 0 * (re[e] as number);
  if (im !== undefined) for (let e = 0; e < im.length; e++) probe += 0 * (im[e] as number);
  return probe === 0;
}

const complexPair = (a: Csr, b: Csr): boolean => a.im !== undefined || b.im !== undefined;

const rowLength = (a: Csr, row: number): number => (a.ptr[row + 1] as number) - (a.ptr[row] as number);

function shapeError(where: string, a: Csr, b: Csr): GoodBasisError {
  return new GoodBasisError(
    "shape",
    `${where}: a matrix of ${a.rows} × ${a.cols} and one of ${b.rows} × ${b.cols} do not fit; ` +
      `${where === "product" ? "the left one needs as many columns as the right one has rows" : "pass squares of one order"}`,
    { left: [a.rows, a.cols], right: [b.rows, b.cols] },
  );
}

/** Euclidean norms of the rows; squares that underflow are made up for, so that only rounding is left to account for. */
function rowNorms(a: Csr): Float64Array {
  const norms = new Float64Array(a.rows);
  for (let row = 0; row < a.rows; row++) {
    let sum = 0;
    const end = a.ptr[row + 1] as number;
    for (let e = a.ptr[row] as number; e < end; e++) {
      const x = a.re[e] as number;
      const y = a.im === undefined ? 0 : (a.im[e] as number);
      sum += x * x + y * y;
    }
    norms[row] = Math.sqrt(sum + 2 * rowLength(a, row) * UNDERFLOW);
  }
  return norms;
}

/** Σ_k |a_ik| ρ_k. */
function weightedRow(a: Csr, row: number, norms: Float64Array): number {
  let sum = 0;
  const end = a.ptr[row + 1] as number;
  for (let e = a.ptr[row] as number; e < end; e++) {
    sum += modulusAbove(a, e) * (norms[a.col[e] as number] as number);
  }
  return sum;
}

/** The modulus of entry `e`, an upper bound but for rounding; where the squares underflow, |re| + |im|. */
function modulusAbove({ re, im }: Csr, e: number): number {
  const x = re[e] as number;
  if (im === undefined) return Math.abs(x);
  const y = im[e] as number;
  const square = x * x + y * y;
  return square > SAFE_SQUARE ? Math.sqrt(square) : Math.abs(x) + Math.abs(y);
}

/** Above this a sum of two squares has lost nothing to underflow that its rounding does not cover. */
const SAFE_SQUARE = 2 ** -900;

/** What {@link finishBound} completes. */
interface RowBounds {
  /** Sum of the squares of the bounds of all rows. */
  readonly squares: number;
  /** The largest number of products in an entry. */
  readonly most: number;
}

function frobeniusBound(
  rows: number,
  complex: boolean,
  moduli: (row: number) => number,
  terms: (row: number) => number,
): RowBounds {
  let squares = 0;
  let bounded = 0;
  let most = 0;
  for (let row = 0; row < rows; row++) {
    const count = terms(row);
    const bound = (complex ? Math.SQRT2 * gamma(count + 1) : gamma(count)) * moduli(row);
    if (count > most) most = count;
    // NaN, from zero times an infinite norm, goes on and makes the bound infinite.
    if (bound === 0) continue;
    squares += bound * bound;
    bounded++;
  }
  // A square that underflows is off by half the smallest positive number at most.
  return { squares: squares + bounded * UNDERFLOW, most };
}

/**
 * The bound on the Frobenius norm from those of the rows: the roundings of the bound itself, and underflow.
 *
 * @param bound - from the rows
 * @param a - one factor; its size says how long the sums were
 * @param b - the other factor
 * @param value - the computed matrix
 */
export function finishBound(
  { squares, most }: RowBounds,
  a: Pick<Csr, "rows" | "cols">,
  b: Pick<Csr, "rows" | "cols">,
  value: { readonly col: ArrayLike<number> },
): number {
  const roundings = a.rows + 2 * most + 3 * Math.max(a.cols, b.cols) + 16;
  const error = roundUp(Math.sqrt(squares), roundings) + 3 * most * value.col.length * UNDERFLOW;
  return Number.isNaN(error) ? Number.POSITIVE_INFINITY : error;
}
