import type { ExactVector } from "../exact/vector.js";
import type { ExactProblem } from "./problem.js";
import type { BlockValue, ExactProof, ProvedLabel } from "./proof.js";
import type { Faults } from "./verify-faults.js";
import { labelFits } from "./verify-labels.js";
import { actsAs, hasMultiplicities, hasSimpleRoots } from "./verify-values.js";

/** Everything that is stated of a set of vectors: leaves and background alike. */
interface Stated {
  readonly place: string;
  readonly labels: readonly ProvedLabel[];
  readonly energy: BlockValue;
  readonly vectors: readonly ExactVector[];
}

/** Checks that the vectors are n mutually orthogonal ones, and eigenvectors as stated. */
export function verifyVectors(proof: ExactProof, problem: ExactProblem, faults: Faults): void {
  const stated: Stated[] = [
    ...proof.leaves.map((leaf, k) => ({ ...leaf, place: `leaf ${k}` })),
    ...proof.background.map((block, k) => ({ ...block, place: `background ${k}` })),
  ];
  const vectors = stated.flatMap((own) => own.vectors.map((vector) => ({ vector, place: own.place })));
  const count = vectors.length;
  faults.unless(count === proof.n, "vectors", `there are ${count} in a space of dimension ${proof.n}`);
  const sound = vectors.every(({ vector, place }) =>
    faults.unless(vector.n === proof.n && !vector.isZero, place, "a vector is zero or over other kets"),
  );
  if (!sound) return;
  verifyOrthogonality(vectors, faults);
  for (const own of stated) verifyEigenvectors(own, proof, problem, faults);
}

function verifyOrthogonality(
  vectors: readonly { readonly vector: ExactVector; readonly place: string }[],
  faults: Faults,
): void {
  const atKet = new Map<number, number[]>();
  for (const [j, { vector, place }] of vectors.entries()) {
    const met = new Set<number>();
    for (const ket of vector.index) {
      const list = atKet.get(ket) ?? [];
      for (const k of list) met.add(k);
      list.push(j);
      atKet.set(ket, list);
    }
    for (const k of met) {
      const other = vectors[k];
      if (other === undefined || other.vector.inner(vector).isZero) continue;
      faults.unless(false, place, `a vector is not orthogonal to one of ${other.place}`);
    }
  }
}

function verifyEigenvectors(own: Stated, proof: ExactProof, problem: ExactProblem, faults: Faults): void {
  const { place, labels, energy, vectors } = own;
  verifyValue(`${place}, energy`, energy, faults);
  faults.unless(
    vectors.every((vector) => actsAs(energy, problem.h0, vector)),
    `${place}, energy`,
    "a vector is no eigenvector of H0 with this energy",
  );
  if (energy.kind === "roots") {
    const right = hasMultiplicities(energy.roots, (v) => problem.h0.apply(v), vectors);
    faults.unless(right, `${place}, energy`, "the roots do not occur as often as stated");
  }
  const seen = new Set<string>();
  for (const { candidate, value, text } of labels) {
    const at = `${place}, label ${candidate}`;
    const index = problem.candidates.findIndex(({ name }) => name === candidate);
    const operator = problem.candidates[index]?.operator;
    const finding = proof.audit.candidates[index];
    faults.unless(!seen.has(candidate), at, "is given twice");
    seen.add(candidate);
    if (operator === undefined || finding === undefined) {
      faults.unless(false, at, "there is no such candidate");
      continue;
    }
    faults.unless(finding.conserved, at, "the candidate is not conserved");
    verifyValue(at, value, faults);
    const holds = vectors.every((vector) => actsAs(value, operator, vector));
    faults.unless(holds, at, "a vector is no eigenvector with this label");
    const fits = labelFits(text, value, proof.families[candidate], finding.order);
    faults.unless(fits, at, `"${text}" does not name the eigenvalue`);
  }
}

function verifyValue(place: string, value: BlockValue, faults: Faults): void {
  if (value.kind === "roots") faults.unless(hasSimpleRoots(value.roots), place, "the roots are not isolated");
}
