import { type ExactBudget, Meter } from "./budget.js";
import { requireVectors } from "./guards.js";
import type { ExactVector } from "./vector.js";

/** Mutually orthogonal vectors, and which of the given ones added nothing. */
export interface Orthogonalised {
  /** In the order of the given vectors, primitive, not normalised; they span what the given ones span. */
  readonly vectors: readonly ExactVector[];
  /** Places of given vectors that are combinations of earlier ones. */
  readonly dependent: readonly number[];
}

/**
 * Gram–Schmidt without square roots: v − Σ u ⟨u|v⟩ / ⟨u|u⟩ for each vector in turn. Exact, so the order of subtractions does
 * not matter.
 *
 * @throws GoodBasisError `shape` - vectors over different numbers of kets; `budget`
 *
 * @example
 * ```ts
 * import { ExactVector, orthogonalise } from "goodbasis";
 *
 * const { vectors } = orthogonalise([ExactVector.from([1, 1, 0]), ExactVector.from([1, 0, 1])]);
 * console.log(vectors[1]?.component(0).text(), vectors[1]?.squaredNorm.text()); // 1 6
 * ```
 */
export function orthogonalise(vectors: readonly ExactVector[], budget?: ExactBudget): Orthogonalised {
  requireVectors("orthogonalise", vectors);
  const meter = new Meter("orthogonalise", budget);
  const done: ExactVector[] = [];
  const dependent: number[] = [];
  for (const [place, vector] of vectors.entries()) {
    let rest = vector;
    for (const unit of done) {
      meter.spendProducts(unit.values.length);
      const overlap = unit.inner(vector);
      if (overlap.isZero) continue;
      meter.spendProducts(unit.values.length);
      rest = rest.plus(unit, overlap.over(unit.squaredNorm).negate());
    }
    if (rest.isZero) {
      dependent.push(place);
      continue;
    }
    rest = rest.primitive();
    for (const x of rest.values) meter.weigh(x.largeTerms);
    done.push(rest);
  }
  return { vectors: done, dependent };
}
