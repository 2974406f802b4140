import { GoodBasisError } from "../errors.js";
import { components } from "./eigen/components.js";
import { defaultEngine } from "./eigen/engine.js";
import { requireHermitian } from "./eigen/require-hermitian.js";
import type {
  EigenEngine,
  EigenOptions,
  EigenSolved,
  EigenTuning,
  EigenWindow,
  HermitianEigen,
} from "./eigen/types.js";
import { readOptions, requireShape, requireWindow } from "./eigen/validate.js";

export type { EigenOptions, EigenWindow, HermitianEigen, UpperTriangle } from "./eigen/types.js";

/**
 * Eigenvalues and orthonormal eigenvectors of a real symmetric or complex Hermitian matrix.
 *
 * Residual and loss of orthogonality are a small multiple of n u ‖A‖ and n u, u = 2^−53, whatever the spectrum, for every
 * norm that is a normal double; below 2^−1022 eigenvalues are whole multiples of 2^−1074, and the residual may be √n times half
 * of that more. Small eigenvalues are not accurate relative to themselves. The same input gives the same output, bit for bit,
 * on every platform with WebAssembly and the memory for it; elsewhere the plain TypeScript twin answers, with other last digits.
 *
 * Connected components first, each solved by itself; scaling by a power of two; reduction by reflectors (Householder,
 * J. ACM 5, 339 (1958)); implicit QL (Bowdler, Martin, Reinsch and Wilkinson, Numer. Math. 11, 293 (1968)) or, for
 * larger orders, divide and conquer (Cuppen, Numer. Math. 36, 177 (1981); Gu and Eisenstat, SIAM J. Matrix Anal. Appl.
 * 16, 172 (1995)).
 *
 * ```ts
 * import { hermitianEigen } from "goodbasis/kernels";
 *
 * // σy: imaginary parts −i, i; eigenvalues −1 and 1.
 * const { values, re, im } = hermitianEigen(2, new Float64Array(4), Float64Array.of(0, -1, 1, 0));
 * console.log(values, re.subarray(0, 2), im?.subarray(0, 2)); // the second and third: the vector of −1
 * ```
 *
 * @param n - dimension, zero allowed
 * @param re - row-major n × n, real parts; nothing is changed
 * @param im - imaginary parts, those of the diagonal taken as zero; absent for a real symmetric matrix
 * @param options - window of eigenpairs; whether the upper triangle is checked
 * @returns eigenvalues ascending, eigenvectors as rows; `im` is absent exactly where it was absent in the input
 * @throws GoodBasisError `shape` when an array has not n² numbers; `not-finite` when an entry is NaN or infinite, or an
 * eigenvalue lies beyond the largest double; `not-hermitian` when the triangles are not conjugate (unless `upper` is
 * `"ignore"`, which looks at the lower one alone); `option` for a window or options that are none; `no-convergence` when an
 * iteration exceeds its bound
 */
export function hermitianEigen(
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  options: EigenOptions = {},
): HermitianEigen {
  return hermitianEigenBy(defaultEngine, n, re, im, options);
}

/**
 * {@link hermitianEigen} by a given engine with given thresholds, so that small matrices can reach every branch of both.
 *
 * @param engine - the WebAssembly kernels or their plain twin
 * @param n - dimension
 * @param re - as there
 * @param im - as there
 * @param options - as there
 * @param tuning - thresholds; those of the engine where absent
 * @throws as there
 * @internal
 */
export function hermitianEigenBy(
  engine: EigenEngine,
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  options: EigenOptions = {},
  tuning?: EigenTuning,
): HermitianEigen {
  requireShape("hermitianEigen", n, re, im);
  const { window, upper } = readOptions("hermitianEigen", options);
  requireWindow("hermitianEigen", n, window);
  requireHermitian("hermitianEigen", n, re, im, upper);
  const parts = components(n, re, im);
  const found =
    parts !== undefined
      ? joinParts(
          n,
          parts.map((members) => solvePart(engine, n, re, im, members, window, tuning)),
          im,
          window,
        )
      : n < 2
        ? trivial(n, re, im, window)
        : ownCopy(n, solveWith(engine, { count: 1, n, re, im, window }, tuning));
  requireRange(found);
  return found;
}

