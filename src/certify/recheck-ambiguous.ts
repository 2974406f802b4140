import type { CertifiedNode } from "./certificate-format.js";
import { smallerGap } from "./recheck-bounds.js";
import type { OwnLevel } from "./recheck-level.js";
import { type NodeCase, selectionRule } from "./recheck-nodes.js";
import type { OwnProblem } from "./recheck-operators.js";

/** "Far below": the width of a level against the gap around it and the splittings inside it, as the library states it. */
const FAR_BELOW = 1e-3;

/** Energies closer than this fraction of ‖H0‖ count as one level when nobody states a width. */
const LEVEL_WIDTH = 2 ** -42;

/** Relative distance from a limit within which either answer is honest: both sides are evaluated from rounded numbers. */
const NEAR = 1e-6;

/** Yes, no, or undefined where the own evaluation does not decide. */
type Answer = boolean | undefined;

/** A number known to lie between two. */
interface Range {
  readonly low: number;
  readonly high: number;
}

/** Whether x > limit. */
function exceeds(x: Range, limit: Range): Answer {
  if (x.low > limit.high * (1 + NEAR)) return true;
  return x.high <= limit.low * (1 - NEAR) ? false : undefined;
}

function known(x: number): Range {
  return { low: x, high: x };
}

/** *Yes* if any is, *no* if all are not. */
function any(answers: readonly Answer[]): Answer {
  if (answers.includes(true)) return true;
  return answers.every((answer) => answer === false) ? false : undefined;
}

/**
 * Whether a level is not clearly one, or what separates its states not clearly more than what blurs it: its width against the gap around
 * it and against what V or W separates inside it; shifts that ought to be equal against what W separates; what V separates against the
 * uncertainty of its shifts; what H0 leaves between labels against what V makes of them.
 */
export function isAmbiguous(given: NodeCase): Answer {
  const { certificate, level } = given;
  const grow = 1 + 2 * level.orthonormality;
  const residual = level.states.reduce((most, state) => Math.max(most, state.energyPlusMinus), 0) / grow;
  const width = level.spread + 2 * residual;
  const { lambda } = level.guard;
  const answers = [
    exceeds(known(width), known(FAR_BELOW * (smallerGap(level) - 2 * certificate.whole.energyEnclosure))),
  ];
  for (const node of level.nodes) {
    if (node.kind === "label") answers.push(isBroken(given, node));
    if (node.kind === "perturbation") {
      answers.push(exceeds(known(width), known(FAR_BELOW * lambda * node.gap)));
      answers.push(exceeds(shiftBlur(given, node), known(node.gap)));
    }
    if (node.kind === "second order") {
      answers.push(exceeds(known(width), known(FAR_BELOW * lambda * lambda * node.gap)));
      answers.push(exceeds(shiftSpread(node, given.own), known(FAR_BELOW * lambda * node.gap)));
    }
  }
  return any(answers);
}

/** How far the first-order shifts of the states below a node may differ: the least and the most that an evaluation may say. */
function shiftSpread(node: CertifiedNode, own: OwnLevel): Range {
  const elements = own.perturbations[0];
  if (elements === undefined) return known(0);
  const shifts = node.states.flat().map((state) => elements.diagonal[state] ?? 0);
  const range = Math.max(...shifts) - Math.min(...shifts);
  return {
    low: Math.max(0, range - 2 * elements.looseError) + elements.error / 2,
    high: 2 * range + 8 * elements.looseError,
  };
}

/** Twice the uncertainty of a difference of two shifts. */
function shiftBlur({ problem, level, own }: NodeCase, node: CertifiedNode): Range {
  const p = problem.perturbations.findIndex((v) => v.name === node.operator);
  const claimed = level.couplings[p]?.offDiagonal ?? 0;
  const norm = problem.perturbations[p]?.norm ?? 0;
  const elements = own.perturbations[p];
  const blur = (error: number): number => 4 * (claimed + error + 2 * norm * (level.tilt + level.orthonormality));
  return { low: blur((elements?.error ?? 0) / 4), high: blur(4 * (elements?.looseError ?? 0)) };
}

