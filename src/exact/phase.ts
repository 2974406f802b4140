import { LARGE_COMPONENT_THOUSANDTHS } from "../numerics/phase.js";
import { requireVector } from "./guards.js";
import { Surd } from "./surd.js";
import type { ExactVector } from "./vector.js";

/** The square of the factor within which a component counts as one of the largest, as for floating vectors. */
const LARGE_SQUARED: Surd = Surd.ratio(BigInt(LARGE_COMPONENT_THOUSANDTHS) ** 2n, 1_000_000n);

/**
 * The same direction in the project's phase: the first component within a stated factor of the largest is real and positive,
 * and the whole is primitive, with whole coefficients and no divisor in common.
 *
 * The vector is multiplied by a number of the field, ±1 or the conjugate of that component; since vectors are not normalised,
 * its modulus need not be in the field.
 *
 * @example
 * ```ts
 * import { ExactVector, fixExactPhase } from "goodbasis";
 *
 * console.log(fixExactPhase(ExactVector.from(["-i", "1"])).values.join(" ")); // 1 i
 * ```
 */
export function fixExactPhase(vector: ExactVector): ExactVector {
  requireVector("fixExactPhase", vector);
  const squares = vector.values.map((x) => x.squaredModulus());
  let most = Surd.zero;
  for (const square of squares) if (square.compare(most) > 0) most = square;
  const edge = most.times(LARGE_SQUARED);
  const pivot = vector.values[squares.findIndex((square) => square.compare(edge) >= 0)];
  if (pivot === undefined) return vector;
  if (!pivot.isReal) return vector.scale(pivot.conjugate()).primitive();
  return (pivot.sign() < 0 ? vector.scale(-1) : vector).primitive();
}
