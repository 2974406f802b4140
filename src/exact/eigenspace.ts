import { GoodBasisError } from "../errors.js";
import type { ExactBudget } from "./budget.js";
import { exactKernel } from "./elimination.js";
import { orthogonalise } from "./gram-schmidt.js";
import { ExactOperator } from "./operator.js";
import { fixExactPhase } from "./phase.js";
import { represent } from "./represent.js";
import { Surd, type SurdInput } from "./surd.js";
import { ExactVector } from "./vector.js";

/**
 * The eigenvectors of an operator to one value, inside an invariant space: mutually orthogonal, primitive, not normalised, in
 * the project's phase. Each is a solution of (A − a) v = 0 by exact elimination; there are none where a is no eigenvalue.
 *
 * @param vectors - mutually orthogonal vectors that span the space
 * @throws GoodBasisError `option` - the operator leads out of the space, or the vectors are not orthogonal; `shape`, `budget`
 *
 * @example
 * ```ts
 * import { exactEigenspace, ExactOperator, ExactVector } from "goodbasis";
 *
 * const chain = ExactOperator.from([[0, 1, 0], [1, 0, 1], [0, 1, 0]]);
 * const kets = [0, 1, 2].map((k) => ExactVector.unit(3, k));
 * console.log(exactEigenspace(chain, "sqrt(2)", kets)[0]?.values.join(" ")); // 1 sqrt(2) 1
 * ```
 */
export function exactEigenspace(
  operator: ExactOperator,
  value: SurdInput,
  vectors: readonly ExactVector[],
  budget?: ExactBudget,
): ExactVector[] {
  const inside = represent(operator, vectors, budget);
  if (inside.kind === "leaves") {
    const message =
      `exactEigenspace: the operator takes vector ${inside.column} out of the space of the ${vectors.length} vectors; ` +
      "give vectors that span an invariant space";
    throw new GoodBasisError("option", message, { vector: inside.column });
  }
  const shift = ExactOperator.identity(vectors.length).scale(Surd.from(value));
  const solutions = exactKernel(inside.matrix.minus(shift), budget);
  const found = solutions.map((coefficients) => ExactVector.combination(vectors, coefficients).primitive());
  return orthogonalise(found, budget).vectors.map(fixExactPhase);
}
