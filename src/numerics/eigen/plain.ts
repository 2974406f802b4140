import type { Dense } from "../dense.js";
import { UNIT_ROUNDOFF } from "../rounding.js";
import { applyReflectorBlocks, applyReflectors } from "./back-transform.js";
import { divideAndConquer, solveLeaf } from "./divide-and-conquer.js";
import { eigen2 } from "./order-two.js";
import { PRODUCT_SCRATCH } from "./packed-product.js";
import type { Tridiagonal } from "./tridiagonal.js";
import { tridiagonaliseComplex } from "./tridiagonalise-complex.js";
import { tridiagonaliseReal } from "./tridiagonalise-real.js";
import type { EigenJob, EigenSolved, EigenTuning } from "./types.js";

/** The measured sizes at which the plain kernels change their algorithm. */
const PLAIN_TUNING: EigenTuning = { leaf: 32, blockedFrom: 96, blockWidth: 32 };

/**
 * Eigenpairs of matrices of one order in plain TypeScript: the twin of the WebAssembly kernels, for platforms without.
 *
 * @param job - finite matrices
 * @param tuning - sizes at which the algorithm changes
 * @throws GoodBasisError `no-convergence` when an iteration exceeds its bound
 */
export function plainEigen(job: EigenJob, tuning: EigenTuning = PLAIN_TUNING): EigenSolved {
  const { count, n, window } = job;
  const size = n * n;
  const values = new Float64Array(count * n);
  const re = new Float64Array(count * size);
  const im = job.im && new Float64Array(count * size);
  for (let k = 0; k < count; k++) {
    const part = (m: Float64Array): Float64Array => (count === 1 ? m : m.subarray(k * size, (k + 1) * size));
    const result: Result = {
      n,
      values: values.subarray(k * n, (k + 1) * n),
      re: part(re),
      im: im && part(im),
    };
    solveOne(part(job.re), job.im && part(job.im), result, tuning);
  }
  if (count !== 1) return { first: 0, values, re, im };
  const { from = 0, to = n, low = Number.NEGATIVE_INFINITY, high = Number.POSITIVE_INFINITY } = window;
  let first = Math.max(0, from);
  let last = Math.min(n, to);
  while (first < last && (values[first] as number) < low) first++;
  while (last > first && (values[last - 1] as number) > high) last--;
  last = Math.max(first, last);
  const rows = (m: Float64Array): Float64Array => m.subarray(first * n, last * n);
  return { first, values: values.subarray(first, last), re: rows(re), im: im && rows(im) };
}

/** Where the eigenpairs of one matrix go; vectors zero on entry. */
interface Result {
  readonly n: number;
  readonly values: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

function solveOne(re: Float64Array, im: Float64Array | undefined, result: Result, tuning: EigenTuning): void {
  const { n, values } = result;
  const scale = powerOfTwoNear(largestEntry(n, re, im));
  if (n === 2) eigen2(re, im, 1 / scale, result);
  else solve(re, im, 1 / scale, result, tuning);
  // Adding zero turns −0 into 0.
  for (let i = 0; i < n; i++) values[i] = (values[i] as number) * scale + 0;
}

/** Largest modulus of a real or imaginary part in the lower triangle. */
function largestEntry(n: number, re: Float64Array, im: Float64Array | undefined): number {
  let largest = 0;
  for (let i = 0; i < n; i++) {
    for (let k = i * n; k <= i * n + i; k++) largest = Math.max(largest, Math.abs(re[k] as number));
    if (im === undefined) continue;
    for (let k = i * n; k < i * n + i; k++) largest = Math.max(largest, Math.abs(im[k] as number));
  }
  return largest;
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
  result: Result,
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
function gatherRows(n: number, v: Float64Array, order: Int32Array, phases: Float64Array, result: Result): void {
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
