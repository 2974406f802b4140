import { GoodBasisError } from "../errors.js";
import type { Dense } from "./dense.js";
import { applyReflectorBlocks, applyReflectors } from "./eigen/back-transform.js";
import { divideAndConquer, solveLeaf } from "./eigen/divide-and-conquer.js";
import { eigen2 } from "./eigen/order-two.js";
import { PRODUCT_SCRATCH } from "./eigen/packed-product.js";
import type { Tridiagonal } from "./eigen/tridiagonal.js";
import { tridiagonaliseComplex } from "./eigen/tridiagonalise-complex.js";
import { tridiagonaliseReal } from "./eigen/tridiagonalise-real.js";
import { UNIT_ROUNDOFF } from "./rounding.js";

/** All eigenpairs of a Hermitian matrix. Neither signs, phases nor bases of degenerate levels are normalised. */
export interface HermitianEigen {
  /** Dimension. */
  readonly n: number;
  /** The n eigenvalues, ascending. */
  readonly values: Float64Array;
  /** Row k (n numbers from k n on) is the eigenvector of `values[k]`, A v = values[k] v; real parts. */
  readonly re: Float64Array;
  /** Imaginary parts in the same order; absent for a real matrix. */
  readonly im: Float64Array | undefined;
}

/** Sizes at which the algorithm changes; they alter speed, not what is promised. */
export interface EigenTuning {
  /** Tridiagonal blocks up to this order go to implicit QL, larger ones are divided. At least 1. */
  readonly leaf: number;
  /** From this order on, reflectors are applied in blocks. */
  readonly blockedFrom: number;
  /** Reflectors in a block. At least 1. */
  readonly blockWidth: number;
}

/** The measured defaults of {@link EigenTuning}. */
export const EIGEN_TUNING: EigenTuning = { leaf: 32, blockedFrom: 96, blockWidth: 32 };

/**
 * All eigenvalues and orthonormal eigenvectors of a real symmetric or complex Hermitian matrix.
 *
 * Residual and loss of orthogonality are a small multiple of n u ‖A‖ and n u, u = 2^−53, whatever the spectrum; small
 * eigenvalues are not accurate relative to themselves. The same input gives the same output, bit for bit.
 *
 * Scaling by a power of two; reduction by reflectors (Householder, J. ACM 5, 339 (1958)); implicit QL (Bowdler, Martin,
 * Reinsch and Wilkinson, Numer. Math. 11, 293 (1968)) or, for larger orders, divide and conquer (Cuppen, Numer. Math.
 * 36, 177 (1981); Gu and Eisenstat, SIAM J. Matrix Anal. Appl. 16, 172 (1995)).
 *
 * @param n - dimension, zero allowed
 * @param re - row-major n × n, real parts; only the lower triangle is read, nothing is changed
 * @param im - imaginary parts, those of the diagonal taken as zero; absent for a real symmetric matrix
 * @returns eigenvalues ascending, eigenvectors as rows; `im` is absent exactly where it was absent in the input
 * @throws GoodBasisError `shape` when an array has not n² numbers; `not-finite` when an entry of the lower triangle is
 * NaN or infinite, or an eigenvalue lies beyond the largest double; `no-convergence` when an iteration exceeds its
 * bound
 */
export function hermitianEigen(n: number, re: Float64Array, im: Float64Array | undefined): HermitianEigen {
  return hermitianEigenTuned(n, re, im, EIGEN_TUNING);
}

/**
 * {@link hermitianEigen} with its thresholds as an argument, so that small matrices can reach every branch.
 *
 * @param n - dimension
 * @param re - as there
 * @param im - as there
 * @param tuning - the thresholds
 * @throws as there
 * @internal
 */
export function hermitianEigenTuned(
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  tuning: EigenTuning,
): HermitianEigen {
  const largest = largestEntry(n, re, im);
  const values = new Float64Array(n);
  const result: HermitianEigen = {
    n,
    values,
    re: new Float64Array(n * n),
    im: im === undefined ? undefined : new Float64Array(n * n),
  };
  if (n <= 1 || largest === 0) {
    for (let i = 0; i < n; i++) result.re[i * n + i] = 1;
    if (n === 1) values[0] = (re[0] as number) + 0;
    return result;
  }
  const scale = powerOfTwoNear(largest);
  if (n === 2) eigen2(re, im, 1 / scale, result);
  else solve(re, im, 1 / scale, result, tuning);
  // Adding zero turns −0 into 0.
  for (let i = 0; i < n; i++) values[i] = (values[i] as number) * scale + 0;
  if (!Number.isFinite(values[0]) || !Number.isFinite(values[n - 1])) {
    throw new GoodBasisError(
      "not-finite",
      `hermitianEigen: an eigenvalue of the ${n} × ${n} matrix exceeds the largest double; scale the matrix down`,
      { n, largest },
    );
  }
  return result;
}

/** Largest modulus of a real or imaginary part in the lower triangle; refuses what is not finite. */
function largestEntry(n: number, re: Float64Array, im: Float64Array | undefined): number {
  if (!Number.isInteger(n) || n < 0 || re.length !== n * n || (im !== undefined && im.length !== n * n)) {
    throw new GoodBasisError(
      "shape",
      `hermitianEigen: expected arrays of n² numbers for n = ${n}, got ${re.length}` +
        `${im === undefined ? "" : ` and ${im.length}`}; pass the full square, row by row`,
      { n, re: re.length, im: im?.length },
    );
  }
  let largest = 0;
  let probe = 0;
  for (let i = 0; i < n; i++) {
    for (let k = i * n; k <= i * n + i; k++) {
      const x = re[k] as number;
      probe += 0 * x;
      largest = Math.max(largest, Math.abs(x));
      if (im !== undefined) {
        const y = im[k] as number;
        probe += 0 * y;
        if (k < i * n + i) largest = Math.max(largest, Math.abs(y));
      }
    }
  }
  if (probe !== 0) {
    throw notFinite(n, re, im);
  }
  return largest;
}

