import { Surd } from "../exact/surd.js";

/**
 * √n of a whole number n ≥ 0, exactly.
 *
 * @param n - a safe integer
 */
export function wholeRoot(n: number): Surd {
  return Surd.sqrt(n) ?? Surd.zero;
}
