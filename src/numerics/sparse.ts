/**
 * Kernels on sparse rows ({@link Csr}) that know nothing of physics; every one O(entries) or O(products).
 */
export * from "./sparse/build.js";
export * from "./sparse/combine.js";
export * from "./sparse/full.js";
export * from "./sparse/norms.js";
export * from "./sparse/product.js";
export * from "./sparse/rearrange.js";
