import type { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { ExactProblem } from "./problem.js";
import type { ExactProof, ProvedLeaf } from "./proof.js";
import type { Faults } from "./verify-faults.js";
import { apart, labelsApart } from "./verify-values.js";

/** Puts every stated correction x into (E − H0) x = Q V q and reads the second order from it again. */
export function verifySecondOrder(proof: ExactProof, problem: ExactProblem, faults: Faults): void {
  for (const [k, leaf] of proof.leaves.entries()) {
    const { second, corrections, energy } = leaf;
    const place = `leaf ${k}, second order`;
    if (second === undefined) {
      faults.unless(corrections.length === 0, place, "there are corrections but no second order");
      continue;
    }
    const complete =
      energy.kind === "value" &&
      corrections.length === problem.perturbations.length &&
      corrections.every((list) => list.length === leaf.vectors.length);
    if (!faults.unless(complete, place, "a correction is missing") || energy.kind !== "value") continue;
    const level = levelVectors(proof, energy.value);
    for (const [p, { operator }] of problem.perturbations.entries()) {
      for (const [j, q] of leaf.vectors.entries()) {
        const x = corrections[p]?.[j] as ExactVector;
        const outward = level.reduce((rest, u) => {
          const overlap = u.inner(rest);
          return overlap.isZero ? rest : rest.plus(u, overlap.over(u.squaredNorm).negate());
        }, operator.apply(q));
        const left = x.scale(energy.value).minus(problem.h0.apply(x));
        faults.unless(left.minus(outward).isZero, place, "a correction does not solve its equation");
        const orthogonal = level.every((u) => u.inner(x).isZero);
        faults.unless(orthogonal, place, "a correction is not orthogonal to the level");
      }
    }
    faults.unless(isRead(leaf, problem, second), place, "is not what the corrections give");
    verifyUnmixed(proof, problem, k, faults);
  }
}

/**
 * With one perturbation, E2 is an eigenvalue of W among the states of the same labels and first-order shift, so W must
 * not mix them.
 */
function verifyUnmixed(proof: ExactProof, { perturbations }: ExactProblem, k: number, faults: Faults): void {
  const [own, only] = [proof.leaves[k], perturbations[0]];
  if (own === undefined || only === undefined || perturbations.length > 1) return;
  for (const [j, other] of proof.leaves.entries()) {
    if (j === k || apart(own.energy, other.energy) || labelsApart(own, other)) continue;
    const [a, b] = [own.shifts[0]?.value, other.shifts[0]?.value];
    if (a === undefined || b === undefined || apart(a, b)) continue;
    const images = other.vectors.map((q) => only.operator.apply(q));
    const unmixed = own.corrections.every((list) => list.every((x) => images.every((image) => image.inner(x).isZero)));
    faults.unless(unmixed, `leaf ${k}, second order`, `W mixes it with leaf ${j}`);
  }
}

function levelVectors(proof: ExactProof, energy: Surd): ExactVector[] {
  return proof.leaves.flatMap((leaf) =>
    leaf.energy.kind === "value" && leaf.energy.value.equals(energy) ? leaf.vectors : [],
  );
}

function isRead(
  { vectors, corrections }: ProvedLeaf,
  { perturbations }: ExactProblem,
  second: readonly (readonly Surd[])[],
): boolean {
  return perturbations.every(({ operator }, p) =>
    vectors.every((left, i) => {
      const image = operator.apply(left);
      return corrections.every((list, q) =>
        list.every((x, j) => {
          const element = image.inner(x);
          if (i !== j) return element.isZero;
          return second[p]?.[q]?.equals(element.re.over(left.squaredNorm)) === true;
        }),
      );
    }),
  );
}