function solveWith(engine: EigenEngine, ...[job, tuning]: Parameters<EigenEngine>): EigenSolved {
  const solved = engine(job, tuning);
  if (solved === undefined)
    throw new GoodBasisError("option", "hermitianEigen: this platform lacks the engine asked for");
  return solved;
}

function ownCopy(n: number, { first, values, re, im }: EigenSolved): HermitianEigen {
  return { n, first, values: values.slice(), re: re.slice(), im: im?.slice() };
}

/** Orders zero and one. */
function trivial(n: number, re: Float64Array, im: Float64Array | undefined, window: EigenWindow): HermitianEigen {
  return joinParts(n, n === 0 ? [] : [singlePart(0, re[0] as number, window)], im, window);
}

/** Eigenpairs of one component inside a window of values, in its own coordinates. */
interface Part extends EigenSolved {
  readonly members: Int32Array;
}

function singlePart(index: number, value: number, { low, high }: EigenWindow): Part {
  const below = low !== undefined && value < low;
  const inside = !below && !(high !== undefined && value > high);
  // Adding zero turns −0 into 0.
  const values = Float64Array.from(inside ? [value + 0] : []);
  return { members: Int32Array.of(index), first: below ? 1 : 0, values, re: Float64Array.of(1), im: undefined };
}

function solvePart(
  engine: EigenEngine,
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  members: Int32Array,
  window: EigenWindow,
  tuning: EigenTuning | undefined,
): Part {
  const size = members.length;
  const [index = 0] = members;
  if (size === 1) return singlePart(index, re[index * n + index] as number, window);
  const job = {
    count: 1,
    n: size,
    re: lowerPart(n, re, members),
    im: im && lowerPart(n, im, members),
    // Indices count across all components: joinParts sees to them.
    window: { low: window.low ?? Number.NEGATIVE_INFINITY, high: window.high ?? Number.POSITIVE_INFINITY },
  };
  return { ...ownCopy(size, solveWith(engine, job, tuning)), members };
}

/** The lower triangle of the submatrix on ascending indices. */
function lowerPart(n: number, from: Float64Array, members: Int32Array): Float64Array {
  const size = members.length;
  const part = new Float64Array(size * size);
  for (let i = 0; i < size; i++) {
    const row = (members[i] as number) * n;
    for (let j = 0; j <= i; j++) part[i * size + j] = from[row + (members[j] as number)] as number;
  }
  return part;
}

/** The eigenpairs of all components in ascending order, cut to the window of indices. */
function joinParts(
  n: number,
  parts: readonly Part[],
  im: Float64Array | undefined,
  { from = 0, to = n }: EigenWindow,
): HermitianEigen {
  const below = parts.reduce((sum, part) => sum + part.first, 0);
  const all = parts.flatMap((part) => Array.from(part.values, (value, row) => ({ part, row, value })));
  all.sort((a, b) => a.value - b.value);
  const first = Math.min(Math.max(below, from), to);
  const chosen = all.slice(Math.max(0, first - below), Math.max(0, to - below));
  const out = {
    n,
    first,
    values: Float64Array.from(chosen, ({ value }) => value),
    re: new Float64Array(chosen.length * n),
    im: im && new Float64Array(chosen.length * n),
  };
  chosen.forEach(({ part, row }, k) => {
    scatterRow(part.re, row, part.members, out.re, k * n);
    if (out.im !== undefined && part.im !== undefined) scatterRow(part.im, row, part.members, out.im, k * n);
  });
  return out;
}

function scatterRow(from: Float64Array, row: number, members: Int32Array, to: Float64Array, at: number): void {
  const size = members.length;
  for (let j = 0; j < size; j++) to[at + (members[j] as number)] = from[row * size + j] as number;
}

/** Refuses eigenvalues beyond the largest double. */
function requireRange({ n, values }: HermitianEigen): void {
  if (Number.isFinite(values[0] ?? 0) && Number.isFinite(values[values.length - 1] ?? 0)) return;
  throw new GoodBasisError(
    "not-finite",
    `hermitianEigen: an eigenvalue of the ${n} × ${n} matrix exceeds the largest double; scale the matrix down`,
    { n },
  );
}
