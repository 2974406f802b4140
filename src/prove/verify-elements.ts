import type { ExactOperator } from "../exact/operator.js";
import type { ExactVector } from "../exact/vector.js";
import type { ExactProblem } from "./problem.js";
import type { ExactProof, ProvedLeaf, ProvedLevel, ProvedShift } from "./proof.js";
import type { Faults } from "./verify-faults.js";
import { annihilated, hasMultiplicities, hasSimpleRoots } from "./verify-values.js";

/** Evaluates every element of every perturbation between the states of one level, and compares the verdict. */
export function verifyElements(
  proof: ExactProof,
  problem: ExactProblem,
  level: ProvedLevel,
  place: string,
  faults: Faults,
): void {
  const names = problem.perturbations.map(({ name }) => name).join("\n");
  for (const { leaf } of level.members) {
    const stated = proof.leaves[leaf]?.shifts.map(({ perturbation }) => perturbation).join("\n");
    faults.unless(stated === names, `leaf ${leaf}`, "does not have one shift for each perturbation");
  }
  let listed = 0;
  for (const { name, operator } of problem.perturbations) {
    for (const { leaf } of level.members) {
      const own = proof.leaves[leaf] as ProvedLeaf;
      const shift = own.shifts.find(({ perturbation }) => perturbation === name);
      if (shift === undefined) continue;
      const right = hasShift(own.vectors, shift, operator);
      faults.unless(right, `leaf ${leaf}, shift by ${name}`, "is not what V does on the leaf");
    }
    listed += verifyCouplings(proof, level, { name, operator }, place, faults);
  }
  faults.unless(listed === level.couplings.length, place, `${listed} elements do not vanish`);
  const open = level.members.some(({ leaf, size }) => isOpen(proof, proof.leaves[leaf] as ProvedLeaf, size));
  if (level.couplings.length > 0) faults.unless(level.verdict === "not good", place, "is not good");
  else if (open) faults.unless(level.verdict === "undecided", place, "is undecided: a leaf is left to bounds");
  else faults.unless(level.verdict !== "not good", place, "no element spoils it");
}

/** Whether V, restricted to the leaf, is what the shift says; nothing is claimed by an unknown one. */
function hasShift(vectors: readonly ExactVector[], { value }: ProvedShift, v: ExactOperator): boolean {
  if (value.kind === "unknown") return true;
  const inside = (x: ExactVector): ExactVector => {
    const image = v.apply(x);
    return vectors.reduce((sum, q) => sum.plus(q, q.inner(image).over(q.squaredNorm)), x.scale(0));
  };
  if (value.kind === "value") return vectors.every((q) => inside(q).minus(q.scale(value.value)).isZero);
  return (
    hasSimpleRoots(value.roots) &&
    vectors.every((q) => annihilated(value.roots.polynomial, inside, q)) &&
    hasMultiplicities(value.roots, inside, vectors)
  );
}

/** Counts the elements that must be listed and checks that they are. */
function verifyCouplings(
  proof: ExactProof,
  level: ProvedLevel,
  { name, operator }: { readonly name: string; readonly operator: ExactOperator },
  place: string,
  faults: Faults,
): number {
  const vectors = vectorsOf(proof, level);
  const atKet = new Map<number, number[]>();
  for (const [j, { vector }] of vectors.entries()) {
    for (const ket of vector.index) atKet.set(ket, [...(atKet.get(ket) ?? []), j]);
  }
  let count = 0;
  for (const [j, right] of vectors.entries()) {
    const image = operator.apply(right.vector);
    const met = new Set([...image.index].flatMap((ket) => atKet.get(ket) ?? []));
    for (const i of met) {
      const left = vectors[i];
      if (left === undefined || i >= j || merelySpan(proof, left.leaf, right.leaf)) continue;
      const element = left.vector.inner(image);
      if (element.isZero) continue;
      count++;
      const square = element.squaredModulus().over(left.vector.squaredNorm).over(right.vector.squaredNorm);
      const stated = level.couplings.find(
        ({ perturbation, states: [[a, x], [b, y]] }) =>
          perturbation === name && a === left.leaf && x === left.place && b === right.leaf && y === right.place,
      );
      const message = `${name} couples leaves ${left.leaf} and ${right.leaf}, squared modulus ${square.text()}`;
      faults.unless(stated?.squaredModulus.equals(square) === true, place, message);
    }
  }
  return count;
}

/** Whether two vectors span one leaf without being states by themselves. */
function merelySpan(proof: ExactProof, a: number, b: number): boolean {
  const leaf = proof.leaves[a];
  if (a !== b || leaf === undefined) return false;
  if (leaf.kind === "separated" || leaf.energy.kind !== "value") return true;
  return proof.depth !== "labels" && leaf.shifts.some(({ value }) => value.kind !== "value");
}

/** Whether a perturbation may couple states inside a leaf. */
function isOpen({ depth }: ExactProof, { kind, energy, shifts }: ProvedLeaf, size: number): boolean {
  if (size === 1 || kind !== "together" || depth === "labels") return false;
  return energy.kind !== "value" || shifts.some(({ value }) => value.kind !== "value");
}

/** All vectors of a level, with the number of their leaf. */
function vectorsOf(
  proof: ExactProof,
  level: Pick<ProvedLevel, "members">,
): { readonly leaf: number; readonly place: number; readonly vector: ExactVector }[] {
  return level.members.flatMap(({ leaf }) =>
    (proof.leaves[leaf]?.vectors ?? []).map((vector, place) => ({ leaf, place, vector })),
  );
}
