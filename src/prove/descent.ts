import type { ProofBudget } from "./budget.js";
import { Frame } from "./frame.js";
import type { ExactProblem } from "./problem.js";
import type { BlockValue } from "./proof.js";
import { refineHermitian, refineNormal, within } from "./refine.js";
import type { ProofBlock, ProofTree } from "./tree.js";

/** The states of one sector and one energy, or those of a sector whose energies leave the field. */
export interface EnergyBlock extends ProofBlock {
  readonly energy: BlockValue;
}

/** A symmetry sector: what no conserved candidate takes further apart, with H0 refined inside. */
export interface ExactSector {
  /** By ascending energy where it is exact. */
  readonly blocks: readonly EnergyBlock[];
}

/**
 * Refines the whole space by the conserved candidates in their order, each block by whatever maps it into itself, and
 * every sector by H0. Symmetries come first, so that roots that H0 needs elsewhere do no harm here.
 *
 * @param conserved - places of the conserved candidates
 */
export function descend(
  problem: ExactProblem,
  conserved: readonly number[],
  tree: ProofTree,
  budget: ProofBudget,
): ExactSector[] {
  const whole: ProofBlock = { frame: Frame.kets(problem.h0.n), labels: [], path: [] };
  const byEnergy = (block: ProofBlock): EnergyBlock[] =>
    (
      tree.refine(block, { kind: "energy", operator: "H0" }, () =>
        refineHermitian(block.frame, within(problem.h0, budget), budget),
      ) ?? []
    ).map(({ child, path }) => ({ ...block, frame: child.frame, path, energy: child.value }));
  return refineByCandidates(problem, whole, conserved, tree, budget).map((sector): ExactSector => {
    const blocks = byEnergy(sector).flatMap((block): EnergyBlock[] => {
      if (block.energy.kind !== "roots") return [block];
      // a candidate may divide the states of each root; how often each occurs in the parts is for H0 to say again
      const parts = refineByCandidates<ProofBlock>(problem, block, conserved, tree, budget);
      return parts.length === 1 ? [block] : parts.flatMap(byEnergy);
    });
    return { blocks };
  });
}

/** Refines a block by every candidate that maps it, or what has become of it, into itself. */
export function refineByCandidates<B extends ProofBlock>(
  problem: ExactProblem,
  block: B,
  open: readonly number[],
  tree: ProofTree,
  budget: ProofBudget,
): B[] {
  for (const place of open) {
    const candidate = problem.candidates[place];
    if (candidate === undefined || block.labels.some((label) => label.candidate === place)) continue;
    const title = { kind: "label", operator: candidate.name } as const;
    const split = tree.refine(block, title, () => refineNormal(block.frame, candidate.operator, budget));
    if (split === undefined) continue;
    const rest = open.filter((other) => other !== place);
    return split.flatMap(({ child, path }) => {
      const labels = [...block.labels, { candidate: place, value: child.value }];
      return refineByCandidates(problem, { ...block, frame: child.frame, path, labels }, rest, tree, budget);
    });
  }
  return [block];
}