function notFinite(n: number, re: Float64Array, im: Float64Array | undefined): GoodBasisError {
  const bad = (k: number): boolean => !Number.isFinite(re[k]) || (im !== undefined && !Number.isFinite(im[k]));
  let row = 0;
  let col = 0;
  while (row < n - 1 && !bad(row * n + col)) {
    if (col < row) col++;
    else {
      row++;
      col = 0;
    }
  }
  while (col < row && !bad(row * n + col)) col++;
  const k = row * n + col;
  return new GoodBasisError(
    "not-finite",
    `hermitianEigen: entry (${row}, ${col}) is ${re[k]}${im === undefined ? "" : ` + ${im[k]} i`}; ` +
      "only finite entries have an eigenproblem",
    { row, col },
  );
}

/** The power of two just below x, kept where its inverse is a double as well. */
function powerOfTwoNear(x: number): number {
  return 2 ** Math.max(-1000, Math.min(1000, Math.floor(Math.log2(x))));
}

/** Arrays of one solution; matrices have n² numbers or more. */
interface Workspace extends Tridiagonal {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly v: Float64Array;
  readonly phases: Float64Array;
  readonly work: Float64Array;
  readonly order: Int32Array;
}

function makeWorkspace(n: number, complex: boolean): Workspace {
  return {
    re: new Float64Array(n * n),
    im: new Float64Array(complex ? n * n : 0),
    v: new Float64Array(n * n),
    diagonal: new Float64Array(n),
    off: new Float64Array(n),
    tau: new Float64Array(n),
    phases: new Float64Array(complex ? 2 * n : 0),
    work: new Float64Array(complex ? 6 * n : 3 * n),
    order: new Int32Array(n),
  };
}

/** Order up to which {@link SMALL} serves. */
const SMALL_ORDER = 32;
/** Kept for small matrices, where making the arrays takes longer than using them; written before read in every call. */
const SMALL: Workspace = makeWorkspace(SMALL_ORDER, true);

/** Orders from three on: reduction, tridiagonal eigenproblem, back-transformation. */
function solve(
  re: Float64Array,
  im: Float64Array | undefined,
  factor: number,
  result: HermitianEigen,
  tuning: EigenTuning,
): void {
  const { n, values } = result;
  const space = n <= SMALL_ORDER ? SMALL : makeWorkspace(n, im !== undefined);
  const { v, order, diagonal, phases } = space;
  copyLower(n, re, factor, space.re);
  if (im === undefined) tridiagonaliseReal(n, space.re, space, space.work);
  else {
    copyLower(n, im, factor, space.im);
    tridiagonaliseComplex(n, space.re, space.im, space, phases, space.work);
  }
  const scratch = n > tuning.leaf || n >= tuning.blockedFrom ? new Float64Array(PRODUCT_SCRATCH) : undefined;
  v.fill(0, 0, n * n);
  solveTridiagonal(n, space, tuning, scratch);
  for (let k = 0; k < n; k++) values[k] = diagonal[order[k] as number] as number;
  gatherRows(n, v, order, phases, result);
  const reflectors: Dense = { re: space.re, im: im === undefined ? undefined : space.im };
  if (scratch === undefined || n < tuning.blockedFrom) applyReflectors(n, reflectors, space.tau, result);
  else applyReflectorBlocks(n, reflectors, space.tau, result, tuning.blockWidth, scratch);
}

function copyLower(n: number, from: Float64Array, factor: number, to: Float64Array): void {
  for (let i = 0; i < n; i++) {
    for (let k = i * n; k <= i * n + i; k++) to[k] = factor * (from[k] as number);
  }
}

/** Eigenvalues into the diagonal, eigenvectors into the rows of v, the ascending order into `order`. */
function solveTridiagonal(n: number, space: Workspace, tuning: EigenTuning, scratch: Float64Array | undefined): void {
  const { diagonal, off, v, order, work } = space;
  let norm = Math.abs(diagonal[n - 1] as number);
  for (let i = 0; i < n - 1; i++) {
    norm = Math.max(norm, Math.abs(diagonal[i] as number), Math.abs(off[i] as number));
  }
  const floor = UNIT_ROUNDOFF * UNIT_ROUNDOFF * norm;
  if (scratch === undefined || n <= tuning.leaf) {
    solveLeaf(0, n, diagonal, off, v, n, order, floor, work);
  } else {
    divideAndConquer(n, diagonal, off, v, order, norm, tuning.leaf, floor, work, scratch);
  }
}

/** Rows of v in ascending order, times the phases where the matrix is complex, into the result. */
function gatherRows(n: number, v: Float64Array, order: Int32Array, phases: Float64Array, result: HermitianEigen): void {
  const { re, im } = result;
  for (let k = 0; k < n; k++) {
    const from = (order[k] as number) * n;
    const to = k * n;
    if (im === undefined) {
      for (let j = 0; j < n; j++) re[to + j] = v[from + j] as number;
    } else {
      for (let j = 0; j < n; j++) {
        const x = v[from + j] as number;
        re[to + j] = x * (phases[j] as number);
        im[to + j] = x * (phases[n + j] as number);
      }
    }
  }
}
