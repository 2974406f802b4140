/**
 * `goodbasis/kernels`, the face of the numerical kernels: eigenproblems, dense products and commutators, and sparse ones in a
 * `SparseArena` run in WebAssembly where the platform has it and in plain TypeScript elsewhere; products and commutators of
 * sparse arrays that stay outside run in plain TypeScript everywhere.
 *
 * @module kernels
 */

import { commutatorDense, productDense } from "./bounded/dense.js";
import { commutatorSparse, productSparse } from "./bounded/sparse.js";
import type { Bounded, Square } from "./bounded/types.js";
import { requireFactors } from "./bounded/validate.js";
import type { Csr } from "./csr.js";

export { type ErrorCode, GoodBasisError } from "../errors.js";
export type { Bounded, Square } from "./bounded/types.js";
export type { Csr } from "./csr.js";
export type { Dense } from "./dense.js";
export { batchedHermitianEigen, batchMember, type HermitianEigenBatch } from "./eigen/batch.js";
export {
  type EigenOptions,
  type EigenWindow,
  type HermitianEigen,
  hermitianEigen,
  type UpperTriangle,
} from "./eigen.js";
export { type ArenaMark, type Resident, SparseArena } from "./wasm/arena.js";
export { kernelsAvailable } from "./wasm/runtime.js";
export { type BrowserWorker, type BrowserWorkerScope, serveWebWorker, webWorker } from "./web-worker.js";
export type { PoolAnswer, PoolRequest } from "./worker-protocol.js";
export { KernelPool, type PoolOptions, type PoolWorker, type WorkerFactory } from "./workers.js";

/**
 * The product AB with a rigorous bound on its rounding, of two dense square matrices or of two sparse ones.
 *
 * ```ts
 * import { product } from "goodbasis/kernels";
 *
 * const third = { n: 1, re: Float64Array.of(1 / 3), im: undefined };
 * const { value, error } = product(third, third);
 * console.log(value.re[0], error); // 0.1111111111111111 and about 1.2e-17
 * ```
 *
 * @param a - left factor
 * @param b - right factor
 * @returns the computed product and an upper bound on the Frobenius norm of its error; the constants are derived at
 * `productDense` and `productSparse`
 * @throws GoodBasisError `shape` when the factors do not fit, or are not two matrices of one kind (columns that are out of range
 * or do not ascend included); `not-finite` for an entry that is NaN or infinite
 */
export function product(a: Square, b: Square): Bounded<Square>;
export function product(a: Csr, b: Csr): Bounded<Csr>;
export function product(a: Square | Csr, b: Square | Csr): Bounded<Square> | Bounded<Csr> {
  const factors = requireFactors("product", a, b);
  return factors.dense === undefined ? productSparse(...factors.sparse) : productDense(...factors.dense);
}

/**
 * The commutator AB − BA with a rigorous bound on its rounding, of two dense square matrices or of two sparse ones. For two
 * matrices that are Hermitian to the last bit half of it is formed; the result is then exactly anti-Hermitian. Large sparse
 * operators can stay in a {@link SparseArena}.
 *
 * ```ts
 * import { commutator } from "goodbasis/kernels";
 *
 * const sigmaX = { n: 2, re: Float64Array.of(0, 1, 1, 0), im: undefined };
 * const sigmaZ = { n: 2, re: Float64Array.of(1, 0, 0, -1), im: undefined };
 * console.log(commutator(sigmaZ, sigmaX).value.re); // 2 i σy: 0, 2, −2, 0
 * ```
 *
 * @param a - first matrix
 * @param b - second matrix
 * @returns the computed commutator and an upper bound on the Frobenius norm of its error
 * @throws GoodBasisError `shape` when the matrices are not square of one order, or not two of one kind (columns that are out of
 * range or do not ascend included); `not-finite` for an entry that is NaN or infinite
 */
export function commutator(a: Square, b: Square): Bounded<Square>;
export function commutator(a: Csr, b: Csr): Bounded<Csr>;
export function commutator(a: Square | Csr, b: Square | Csr): Bounded<Square> | Bounded<Csr> {
  const factors = requireFactors("commutator", a, b);
  return factors.dense === undefined ? commutatorSparse(...factors.sparse) : commutatorDense(...factors.dense);
}
