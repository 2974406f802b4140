import type { ExactOperator } from "../exact/operator.js";
import type { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { ExactProblem } from "./problem.js";
import type { BlockValue } from "./proof.js";

/** A state whose phase a ladder may fix. */
export interface Laddered {
  readonly labels: readonly { readonly candidate: number; readonly value: BlockValue }[];
  readonly vector: ExactVector;
}

/**
 * Fixes relative phases inside multiplets, exactly: for every candidate with a ladder operator L, ⟨upper|L|lower⟩ becomes
 * real and positive (Condon and Shortley, The Theory of Atomic Spectra, 1935). The topmost state of a chain keeps its
 * phase.
 *
 * Two states are linked where L maps one to the other and to no other state of the level.
 *
 * @param states - of one level, phases fixed one by one
 * @returns their vectors
 */
export function alignByLadders(problem: ExactProblem, states: readonly Laddered[]): ExactVector[] {
  const vectors = states.map(({ vector }) => vector);
  for (const [place, { ladder }] of problem.candidates.entries()) {
    if (ladder !== undefined) align(ladder, place, states, vectors);
  }
  return vectors;
}

function align(ladder: ExactOperator, place: number, states: readonly Laddered[], vectors: ExactVector[]): void {
  const rungs = states
    .flatMap(({ labels }, state) => {
      const value = labels.find((label) => label.candidate === place)?.value;
      return value?.kind === "value" && value.value.isReal ? [{ state, value: value.value }] : [];
    })
    .sort((a, b) => b.value.compare(a.value) || a.state - b.state);
  for (const lower of rungs) {
    const image = ladder.apply(vectors[lower.state] as ExactVector);
    if (image.isZero) continue;
    const links: Surd[] = [];
    for (const upper of rungs) {
      if (upper.value.compare(lower.value) <= 0) break;
      const element = (vectors[upper.state] as ExactVector).inner(image);
      if (!element.isZero) links.push(element);
    }
    const [element, ...more] = links;
    if (element === undefined || more.length > 0) continue;
    const turn = element.isReal ? element.sign() : element.conjugate();
    vectors[lower.state] = (vectors[lower.state] as ExactVector).scale(turn).primitive();
  }
}
