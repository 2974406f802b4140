import type { Audit, CandidateFinding } from "../audit/audit.js";
import type { CommutatorFinding } from "../audit/commutators.js";
import type { PreparedProblem } from "../audit/problem.js";
import { roundUp } from "../numerics/rounding.js";
import type { Complex } from "../refine/eigenspaces.js";
import type { BlockLabel, Sector, Sectors } from "../refine/sectors.js";
import type { TreeNode } from "../refine/tree.js";
import { adjointImages, imageError, images, residualBounds, rootSumSquares } from "./residuals.js";

/** How sharply one candidate labels the whole basis. */
export interface SeparatorEvidence {
  readonly candidate: number;
  /** Smallest distance between two of its eigenvalues that occur in one block; Infinity if it separates nothing. */
  readonly gap: number;
  /** Bound on the Frobenius norm of all residuals (A − a) q over the vectors it labels. */
  readonly residual: number;
}

/**
 * The distance to the nearest exactly symmetric model: H0' and V' that commute with every label used, with
 * ‖H0 − H0'‖ ≤ eta0 and ‖V − V'‖ ≤ eta for each perturbation.
 */
export interface NearbyModel {
  readonly eta0: number;
  readonly eta: readonly number[];
}

/** What holds for the whole space, before any level is looked at. */
export interface WholeEvidence {
  /** Bound on ‖F F† − 1‖₂ for the basis of all sectors. */
  readonly orthonormality: number;
  /** Bound on the Frobenius norm of all residuals H0 q − E q. */
  readonly energyResidual: number;
  /** Every exact eigenvalue of H0 lies within this of the computed one in the same place. */
  readonly energyEnclosure: number;
  readonly separators: readonly SeparatorEvidence[];
  readonly nearby: NearbyModel;
}

/**
 * Bounds for the whole basis.
 *
 * *Energies.* With U the unitary polar factor of F, ‖F − U‖ ≤ ‖FF† − 1‖ = ε, and H0 U† − U†Λ is within the residuals plus
 * 2‖H0‖ε, so by Weyl's inequality every eigenvalue is within that of its computed partner.
 *
 * *The nearby model.* Dropping V's elements between blocks of different labels gives V' that commutes with the labels. For
 * the pairs that A tells apart, (a_μ − a_ν) V_μν = q_μ†C q_ν − s_μ†V q_ν + q_μ†V r_ν with C = [A, V], so the dropped part
 * has Frobenius norm at most (‖C‖_F + 2‖V‖ρ)/gap, ρ the Frobenius norm of all residuals; several labels add.
 */
export function wholeEvidence(
  problem: PreparedProblem,
  audit: Audit,
  sectors: Sectors,
  nodes: readonly TreeNode[],
): WholeEvidence {
  const { h0 } = problem;
  const residuals: number[] = [];
  const error = imageError(h0);
  for (const sector of sectors.sectors) {
    const { energies, frame } = sector;
    const bounds = residualBounds(images(frame, h0), frame, (row) => ({ re: energies[row] as number, im: 0 }), error);
    residuals.push(rootSumSquares(bounds));
  }
  const energyResidual = rootSumSquares(Float64Array.from(residuals));
  const epsilon = sectors.defect;
  const separators = separatorEvidence(problem, sectors.sectors, nodes);
  return {
    orthonormality: epsilon,
    energyResidual,
    energyEnclosure: roundUp(energyResidual * (1 + epsilon) + 2 * h0.norm * epsilon + h0.error),
    separators,
    nearby: nearbyModel(problem, audit, separators, epsilon),
  };
}

function separatorEvidence(
  problem: PreparedProblem,
  sectors: readonly Sector[],
  nodes: readonly TreeNode[],
): SeparatorEvidence[] {
  return problem.candidates.flatMap((candidate, place) => {
    const used = sectors.filter((sector) => sector.labels.some((label) => label.candidate === place));
    if (used.length === 0) return [];
    const gap = Math.min(
      ...nodes
        .filter((node) => node.kind === "label" && node.operator === candidate.name)
        .map((node) => smallestGap(node.values)),
    );
    const error = imageError(candidate.operator);
    const squares = used.map((sector) => {
      const { value } = sector.labels.find((label) => label.candidate === place) as BlockLabel;
      const direct = residualBounds(images(sector.frame, candidate.operator), sector.frame, () => value, error);
      if (candidate.kind === "hermitian") return rootSumSquares(direct);
      const conjugated = { re: value.re, im: -value.im };
      const adjoint = adjointImages(sector.frame, candidate.operator);
      return Math.max(
        rootSumSquares(direct),
        rootSumSquares(residualBounds(adjoint, sector.frame, () => conjugated, error)),
      );
    });
    return [{ candidate: place, gap, residual: rootSumSquares(Float64Array.from(squares)) }];
  });
}

/** Smallest distance between two of the given eigenvalues; Infinity for fewer than two. */
export function smallestGap(values: readonly Complex[]): number {
  let gap = Number.POSITIVE_INFINITY;
  if (values.every((value) => value.im === 0)) {
    const sorted = Float64Array.from(values, (value) => value.re).sort();
    for (let k = 1; k < sorted.length; k++) gap = Math.min(gap, (sorted[k] as number) - (sorted[k - 1] as number));
    return gap;
  }
  values.forEach((a, k) => {
    for (const b of values.slice(0, k)) gap = Math.min(gap, Math.hypot(a.re - b.re, a.im - b.im));
  });
  return gap;
}

function nearbyModel(
  problem: PreparedProblem,
  audit: Audit,
  separators: readonly SeparatorEvidence[],
  epsilon: number,
): NearbyModel {
  const distance = (norm: number, commutator: (finding: CandidateFinding) => CommutatorFinding | undefined): number => {
    let sum = 0;
    for (const { candidate, gap, residual } of separators) {
      if (gap === Number.POSITIVE_INFINITY) continue;
      const finding = audit.candidates[candidate];
      const bound = finding === undefined ? undefined : commutator(finding)?.frobeniusBound;
      if (bound === undefined) continue;
      sum += (bound * (1 + epsilon) + 2 * norm * residual) / gap;
    }
    return roundUp(sum + 2 * norm * epsilon, 4 * separators.length + 8);
  };
  return {
    eta0: distance(problem.h0.norm + problem.h0.error, (finding) => finding.withH0),
    eta: problem.perturbations.map(({ operator }, k) =>
      distance(operator.norm + operator.error, (finding) => finding.withPerturbations[k]),
    ),
  };
}
