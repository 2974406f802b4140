import type { ExactOperator } from "../exact/operator.js";
import { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { ExactProblem } from "./problem.js";
import type { BlockValue, ExactProof, ProvedLeaf } from "./proof.js";
import type { Faults } from "./verify-faults.js";
import { apart, labelsApart } from "./verify-values.js";

type Orders = Pick<ProvedLeaf["safe"], "energies" | "states">;

/** Derives the safe orders again, pair by pair from what tells the states apart, and compares. */
export function verifySafety(proof: ExactProof, problem: ExactProblem, faults: Faults): void {
  for (const [k, leaf] of proof.leaves.entries()) {
    faults.unless(isOfKind(leaf, problem), `leaf ${k}`, `is not ${leaf.kind === "state" ? "one state" : leaf.kind}`);
    const partners = new Set(
      proof.levels.flatMap(({ place, members }) => (leaf.levels.includes(place) ? members.map((m) => m.leaf) : [])),
    );
    partners.delete(k);
    const list = [...partners].flatMap((other) => proof.leaves[other] ?? []);
    const { energies, states } = expected(leaf, list, problem.perturbations.length);
    const said = leaf.safe.limitedBy === "" ? energies === "all" : energies !== "all";
    const right = said && leaf.safe.energies === energies && leaf.safe.states === states;
    faults.unless(right, `leaf ${k}, safe orders`, `are ${energies} for energies and ${states} for states`);
    const exact = leaf.energy.kind === "value" && leaf.shifts.every(({ value }) => value.kind === "value");
    const status = !exact ? "bounded" : leaf.kind === "separated" ? "separated" : "exact";
    faults.unless(leaf.status === status, `leaf ${k}, status`, `is ${status}, not ${leaf.status}`);
  }
}

function expected(own: ProvedLeaf, partners: readonly ProvedLeaf[], perturbations: number): Orders {
  if (own.kind === "together") {
    return { energies: own.second !== undefined && perturbations === 1 ? 2 : 1, states: "none" };
  }
  const close = partners.filter((other) => !labelsApart(own, other));
  const byV = close.filter((other) => own.shifts.some(({ value }, p) => isApart(value, other.shifts[p]?.value)));
  const rest = close.filter((other) => !byV.includes(other));
  if (rest.some((other) => perturbations > 1 || !secondApart(own, other))) return { energies: 1, states: "none" };
  if (byV.length > 0) {
    const each = byV.every((other) =>
      own.shifts.every(({ value }, p) => {
        const theirs = other.shifts[p]?.value;
        return value.kind === "value" && theirs?.kind === "value" && !value.value.equals(theirs.value);
      }),
    );
    return { energies: perturbations === 1 || each ? 2 : 1, states: 0 };
  }
  if (own.kind === "shifted") return { energies: 2, states: 0 };
  return rest.length > 0 ? { energies: 3, states: 0 } : { energies: "all", states: "all" };
}

function isApart(a: BlockValue, b: BlockValue | undefined): boolean {
  return b !== undefined && apart(a, b);
}

function secondApart(a: ProvedLeaf, b: ProvedLeaf): boolean {
  const [x, y] = [a.second?.[0]?.[0], b.second?.[0]?.[0]];
  return x !== undefined && y !== undefined && !x.equals(y);
}

function isOfKind(leaf: ProvedLeaf, problem: ExactProblem): boolean {
  const isSimple = (value: BlockValue | undefined): boolean =>
    value?.kind === "roots" && value.roots.multiplicity === 1;
  const one = leaf.vectors.length === 1;
  switch (leaf.kind) {
    case "state":
      return one;
    case "separated":
      return !one && (isSimple(leaf.energy) || isSeparated(leaf, problem));
    case "shifted":
      return !one && leaf.shifts.length === 1 && isSimple(leaf.shifts[0]?.value);
    case "together":
      return !one;
    default:
      return leaf.kind satisfies never;
  }
}

/**
 * Whether labels outside the field have different values for each state, together with the energy: then powers of a
 * combination of these operators make a basis of one vector.
 */
function isSeparated({ labels, energy, vectors }: ProvedLeaf, { h0, candidates }: ExactProblem): boolean {
  const operators = labels.flatMap(({ candidate, value }) =>
    value.kind === "roots" ? (candidates.find(({ name }) => name === candidate)?.operator ?? []) : [],
  );
  if (operators.length === 0) return false;
  const all = energy.kind === "roots" ? [...operators, h0] : operators;
  return TRIED.some((weight) => {
    const sum = all.reduce((total, operator, k) => total.plus(operator.scale(weight(k))), all[0]?.scale(0) ?? h0);
    return isCyclic(sum, vectors);
  });
}

/** Coefficients of operators and of vectors that are tried; small ones keep numbers short. */
const TRIED: readonly ((k: number) => number)[] = [
  (k) => (k === 0 ? 1 : 0),
  () => 1,
  (k) => k + 1,
  (k) => (k + 2) ** 2,
];

/**
 * Whether v, A v, A² v, … are independent up to the dimension, for some v: then no eigenvalue of a normal A occurs
 * twice.
 */
function isCyclic(operator: ExactOperator, vectors: readonly ExactVector[]): boolean {
  return TRIED.some((coefficient) => {
    const [first] = vectors;
    if (first === undefined) return false;
    let power = vectors.reduce((sum, q, k) => sum.plus(q, Surd.from(coefficient(k))), first.scale(0));
    const basis: ExactVector[] = [];
    while (basis.length < vectors.length) {
      const rest = basis.reduce(
        (left, unit) => left.plus(unit, unit.inner(left).over(unit.squaredNorm).negate()),
        power,
      );
      if (rest.isZero) return false;
      basis.push(rest);
      power = operator.apply(power);
    }
    return true;
  });
}
