import type { Audit, CandidateFinding } from "../audit/audit.js";
import type { CommutatorFinding } from "../audit/commutators.js";
import type { PreparedProblem } from "../audit/problem.js";
import { roundUp } from "../numerics/rounding.js";
import type { PathStep, TreeNode } from "../refine/tree.js";
import type { LevelCouplings, NodeEvidence } from "./couplings.js";
import { shiftSpread } from "./judge.js";
import { rootSumSquares } from "./residuals.js";
import type { NearbyModel, SeparatorEvidence, SpaceEvidence } from "./whole.js";

/**
 * The distance to the nearest model in which every label used is exact, and V scalar wherever the second-order operator tells states
 * apart.
 *
 * Dropping V's elements between blocks of different labels gives V' that commutes with the labels. For the pairs that A tells apart,
 * (a_μ − a_ν) V_μν = q_μ†C q_ν − s_μ†V q_ν + q_μ†V r_ν with C = [A, V], so the dropped part has Frobenius norm at most
 * (‖C‖_F + 2‖V‖ρ)/gap, ρ the Frobenius norm of all residuals; several labels add. A label found inside levels counts with the states
 * that it tells apart there. A block that the second-order operator refines is scalar under V up to the spread of its shifts and its
 * elements off the diagonal, which are dropped too.
 */
export function nearbyModel(
  problem: PreparedProblem,
  audit: Audit,
  whole: SpaceEvidence,
  levels: readonly LevelCouplings[],
  nodes: readonly TreeNode[],
): NearbyModel {
  const separators = [...whole.separators, ...insideLevels(problem, levels, nodes)];
  const epsilon = whole.orthonormality;
  const distance = (
    norm: number,
    commutator: (finding: CandidateFinding) => CommutatorFinding | undefined,
    more: number,
  ): number => {
    let sum = 0;
    for (const { candidate, gap, residual } of separators) {
      if (gap === Number.POSITIVE_INFINITY) continue;
      const finding = audit.candidates[candidate];
      const bound = finding === undefined ? undefined : commutator(finding)?.frobeniusBound;
      if (bound === undefined) continue;
      sum += (bound * (1 + epsilon) + 2 * norm * residual) / gap;
    }
    return roundUp(sum + 2 * norm * epsilon + more, 4 * separators.length + 8);
  };
  return {
    eta0: distance(problem.h0.norm + problem.h0.error, (finding) => finding.withH0, 0),
    eta: problem.perturbations.map(({ operator }, k) =>
      distance(
        operator.norm + operator.error,
        (finding) => finding.withPerturbations[k],
        levels.reduce((most, level) => Math.max(most, unevenness(level, nodes, k)), 0),
      ),
    ),
  };
}

/** Labels found inside levels, one entry for each candidate. */
function insideLevels(
  problem: PreparedProblem,
  levels: readonly LevelCouplings[],
  nodes: readonly TreeNode[],
): SeparatorEvidence[] {
  const found = levels.flatMap((level) =>
    level.nodes.filter((node) => node.kind === "label" && isInside(node.node, nodes)),
  );
  return problem.candidates.flatMap(({ name }, candidate): SeparatorEvidence[] => {
    const own = found.filter((node) => node.operator === name);
    if (own.length === 0) return [];
    const share = ({ node, residual }: NodeEvidence): number => residual * Math.sqrt(nodes[node]?.size ?? 0);
    return [
      {
        candidate,
        gap: own.reduce((least, node) => Math.min(least, node.gap), Number.POSITIVE_INFINITY),
        residual: rootSumSquares(Float64Array.from(own, share)),
      },
    ];
  });
}

/** Whether a node lies below one of H0: inside a level. */
function isInside(node: number, nodes: readonly TreeNode[]): boolean {
  for (let at: PathStep | undefined = nodes[node]?.from; at !== undefined; at = nodes[at.node]?.from) {
    if (nodes[at.node]?.kind === "energy") return true;
  }
  return false;
}

/** How far V is from scalar on the blocks of a level that the second-order operator refines. */
function unevenness(level: LevelCouplings, nodes: readonly TreeNode[], k: number): number {
  const blocks = level.nodes.filter((node) => node.kind === "second order");
  if (blocks.length === 0) return 0;
  const spread = blocks.reduce((most, node) => Math.max(most, shiftSpread(level, nodes, node.node)), 0);
  return spread + (level.offDiagonal[k] ?? 0);
}
