import { type Dense, multiplyDense } from "./dense.js";
import { gamma, UNIT_ROUNDOFF } from "./rounding.js";
import { wasmMultiplyParts } from "./wasm/dense.js";

/** Below this order the plain loops are done before the kernels have their matrices. */
const KERNELS_FROM = 6;

/**
 * The product of two dense n × n row-major matrices by real products of their parts, four for two complex factors: sums of
 * whole numbers stay exact, an imaginary part that cancels exactly is zero, and the bound of every entry is that of
 * {@link partsRounding}. By WebAssembly where the platform has it and the order pays for it.
 *
 * @param n - order
 * @param a - left factor
 * @param b - right factor
 */
export function multiplyParts(n: number, a: Dense, b: Dense): Dense {
  return (n < KERNELS_FROM ? undefined : wasmMultiplyParts(n, a, b)) ?? multiplyDense(n, a, b);
}

/**
 * The constant c with |fl(AB) − AB|_ij ≤ c Σ_k |a_ik| |b_kj| for products by {@link multiplyParts} and by the sparse kernels,
 * at most K terms that are not zero in a sum, where nothing underflows; `differences` more roundings may follow, as in
 * fl(fl(AB) − fl(BA)) with the moduli of both products on the right.
 *
 * Real: every term is rounded once as a product and takes part in at most K − 1 additions that round, in any order (adding
 * zero is exact, and an addition that is not joins two sums of at least one term each): γ_K. Complex: the two real products
 * that make a part take one addition more, γ_{K+1} times |re re'| + |im im'| or |re im'| + |im re'|, which are each at most
 * |a| |b| (Cauchy–Schwarz); both parts together √2 γ_{K+1} Σ |a| |b|. A difference fl(x − y) is off by u (|x| + |y|) more, and
 * (1 + γ_K)(1 + u) ≤ 1 + γ_{K+1} (Higham, Accuracy and Stability of Numerical Algorithms, §3.1 and §3.6). The double √2 lies
 * above the root; the factor 1 + 2u makes up for the rounding of this product.
 *
 * @param terms - K
 * @param complex - whether one of the factors is complex
 * @param differences - roundings after the sums
 */
export function partsRounding(terms: number, complex: boolean, differences = 0): number {
  const roundings = terms + differences;
  return complex ? Math.SQRT2 * (1 + 2 * UNIT_ROUNDOFF) * gamma(roundings + 1) : gamma(roundings);
}
