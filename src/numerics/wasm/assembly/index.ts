// What the compiled module exports. The stub runtime allocates nothing: memory from `heapStart` on is the caller's.

export { denseScratch, multiplyDense } from "./dense.ts";
export { eigenScratch, solveHermitian, windowStart } from "./eigen.ts";
export {
  combineSparse,
  countEntries,
  errorSquares,
  mostTerms,
  productCount,
  rowNorms,
  sortSparseRows,
  sumOfSquares,
} from "./sparse.ts";

/** The first byte that the module does not use itself. */
export const heapStart: usize = __heap_base;
