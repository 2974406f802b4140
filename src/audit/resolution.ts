import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Operator } from "../operator/operator.js";

/**
 * The named thresholds of the library, in one place. All are relative; none enters a certificate except as the stated
 * resolution against which a verdict is given.
 */

/** A coupling inside a level counts as vanished when its bound is below this fraction of {@link couplingScale}. */
export const DEFAULT_RESOLUTION = 1e-10;

/**
 * A commutator counts as vanished when its bound is below this fraction of resolution · {@link commutatorScale}: a label must be
 * conserved more sharply than the couplings it is to rule out, since these are the commutator divided by a difference of labels.
 */
export const COMMUTATOR_SHARE: number = 1 / 64;

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

/** With no λ stated: the same ratio at the λ of each sector, see `naturalLambda`; only a near-degeneracy exceeds it. */
export const REFUSE_ABOVE_UNSTATED = 8;

/**
 * What couplings by V are measured against: ‖V − tr V/n‖, since a multiple of 1 couples nothing, but at least 1/128 of ‖V‖, lest a
 * bare multiple of 1 be judged by its rounding; both as rigorous lower bounds.
 */
export function couplingScale(operator: Operator): number {
  return scaleOf(operator, 128);
}

/**
 * What a commutator [A, B] is measured against: the product of ‖A − tr A/n‖ and ‖B − tr B/n‖, each at least 1/16 of ‖A‖ or ‖B‖: the
 * rounding of a commutator grows with the whole norms.
 */
export function commutatorScale(a: Operator, b: Operator): number {
  return scaleOf(a, 16) * scaleOf(b, 16);
}

function scaleOf(operator: Operator, share: number): number {
  const { variation } = operator;
  // the other bound cannot be larger then, and need not be found
  return variation >= operator.norm / share ? variation : Math.max(variation, operator.normAtLeast / share);
}

/**
 * Entries of H0 and V may not be larger. Bounds take squares of products of two operators, summed over up to n⁴ places:
 * 4 n⁴ (10⁶⁰)⁴ stays a double for every n below 2³¹. No unit of energy needs more.
 */
export const LARGEST_ENERGY = 1e60;

/** Entries of candidates and ladder operators may not be larger: their squares must be doubles, as must their products with H0 and V. */
export const LARGEST_CANDIDATE = 1e150;

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
