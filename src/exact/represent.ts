import { GoodBasisError } from "../errors.js";
import { type ExactBudget, Meter } from "./budget.js";
import { requireOperator, requireVectors } from "./guards.js";
import { ExactOperator } from "./operator.js";
import type { ExactTriplet } from "./rows.js";
import type { ExactVector } from "./vector.js";

/** The matrix of an operator in an invariant space, or where it leaves the space. */
export type Representation =
  | {
      /** The space is invariant. */
      readonly kind: "invariant";
      /** A as it acts on the given vectors. */
      readonly matrix: ExactOperator;
    }
  | {
      /** The operator leads out of the space. */
      readonly kind: "leaves";
      /** The place of the first vector whose image is not in the space. */
      readonly column: number;
      /** The part of the image outside; not zero. */
      readonly outside: ExactVector;
    };

/**
 * The matrix M with A q_j = Σ_i q_i M_ij, where the given vectors span an invariant space: M_ij = ⟨q_i|A|q_j⟩ / ⟨q_i|q_i⟩.
 * Eigenvalues, traces and polynomials of A in the space are those of M; no square root of a norm enters, so M is Hermitian
 * only where all norms are equal.
 *
 * @param vectors - mutually orthogonal, not zero
 * @throws GoodBasisError `shape` - no vector, or one over another number of kets; `option` - a zero vector, or two that are
 *   not orthogonal; `budget`
 *
 * @example
 * ```ts
 * import { ExactOperator, ExactVector, represent } from "goodbasis";
 *
 * const even = represent(ExactOperator.from([[3, 1], [1, 3]]), [ExactVector.from([1, 1])]);
 * if (even.kind === "invariant") console.log(even.matrix.entry(0, 0).text()); // 4
 * ```
 */
export function represent(
  operator: ExactOperator,
  vectors: readonly ExactVector[],
  budget?: ExactBudget,
): Representation {
  requireOperator("represent", operator);
  requireVectors("represent", vectors);
  const meter = new Meter("represent", budget);
  requireOrthogonal(vectors);
  const inverses = vectors.map((vector) => vector.squaredNorm.inverse());
  const triplets: ExactTriplet[] = [];
  for (const [j, vector] of vectors.entries()) {
    const image = operator.apply(vector);
    let outside = image;
    for (const [i, left] of vectors.entries()) {
      meter.spendProducts(left.values.length);
      const overlap = left.inner(image);
      if (overlap.isZero) continue;
      const value = overlap.times(inverses[i] ?? 0);
      meter.weigh(value.largeTerms);
      triplets.push([i, j, value]);
      outside = outside.plus(left, value.negate());
    }
    if (!outside.isZero) return { kind: "leaves", column: j, outside };
  }
  return { kind: "invariant", matrix: ExactOperator.fromTriplets(vectors.length, triplets) };
}

function requireOrthogonal(vectors: readonly ExactVector[]): void {
  for (const [j, a] of vectors.entries()) {
    if (a.isZero) throw new GoodBasisError("option", `represent: vector ${j} is zero`, { vector: j });
    for (const [k, b] of vectors.entries()) {
      if (k >= j || a.inner(b).isZero) continue;
      const message = `represent: vectors ${k} and ${j} are not orthogonal; pass them through orthogonalise first`;
      throw new GoodBasisError("option", message, { first: k, second: j });
    }
  }
}
