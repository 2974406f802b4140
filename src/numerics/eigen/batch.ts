import { GoodBasisError } from "../../errors.js";
import { hermitianEigenBy } from "../eigen.js";
import { components } from "./components.js";
import { defaultEngine } from "./engine.js";
import { requireHermitian } from "./require-hermitian.js";
import type { EigenEngine, EigenOptions, HermitianEigen, UpperTriangle } from "./types.js";
import { readOptions, requireBatch } from "./validate.js";

/** Eigenpairs of many matrices, one after the other in common arrays; {@link batchMember} reads one of them. */
export interface HermitianEigenBatch {
  /** The order n of each matrix. */
  readonly orders: Int32Array;
  /** Ascending eigenvalues of every matrix. */
  readonly values: Float64Array;
  /** Eigenvectors as rows, n² numbers a matrix; real parts. */
  readonly re: Float64Array;
  /** Imaginary parts in the same order; absent for real matrices. */
  readonly im: Float64Array | undefined;
}

/** Numbers of matrices that go to the kernels in one call: small enough to stay in the cache with their results. */
const CHUNK = 2 ** 14;

/**
 * All eigenpairs of many Hermitian matrices in one call: what {@link hermitianEigen} finds for each, bit for bit, without
 * the cost of a call and of arrays for each.
 *
 * ```ts
 * import { batchedHermitianEigen, batchMember } from "goodbasis/kernels";
 *
 * // One matrix of order 2 and one of order 1.
 * const batch = batchedHermitianEigen([2, 1], Float64Array.of(0, 1, 1, 0, 7), undefined);
 * console.log(batchMember(batch, 0).values, batchMember(batch, 1).values); // −1 and 1; 7
 * ```
 *
 * @param orders - the order n of each matrix
 * @param re - the matrices one after the other, each row-major with n² numbers
 * @param im - imaginary parts, or absent where all are real
 * @param options - whether the upper triangles are checked; they are unless told
 * @throws GoodBasisError as `hermitianEigen`; the details name the matrix as `matrix`
 */
export function batchedHermitianEigen(
  orders: ArrayLike<number>,
  re: Float64Array,
  im: Float64Array | undefined,
  options: Pick<EigenOptions, "upper"> = {},
): HermitianEigenBatch {
  return batchedHermitianEigenBy(defaultEngine, orders, re, im, options);
}

/**
 * {@link batchedHermitianEigen} by a given engine, into given arrays.
 *
 * @param engine - the WebAssembly kernels or their plain twin
 * @param listed - the orders, as there
 * @param re - as there
 * @param im - as there
 * @param options - as there
 * @param into - receives the results; made where absent
 * @throws as there
 * @internal
 */
export function batchedHermitianEigenBy(
  engine: EigenEngine,
  listed: ArrayLike<number>,
  re: Float64Array,
  im: Float64Array | undefined,
  options: Pick<EigenOptions, "upper"> = {},
  into?: HermitianEigenBatch,
): HermitianEigenBatch {
  const { orders, rows, numbers } = requireBatch(listed, re, im);
  const { upper } = readOptions("batchedHermitianEigen", options);
  const count = orders.length;
  const out = into ?? {
    orders,
    values: new Float64Array(rows),
    re: new Float64Array(numbers),
    im: im && new Float64Array(numbers),
  };
  let row = 0;
  let at = 0;
  for (let k = 0; k < count; ) {
    const length = connectedRun(k, at, orders, re, im, upper);
    const n = orders[k] as number;
    const end = at + Math.max(1, length) * n * n;
    const partRe = re.subarray(at, end);
    const partIm = im?.subarray(at, end);
    const found = inMatrix(k, length, () =>
      length === 0
        ? hermitianEigenBy(engine, n, partRe, partIm, { upper: "ignore" })
        : engine({ count: length, n, re: partRe, im: partIm, window: {} }),
    );
    if (found === undefined)
      throw new GoodBasisError("option", "batchedHermitianEigen: this platform lacks the engine");
    requireRange(k, n, found.values);
    out.values.set(found.values, row);
    out.re.set(found.re, at);
    if (found.im !== undefined) out.im?.set(found.im, at);
    k += Math.max(1, length);
    row += Math.max(1, length) * n;
    at = end;
  }
  return out;
}

/**
 * The eigenpairs of one matrix of a batch, as views.
 *
 * @param batch - what {@link batchedHermitianEigen} returned
 * @param k - number of the matrix
 * @throws GoodBasisError `option` when the batch has no such matrix
 */
export function batchMember(batch: HermitianEigenBatch, k: number): HermitianEigen {
  const count = batch.orders.length;
  if (!Number.isInteger(k) || k < 0 || k >= count) {
    const got = typeof k === "number" ? k : typeof k;
    throw new GoodBasisError(
      "option",
      `batchMember: expected the number of one of ${count} matrices, from 0 on, got ${got}`,
    );
  }
  let row = 0;
  let at = 0;
  for (let m = 0; m < k; m++) {
    const n = batch.orders[m] as number;
    row += n;
    at += n * n;
  }
  const n = batch.orders[k] as number;
  const part = (m: Float64Array): Float64Array => m.subarray(at, at + n * n);
  const im = batch.im && part(batch.im);
  return { n, first: 0, values: batch.values.subarray(row, row + n), re: part(batch.re), im };
}

/**
 * How many matrices from number `k` on go to the kernels together: of one order, in one piece, as many as a chunk holds.
 * Zero where matrix k itself is not for them: of order one or less, or in several pieces.
 */
function connectedRun(
  k: number,
  at: number,
  orders: Int32Array,
  re: Float64Array,
  im: Float64Array | undefined,
  upper: UpperTriangle,
): number {
  const n = orders[k] as number;
  const size = n * n;
  let length = 0;
  for (let m = k; m < orders.length && orders[m] === n; m++) {
    if (length > 0 && (length + 1) * size > CHUNK) break;
    const start = at + length * size;
    inMatrix(m, 1, () => requireHermitian("batchedHermitianEigen", n, re, im, upper, start));
    if (n < 2 || components(n, re, im, start) !== undefined) break;
    length++;
  }
  return length;
}

/** Runs something; an error says in which matrix of the batch it happened, the first of them being number `first`. */
function inMatrix<T>(first: number, count: number, run: () => T): T {
  try {
    return run();
  } catch (error) {
    if (!(error instanceof GoodBasisError)) throw error;
    const offset = count > 1 ? Number(error.details["index"] ?? 0) : 0;
    const matrix = first + offset;
    throw new GoodBasisError(error.code, `matrix ${matrix} of the batch: ${error.message}`, {
      ...error.details,
      matrix,
    });
  }
}

/** Refuses eigenvalues beyond the largest double. */
function requireRange(first: number, n: number, values: Float64Array): void {
  const bad = values.findIndex((value) => !Number.isFinite(value));
  if (bad < 0) return;
  const matrix = first + Math.floor(bad / n);
  throw new GoodBasisError(
    "not-finite",
    `batchedHermitianEigen: an eigenvalue of matrix ${matrix} exceeds the largest double; scale the matrix down`,
    { matrix },
  );
}
