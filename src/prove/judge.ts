import type { Depth } from "../refine/resolve.js";
import { type LevelVector, levelCouplings } from "./couplings.js";
import type { LevelDraft, LevelDrafts } from "./levels.js";
import type { ExactProblem } from "./problem.js";
import type { ProvedCoupling, ProvedLeaf, ProvedLevel } from "./proof.js";

/** Whether the level is known to have no more states: no block of unknown energies stands in a sector of it. */
function isComplete({ unknown }: LevelDrafts, { blocks }: LevelDraft): boolean {
  // a state in any other sector is told apart by its labels
  return unknown.every(({ sector }) => blocks.every((member) => member.sector !== sector));
}

/** Judges a level: every element of every perturbation between its states is looked at, exactly. */
export function judgeLevel(
  problem: ExactProblem,
  drafts: LevelDrafts,
  place: number,
  leaves: readonly ProvedLeaf[],
  depth: Depth,
): ProvedLevel {
  const draft = drafts.levels[place] as LevelDraft;
  const degeneracy = draft.blocks.reduce((sum, { size }) => sum + size, 0);
  const members = leaves.flatMap((leaf, k) => {
    if (!leaf.levels.includes(place)) return [];
    const { energy } = leaf;
    return [{ leaf: k, size: energy.kind === "roots" ? energy.roots.multiplicity : leaf.vectors.length }];
  });
  const single = members.length === 1 && degeneracy === 1;
  const exact = draft.energy.kind === "value";
  const vectors = members.flatMap(({ leaf }): LevelVector[] =>
    (leaves[leaf]?.vectors ?? []).map((vector, at) => ({ leaf, place: at, vector })),
  );
  const couplings = exact ? levelCouplings(vectors, problem.perturbations) : [];
  const byLabels = depth === "labels";
  const open = byLabels ? [] : members.filter(({ leaf, size }) => isOpen(leaves[leaf] as ProvedLeaf, size));
  // vectors that merely span a leaf are no states to be coupled
  const inside = ({ states: [[a], [b]] }: ProvedCoupling): boolean =>
    a === b && (leaves[a]?.kind === "separated" || (!byLabels && hasOpenShift(leaves[a] as ProvedLeaf)));
  const outside = couplings.filter((coupling) => !inside(coupling));
  const whole = isComplete(drafts, draft);
  const verdict = outside.length > 0 ? "not good" : open.length === 0 && whole ? "good" : "undecided";
  return {
    place,
    energy: draft.energy,
    degeneracy,
    members,
    verdict,
    couplings: outside,
    sentence: sentenceOf(verdict, { single, exact, open: open.length, whole, couplings: outside.length }),
  };
}

/** Whether a perturbation may couple states of one level inside a leaf. */
function isOpen(leaf: ProvedLeaf, size: number): boolean {
  return size > 1 && leaf.kind === "together" && (leaf.energy.kind !== "value" || hasOpenShift(leaf));
}

function hasOpenShift({ shifts }: Pick<ProvedLeaf, "shifts">): boolean {
  return shifts.some(({ value }) => value.kind !== "value");
}

function sentenceOf(
  verdict: ProvedLevel["verdict"],
  found: { single: boolean; exact: boolean; open: number; whole: boolean; couplings: number },
): string {
  const energy = found.exact ? "" : " (its energy leaves the field)";
  switch (verdict) {
    case "good":
      return found.single
        ? `one state${energy}: nothing to couple`
        : `every element of every perturbation between different states vanishes exactly${energy}`;
    case "not good":
      return `${found.couplings} elements between states do not vanish${energy}`;
    case "undecided":
      return found.whole
        ? `${found.open} leaves are left to rigorous bounds${energy}; the others vanish exactly`
        : "the budget leaves energies of the same sector unknown, so that the level may have more states";
    default:
      return verdict satisfies never;
  }
}