/**
 * Whether H0 provably breaks a label, and V does not tell the states that it parts apart by far more than that: all of them, where it is
 * broken by more than the rounding of a computed matrix; otherwise those that V tells apart at all.
 */
function isBroken(given: NodeCase, node: CertifiedNode): Answer {
  const { certificate, problem, candidates, level } = given;
  const place = problem.candidates.findIndex((candidate) => candidate.name === node.operator);
  const candidate = candidates[place];
  const operator = problem.candidates[place]?.operator;
  if (candidate === undefined || operator === undefined) return false;
  const rule = selectionRule(candidate.boundWithH0, problem.h0.norm, node.residual, level.orthonormality, node.gap);
  const residual = node.states.flat().reduce((most, k) => Math.max(most, level.states[k]?.energyPlusMinus ?? 0), 0);
  const h = Math.min(rule, residual);
  const withH0 = certificate.commutators.find(({ left, right }) => left === node.operator && right === "H0");
  if (h === 0 || withH0 === undefined || withH0.atLeast === 0) return false;
  const { h0, n } = problem;
  const real = exceeds(
    known(withH0.atLeast / (2 * operator.norm)),
    known(64 * Math.sqrt(n) * 2 ** -53 * h0.operator.norm),
  );
  const weak = (countZero: boolean): Answer => {
    const apart = leastApart(given, node, countZero);
    const scale = FAR_BELOW * level.guard.lambda;
    return exceeds(known(h), { low: scale * apart.low, high: scale * apart.high });
  };
  if (real !== undefined) return weak(real);
  const [asReal, asNoise] = [weak(true), weak(false)];
  return asReal === asNoise ? asReal : undefined;
}

/** What rounding may leave of an energy. */
function rounding({ n, h0 }: OwnProblem): number {
  const { norm, error, isDiagonal } = h0.operator;
  return LEVEL_WIDTH * norm + 32 * error + (isDiagonal ? 0 : 8 * Math.sqrt(n) * 2 ** -53 * norm);
}

/** Smallest difference of shifts between states below different children; one within its uncertainty is zero, or does not count. */
function leastApart({ level, own }: NodeCase, node: CertifiedNode, countZero: boolean): Range {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.POSITIVE_INFINITY;
  own.perturbations.forEach((elements, p) => {
    const shift = (state: number): number => level.states[state]?.shifts[p]?.value ?? 0;
    node.states.forEach((list, child) => {
      for (const other of node.states.slice(child + 1)) {
        for (const a of list) {
          for (const b of other) {
            const difference = Math.abs(shift(a) - shift(b));
            const surely = difference > 8 * elements.looseError;
            const hardly = difference <= elements.error / 2;
            if (!hardly) low = Math.min(low, countZero && !surely ? 0 : difference);
            else if (countZero) low = 0;
            if (surely) high = Math.min(high, difference);
            else if (countZero && hardly) high = 0;
          }
        }
      }
    });
  });
  return { low, high: Math.max(low, high) };
}

/** Whether V tells states apart that were merged over a real spread with no λ stated. */
export function isMerged({ problem, level, own }: NodeCase): Answer {
  const split = level.nodes.some((node) => node.kind === "perturbation" || node.kind === "second order");
  if (level.guard.stated || !split) return false;
  const tolerance = rounding(problem);
  const spread = new Map<number, Range>();
  own.tree.labelGroup.forEach((group, state) => {
    const energy = own.h0.diagonal[state] as number;
    const range = spread.get(group) ?? known(energy);
    spread.set(group, { low: Math.min(range.low, energy), high: Math.max(range.high, energy) });
  });
  let widest = 2 * own.h0.largestOff;
  for (const { low, high } of spread.values()) widest = Math.max(widest, high - low);
  if (widest > 4 * tolerance) return true;
  return level.spread <= tolerance / 4 ? false : undefined;
}
