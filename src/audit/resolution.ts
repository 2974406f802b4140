import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import { UNIT_ROUNDOFF } from "../numerics/rounding.js";
import type { Operator } from "../operator/operator.js";

/**
 * The named thresholds of the library, in one place. All are relative; none enters a certificate except as the stated
 * resolution against which a verdict is given.
 */

/** A coupling inside a level counts as vanished when its bound is below this fraction of {@link couplingScale}. */
export const DEFAULT_RESOLUTION = 1e-10;

/**
 * A commutator counts as vanished when its bound is below this fraction of the resolution, see {@link commutatorThreshold}: a label
 * must be conserved more sharply than the couplings it is to rule out, since these are the commutator divided by a difference of labels.
 */
export const COMMUTATOR_SHARE: number = 1 / 64;

/** See {@link couplingScale}. */
const OFFSET_SHARE = 2 ** -13;

/** "Far below": a level's spread must stay under this fraction of the gap around it and of the splittings inside it. */
export const FAR_BELOW = 1e-3;

/** Energies closer than this fraction of ‖H0‖ are tried as one level when the caller states no width. */
export const LEVEL_WIDTH: number = 2 ** -42;

/** Eigenvalues of an operator A closer than this fraction of ‖A‖ are tried as one. */
export const LABEL_WIDTH: number = 2 ** -36;

/** Entries of a restricted operator A below this fraction of ‖A‖ are taken as zero when looking for structure. */
export const NOISE: number = 2 ** -43;

/** With λ stated by the caller: largest ratio λ‖P_k V P_n‖ / |E_k − E_n| that is not refused. */
export const REFUSE_ABOVE = 1;

/** With no λ stated: the same ratio for V as it stands; only a near-degeneracy, or a V stronger than H0's gaps, exceeds it. */
export const REFUSE_ABOVE_UNSTATED = 8;

/**
 * What couplings by V are measured against: a rigorous lower bound on ‖V − tr V/n‖, since a multiple of 1 couples nothing, but at least
 * 1/8192 of one on ‖V‖, below which an offset leaves its rounding; and that one itself where V may be nothing but a multiple of 1, to
 * within its uncertainty and 8 n u ‖V‖.
 */
export function couplingScale(operator: Operator): number {
  const { variation, n, norm } = operator;
  if (variation > norm * OFFSET_SHARE) return variation;
  return variation > 8 * n * UNIT_ROUNDOFF * norm
    ? Math.max(variation, operator.normAtLeast * OFFSET_SHARE)
    : operator.normAtLeast;
}

/**
 * Up to what bound a commutator [A, B] counts as vanished: a share of the resolution, relative to {@link couplingScale} of both, but at
 * least what the rounding of products leaves of ‖A‖‖B‖. Couplings are evaluated besides, and held to the resolution itself.
 */
export function commutatorThreshold(a: Operator, b: Operator, resolution: number): number {
  const rounding = 8 * a.n * UNIT_ROUNDOFF * (a.norm * b.norm);
  return Math.max(resolution * COMMUTATOR_SHARE * (couplingScale(a) * couplingScale(b)), rounding);
}

/**
 * Entries of H0 and V may not be larger. Bounds take squares of products of two operators, summed over up to n⁴ places:
 * 4 n⁴ (10⁶⁰)⁴ stays a double for every n below 2³¹. No unit of energy needs more.
 */
export const LARGEST_ENERGY = 1e60;

/** Entries of candidates and ladder operators may not be larger: their squares must be doubles, as must their products with H0 and V. */
export const LARGEST_CANDIDATE = 1e150;

/**
 * What the rounding of a computed matrix may leave of a symmetry of H0: a few units in the last place of its norm. A symmetry that is
 * broken by more is broken by what was put in.
 */
export function matrixNoise({ h0, n }: { readonly h0: Operator; readonly n: number }): number {
  return 64 * Math.sqrt(n) * UNIT_ROUNDOFF * h0.norm;
}

/**
 * Checks a resolution.
 *
 * @throws GoodBasisError `option` unless it is a number above 0 and below 1
 */
export function checkResolution(resolution: number): number {
  if (typeof resolution === "number" && resolution > 0 && resolution < 1) return resolution;
  throw new GoodBasisError(
    "option",
    `resolution is ${shown(resolution)}; give a number above 0 and below 1, the fraction of ‖V‖ that counts as vanished`,
    { resolution },
  );
}
