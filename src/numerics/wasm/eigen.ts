import { GoodBasisError } from "../../errors.js";
import type { EigenJob, EigenSolved, EigenTuning } from "../eigen/types.js";
import { type Kernels, withKernels } from "./runtime.js";

/**
 * The measured sizes at which the WebAssembly kernels change their algorithm. Complex reflectors are applied one by one for
 * long: the arithmetic that blocks save by three multiplications only then outweighs what they add.
 */
function wasmTuning(n: number, complex: boolean): EigenTuning {
  return { leaf: 32, blockedFrom: complex ? 300 : 80, blockWidth: n < 200 ? 16 : 32 };
}

/**
 * Eigenpairs of matrices of one order by the WebAssembly kernels, in one call.
 *
 * @param job - finite matrices
 * @param tuning - sizes at which the algorithm changes; {@link wasmTuning} where absent
 * @returns views of memory that the next call overwrites; `undefined` where the platform cannot run the kernels
 * @throws GoodBasisError `no-convergence` when an iteration exceeds its bound
 */
export function wasmEigen(
  job: EigenJob,
  tuning: EigenTuning = wasmTuning(job.n, job.im !== undefined),
): EigenSolved | undefined {
  return withKernels((kernels) => solve(kernels, job, tuning));
}

function solve(kernels: Kernels, job: EigenJob, tuning: EigenTuning): EigenSolved {
  const { count, n, re, im, window } = job;
  const { exports } = kernels;
  const complex = im !== undefined;
  const { leaf, blockedFrom, blockWidth } = tuning;
  const matrices = 8 * count * n * n;
  const imaginary = complex ? matrices : 0;
  // Unsigned; and where the sum passed the end of all addresses, what it must at least have been, so that the layout fails.
  const least = 8 * n * n * (complex || n <= leaf ? 1 : 2);
  const scratch = Math.max(least, exports.eigenScratch(n, complex, leaf, blockedFrom, blockWidth) >>> 0);
  const starts = kernels.layout([
    matrices,
    imaginary,
    8 * count * n,
    matrices,
    imaginary && imaginary + 8 * n,
    scratch,
  ]);
  const [a = 0, b = 0, values = 0, v = 0, w = 0, rest = 0] = starts;
  const memory = kernels.doubles;
  memory.set(re, a / 8);
  if (complex) memory.set(im, b / 8);
  const found = exports.solveHermitian(
    count,
    n,
    a,
    complex ? b : 0,
    values,
    v,
    w,
    window.from ?? 0,
    window.to ?? n,
    window.low ?? Number.NEGATIVE_INFINITY,
    window.high ?? Number.POSITIVE_INFINITY,
    leaf,
    blockedFrom,
    blockWidth,
    rest,
  );
  if (found < 0) {
    throw new GoodBasisError(
      "no-convergence",
      `hermitianEigen: matrix ${-1 - found} of ${count}, of order ${n}, did not converge within the bound of steps; ` +
        "check the matrix for entries that overflow",
      { index: -1 - found, size: n },
    );
  }
  const first = exports.windowStart.value;
  const wanted = count === 1 ? found : count * n;
  const numbers = wanted * n;
  const from = values / 8 + (count === 1 ? first : 0);
  return {
    first,
    values: memory.subarray(from, from + wanted),
    re: memory.subarray(v / 8, v / 8 + numbers),
    im: complex ? memory.subarray(w / 8, w / 8 + numbers) : undefined,
  };
}
