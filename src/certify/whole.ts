import type { PreparedCandidate, PreparedProblem } from "../audit/problem.js";
import type { Complex } from "../numerics/complex.js";
import { roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { adjointImages, images } from "../operator/images.js";
import type { Sector, Sectors } from "../refine/sectors.js";
import type { TreeNode } from "../refine/tree.js";
import { imageError, residualBounds, residualRows, rootSumSquares } from "./residuals.js";

/** How sharply one candidate labels the whole basis. */
export interface SeparatorEvidence {
  /** Place of the candidate among the problem's. */
  readonly candidate: number;
  /** Smallest distance between two of its eigenvalues that occur in one block; Infinity if it separates nothing. */
  readonly gap: number;
  /** Bound on the Frobenius norm of all residuals (A − a) q over the vectors it labels. */
  readonly residual: number;
}

/**
 * The distance to the nearest exactly symmetric model: H0' and V' that commute with every label used, with
 * ‖H0 − H0'‖ ≤ eta0 and ‖V − V'‖ ≤ eta for each perturbation, and in which V is scalar where the second order tells states apart.
 */
export interface NearbyModel {
  /** Bound on ‖H0 − H0'‖. */
  readonly eta0: number;
  /** Bound on ‖V − V'‖ for each perturbation. */
  readonly eta: readonly number[];
}

/** What holds for the whole space, before any level is looked at. */
export interface SpaceEvidence {
  /** Bound on ‖F F† − 1‖₂ for the basis of all sectors. */
  readonly orthonormality: number;
  /** Bound on the Frobenius norm of all residuals H0 q − E q. */
  readonly energyResidual: number;
  /** Every exact eigenvalue of H0 lies within this of the computed one in the same place. */
  readonly energyEnclosure: number;
  /** The candidates that label the basis. */
  readonly separators: readonly SeparatorEvidence[];
  /** Bounds sector by sector. */
  readonly sectors: readonly SectorEvidence[];
}

/** What holds for the whole space. */
export interface WholeEvidence extends SpaceEvidence {
  /** Distance to the nearest exactly symmetric model. */
  readonly nearby: NearbyModel;
}

/** What holds for the vectors of one sector. */
export interface SectorEvidence {
  /** Bounds on ‖H0 q − E q‖ of its vectors. */
  readonly energyResiduals: Float64Array;
  /** For each candidate that labels it: bound on ‖A q − a q‖ and ‖A†q − a*q‖ for every unit vector of the sector. */
  readonly labelResiduals: ReadonlyMap<number, number>;
}

/**
 * Bounds for the whole basis.
 *
 * *Energies.* With U the unitary polar factor of F, ‖F − U‖ ≤ ‖FF† − 1‖ = ε, and H0 U† − U†Λ is within the residuals plus
 * 2‖H0‖ε, so by Weyl's inequality every eigenvalue is within that of its computed partner.
 */
export function wholeEvidence(problem: PreparedProblem, sectors: Sectors, nodes: readonly TreeNode[]): SpaceEvidence {
  const { h0 } = problem;
  const error = imageError(h0);
  const epsilon = sectors.defect;
  const labels = problem.candidates.map((candidate) => labelJudge(candidate, epsilon));
  const frobenius = problem.candidates.map((): number[] => []);
  const evidence = sectors.sectors.map((sector): SectorEvidence => {
    const { energies, frame } = sector;
    const energy = (row: number): Complex => ({ re: energies[row] as number, im: 0 });
    const labelResiduals = new Map<number, number>();
    for (const { candidate, value } of sector.labels) {
      const bound = labels[candidate]?.(sector, value);
      if (bound === undefined) continue;
      labelResiduals.set(candidate, bound.norm);
      frobenius[candidate]?.push(bound.frobenius);
    }
    return { energyResiduals: residualBounds(images(frame, h0), frame, energy, error), labelResiduals };
  });
  const energyResidual = rootSumSquares(
    new Float64Array(evidence.map(({ energyResiduals }) => rootSumSquares(energyResiduals))),
  );
  const separators = problem.candidates.flatMap((candidate, place): SeparatorEvidence[] => {
    const own = frobenius[place] ?? [];
    if (own.length === 0) return [];
    const gaps = nodes.flatMap((node) =>
      node.kind === "label" && node.operator === candidate.name ? [smallestGap(node.values)] : [],
    );
    return [{ candidate: place, gap: Math.min(...gaps), residual: rootSumSquares(new Float64Array(own)) }];
  });
  return {
    orthonormality: epsilon,
    energyResidual,
    energyEnclosure: roundUp(energyResidual * (1 + epsilon) + 2 * h0.norm * epsilon + h0.error),
    separators,
    sectors: evidence,
  };
}

/**
 * Residual bounds of one candidate over whole sectors, taken on the vectors before H0 was diagonalised: a unit combination of
 * them has a residual of at most the norm of all their residuals together, and the rounding of the combination adds at most
 * 2‖A‖ times its size.
 */
function labelJudge(
  candidate: PreparedCandidate,
  epsilon: number,
): (sector: Sector, value: Complex) => { norm: number; frobenius: number } {
  const { operator, kind } = candidate;
  const error = imageError(operator);
  return (sector, value) => {
    const frame = sector.labelFrame;
    const sides = [residualRows(images(frame, operator), frame, value)];
    if (kind !== "hermitian") {
      sides.push(residualRows(adjointImages(frame, operator), frame, { re: value.re, im: -value.im }));
    }
    const size = Math.sqrt(frame.rows);
    // the rows' rounding errors together: at most √d times one row's
    const rounding = size * (error + 5 * UNIT_ROUNDOFF * (Math.abs(value.re) + Math.abs(value.im)));
    const composed = 2 * (operator.norm + operator.error) * sector.rowError;
    const norm = Math.max(...sides.map((side) => side.norm));
    const frobenius = Math.max(...sides.map((side) => side.frobenius));
    return {
      norm: roundUp((Math.min(norm, frobenius) + rounding) * (1 + epsilon) + composed, 32),
      frobenius: roundUp((frobenius + rounding) * (1 + epsilon) + size * composed, 32),
    };
  };
}

/** Smallest distance between two of the given eigenvalues; Infinity for fewer than two. */
export function smallestGap(values: readonly Complex[]): number {
  let gap = Number.POSITIVE_INFINITY;
  if (values.length < 2) return gap;
  if (values.every((value) => value.im === 0)) {
    const sorted = new Float64Array(values.map((value) => value.re)).sort();
    for (let k = 1; k < sorted.length; k++) gap = Math.min(gap, (sorted[k] as number) - (sorted[k - 1] as number));
    return gap;
  }
  values.forEach((a, k) => {
    for (const b of values.slice(0, k)) gap = Math.min(gap, Math.hypot(a.re - b.re, a.im - b.im));
  });
  return gap;
}
