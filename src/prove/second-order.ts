import { GoodBasisError } from "../errors.js";
import type { ExactOperator } from "../exact/operator.js";
import type { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { Resolvent } from "./resolvent.js";

/** Second-order energies of a leaf and what they are read from. */
export interface SecondOrder {
  /** E2_pq = Re⟨V_p q|R V_q q⟩ / ⟨q|q⟩ of every state of the leaf. */
  readonly energies: readonly (readonly Surd[])[];
  /** R V q, for each perturbation and vector. */
  readonly corrections: readonly (readonly ExactVector[])[];
}

/**
 * The exact second order of vectors on which the second-order operator is a number.
 *
 * @returns undefined where the budget ends, or where the level may have more states in this sector
 */
export function secondOrder(
  vectors: readonly ExactVector[],
  perturbations: readonly ExactOperator[],
  resolvent: Resolvent,
): SecondOrder | undefined {
  const [first] = vectors;
  if (first === undefined) return undefined;
  try {
    const corrections: ExactVector[][] = [];
    for (const v of perturbations) {
      const solved = vectors.map((q) => resolvent.apply(v.apply(q)));
      const found = solved.filter((x) => x !== undefined);
      if (found.length < solved.length) return undefined;
      corrections.push(found);
    }
    const inverse = first.squaredNorm.inverse();
    const energies = perturbations.map((v) => {
      const image = v.apply(first);
      return corrections.map((list) => image.inner(list[0] as ExactVector).re.times(inverse));
    });
    return { energies, corrections };
  } catch (error) {
    if (!(error instanceof GoodBasisError) || error.code !== "budget") throw error;
    return undefined;
  }
}
