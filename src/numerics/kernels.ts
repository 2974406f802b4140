/**
 * The face of the numerical kernels: eigenproblems, products and commutators, each by WebAssembly where the platform has
 * it and by plain TypeScript elsewhere.
 */

import { commutatorDense, productDense } from "./bounded/dense.js";
import { commutatorSparse, productSparse } from "./bounded/sparse.js";
import type { Bounded, Square } from "./bounded/types.js";
import type { Csr } from "./csr.js";

export type { Bounded, Square } from "./bounded/types.js";
export { batchedHermitianEigen, batchMember, type HermitianEigenBatch } from "./eigen/batch.js";
export { type EigenOptions, type EigenWindow, type HermitianEigen, hermitianEigen } from "./eigen.js";
export { type Resident, SparseArena } from "./wasm/arena.js";
export { kernelsAvailable } from "./wasm/runtime.js";
export { type BrowserWorker, type BrowserWorkerScope, serveWebWorker, webWorker } from "./web-worker.js";
export { KernelPool, type PoolOptions, type PoolWorker, type WorkerFactory } from "./workers.js";

/**
 * The product AB with a rigorous bound on its rounding, of two dense square matrices or of two sparse ones.
 *
 * @param a - left factor
 * @param b - right factor
 * @returns the computed product and an upper bound on the Frobenius norm of its error; the constants are derived at
 * `productDense` and `productSparse`
 * @throws GoodBasisError `shape` when the factors do not fit
 */
export function product(a: Square, b: Square): Bounded<Square>;
export function product(a: Csr, b: Csr): Bounded<Csr>;
export function product(a: Square | Csr, b: Square | Csr): Bounded<Square> | Bounded<Csr> {
  return "n" in a ? productDense(a, b as Square) : productSparse(a, b as Csr);
}

/**
 * The commutator AB − BA with a rigorous bound on its rounding, of two dense square matrices or of two sparse ones. For
 * dense Hermitian matrices one product is formed, not two; for large sparse ones see {@link SparseArena}.
 *
 * @param a - first matrix
 * @param b - second matrix
 * @returns the computed commutator and an upper bound on the Frobenius norm of its error
 * @throws GoodBasisError `shape` when the matrices are not square of one order
 */
export function commutator(a: Square, b: Square): Bounded<Square>;
export function commutator(a: Csr, b: Csr): Bounded<Csr>;
export function commutator(a: Square | Csr, b: Square | Csr): Bounded<Square> | Bounded<Csr> {
  return "n" in a ? commutatorDense(a, b as Square) : commutatorSparse(a, b as Csr);
}
