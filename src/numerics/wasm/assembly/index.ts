// What the compiled module exports. The stub runtime allocates nothing: memory from `heapStart` on is the caller's.

export { eigenScratch, solveHermitian, windowStart } from "./eigen.ts";
export { addProduct, productScratch } from "./packed-product.ts";

/** The first byte that the module does not use itself. */
export const heapStart: usize = __heap_base;
