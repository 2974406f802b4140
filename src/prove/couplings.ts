import type { ExactVector } from "../exact/vector.js";
import { Frame } from "./frame.js";
import type { ExactPerturbation } from "./problem.js";
import type { ProvedCoupling } from "./proof.js";

/** A vector of a level and where it stands. */
export interface LevelVector {
  readonly leaf: number;
  readonly place: number;
  readonly vector: ExactVector;
}

/**
 * The elements of every perturbation between different states of a level that do not vanish, largest first: every pair
 * is looked at, also those that labels tell apart.
 *
 * @param vectors - mutually orthogonal
 */
export function levelCouplings(
  vectors: readonly LevelVector[],
  perturbations: readonly ExactPerturbation[],
): ProvedCoupling[] {
  const frame = new Frame(vectors.map(({ vector }) => vector));
  const found: { coupling: ProvedCoupling; size: number }[] = [];
  for (const { name, operator } of perturbations) {
    for (const [j, right] of vectors.entries()) {
      for (const [i, value] of frame.coefficients(operator.apply(right.vector))) {
        if (i >= j) continue;
        const left = vectors[i] as LevelVector;
        // ⟨i|V|j⟩ / N_i, so the element between unit vectors squared is |·|² N_i / N_j
        const squaredModulus = value.squaredModulus().times(left.vector.squaredNorm).over(right.vector.squaredNorm);
        const states = [
          [left.leaf, left.place],
          [right.leaf, right.place],
        ] as const;
        found.push({ coupling: { perturbation: name, states, squaredModulus }, size: squaredModulus.toNumber() });
      }
    }
  }
  return found.sort((a, b) => b.size - a.size).map(({ coupling }) => coupling);
}
