import type { CandidateFinding } from "../audit/audit.js";
import type { PreparedProblem } from "../audit/problem.js";
import { FAR_BELOW, matrixNoise } from "../audit/resolution.js";
import type { Depth, ResolvedLevel } from "../refine/resolve.js";
import { energyTolerance, type Sector } from "../refine/sectors.js";
import type { TreeNode } from "../refine/tree.js";
import type { LevelCouplings } from "./couplings.js";
import type { Question } from "./findings.js";
import type { LevelGuard } from "./guard.js";
import type { LevelState } from "./level-states.js";
import { short } from "./short.js";
import type { Verdict } from "./verdict.js";

/** Everything that the verdict on one level rests on. */
export interface LevelCase {
  readonly problem: PreparedProblem;
  readonly index: number;
  readonly resolved: ResolvedLevel;
  readonly sectors: readonly Sector[];
  readonly depth: Depth;
  readonly couplings: LevelCouplings;
  readonly guard: LevelGuard;
  readonly findings: readonly CandidateFinding[];
  /** The level's states, in their order. */
  readonly states: readonly LevelState[];
  /** For each perturbation: the largest element that counts as vanished. */
  readonly thresholds: readonly number[];
  /** Largest bound on ‖H0 q − E q‖ over the level's states, and on the error of any computed energy. */
  readonly residual: number;
  readonly enclosure: number;
  /** Bound on the sine of the angle between the computed and the exact level. */
  readonly tilt: number;
  readonly nodes: readonly TreeNode[];
}

/** The verdict on a level and what stands in the way. */
export interface LevelJudgement {
  readonly verdict: Verdict;
  readonly questions: readonly Question[];
}

/**
 * *not good* where some element certainly exceeds the resolution; *good* where every bound is below it and the level, its
 * separations and its denominators stand; *undecided* otherwise, with what would help.
 */
export function judgeLevel(level: LevelCase): LevelJudgement {
  const questions = [
    ...couplingQuestions(level),
    ...labelQuestions(level),
    ...levelQuestions(level),
    ...guardQuestions(level),
  ];
  if (level.couplings.worst.length > 0) return { verdict: "not good", questions };
  return { verdict: questions.length === 0 ? "good" : "undecided", questions };
}

function couplingQuestions({ problem, index, couplings, thresholds }: LevelCase): Question[] {
  return problem.perturbations.flatMap(({ name }, p): Question[] => {
    if (!Number.isFinite((couplings.largest[p] ?? 0) + (couplings.offDiagonal[p] ?? 0) + (thresholds[p] ?? 0))) {
      return [
        {
          code: "coupling-undecided",
          level: index,
          message: `elements of ${name} are too large for their bounds to be evaluated in double precision; choose a larger unit`,
        },
      ];
    }
    const largest = couplings.largest[p] ?? 0;
    const threshold = thresholds[p] ?? 0;
    if (largest <= threshold || couplings.worst.some((pair) => pair.perturbation === name)) return [];
    return [
      {
        code: "coupling-undecided",
        level: index,
        message:
          `in-level elements of ${name} are bounded by ${short(largest)} only, above the resolution ${short(threshold)}; ` +
          "smaller entry uncertainties or a coarser resolution would decide it",
      },
    ];
  });
}

/** Asked for labels only: every pair must differ in one. */
function labelQuestions({ index, resolved, depth, couplings }: LevelCase): Question[] {
  if (depth !== "labels" || couplings.worst.length > 0) return [];
  const together = resolved.parts.reduce((most, part) => Math.max(most, ...part.leaves.map((l) => l.rows.rows)), 1);
  if (together === 1) return [];
  return [
    {
      code: "labels-insufficient",
      level: index,
      message:
        `${together} states of the level carry the same labels; V does not couple them at first order but may at the second. ` +
        'Add a conserved candidate that tells them apart, or let V finish the job (depth: "full")',
    },
  ];
}

function levelQuestions(given: LevelCase): Question[] {
  const { problem, index, resolved, sectors, couplings, guard, residual, enclosure } = given;
  const { level } = resolved;
  const questions: Question[] = [];
  const spread = level.spread + 2 * residual;
  const gap = Math.min(level.gapBelow, level.gapAbove) - 2 * enclosure;
  if (spread > FAR_BELOW * gap) {
    questions.push({
      code: "ambiguous-level",
      level: index,
      message:
        `the level at ${short(level.energy)} is ${short(spread)} wide and the next one only ${short(gap)} away: not far ` +
        `below (1/${1 / FAR_BELOW}). Merge them (levelWidth above ${short(level.spread + gap)}) or give sharper energies`,
    });
  }
  const rounding = energyTolerance(problem, problem.n);
  questions.push(...brokenLabelQuestions(given));
  const mixedParts = resolved.parts.filter((part) => {
    const energies = sectors[part.sector]?.energies;
    if (energies === undefined) return false;
    const own = Array.from(part.indices, (i) => energies[i] as number);
    return Math.max(...own) - Math.min(...own) > rounding;
  });
  const splitting = couplings.nodes.filter((node) => node.kind === "perturbation" || node.kind === "second order");
  if (mixedParts.length > 0 && splitting.length > 0 && !guard.stated) {
    questions.push({
      code: "merged-level",
      level: index,
      message:
        `the level at ${short(level.energy)} was merged over a real spread of ${short(level.spread)} and V tells its states ` +
        "apart, which holds only for a λ large enough; state lambda",
    });
  }
  for (const node of splitting) {
    const shifts = shiftSpread(couplings, given.nodes, node.node);
    if (node.kind === "second order" && shifts > FAR_BELOW * guard.lambda * node.gap) {
      questions.push({
        code: "ambiguous-level",
        level: index,
        message:
          `the second-order operator separates states of the level at ${short(level.energy)} by ${short(node.gap)} λ², but ` +
          `their first-order shifts are equal only to within ${short(shifts)} λ: not far below at λ = ${short(guard.lambda)}. ` +
          "Give sharper entries of V, or find a label",
      });
    }
    const blur = node.kind === "perturbation" ? shiftBlur(given, node.operator) : 0;
    if (node.kind === "perturbation" && node.gap <= blur) {
      questions.push({
        code: "ambiguous-level",
        level: index,
        message:
          `${node.operator} separates states of the level at ${short(level.energy)} by ${short(node.gap)} λ, within the ` +
          `uncertainty ${short(blur)} of such differences. Give sharper entries of ${node.operator}, or find a label`,
      });
    }
    const scale = node.kind === "perturbation" ? guard.lambda : guard.lambda * guard.lambda;
    if (spread <= FAR_BELOW * scale * node.gap) continue;
    questions.push({
      code: "ambiguous-level",
      level: index,
      message:
        `${node.operator} separates states of the level at ${short(level.energy)} by ${short(scale * node.gap)} at ` +
        `λ = ${short(guard.lambda)}, which its width ${short(spread)} is not far below (1/${1 / FAR_BELOW}). ` +
        "Treat them as separate levels (a smaller levelWidth), give sharper energies, subtract a common offset from H0, or find a label",
    });
  }
  return questions;
}

/** Uncertainty of a difference of two first-order shifts, twice over: what was dropped, evaluation, overlaps and the level's tilt. */
function shiftBlur({ problem, couplings, tilt }: LevelCase, name: string): number {
  const p = problem.perturbations.findIndex((v) => v.name === name);
  const operator = problem.perturbations[p]?.operator;
  if (operator === undefined) return 0;
  const norm = operator.norm + operator.error;
  return (
    4 *
    ((couplings.offDiagonal[p] ?? 0) + (couplings.elementError[p] ?? 0) + 2 * norm * (tilt + couplings.orthonormality))
  );
}

/**
 * Labels that H0 itself breaks: between the states that such a label tells apart H0 has elements of up to h. Where H0 breaks the label
 * provably and by more than the rounding of a computed matrix, V must tell all these states apart by far more (λ|ΔE1| ≫ h), or H0
 * decides them. Where it breaks the label provably, but within such rounding, this is asked of the states that V tells apart at all;
 * for the others η0 states what the label is worth.
 */
function brokenLabelQuestions(given: LevelCase): Question[] {
  const { problem, index, resolved, couplings, guard, findings } = given;
  for (const node of couplings.nodes) {
    const h = node.energyCoupling;
    const place = problem.candidates.findIndex((candidate) => candidate.name === node.operator);
    const operator = problem.candidates[place]?.operator;
    const atLeast = findings[place]?.withH0.atLeast ?? 0;
    if (node.kind !== "label" || operator === undefined || h === 0 || atLeast === 0) continue;
    // ‖[A, H0]‖ ≤ 2‖A‖ times what H0 leaves between the labels
    const real = atLeast / (2 * operator.norm) > matrixNoise(problem);
    const apart = leastApart(given, node.node, real);
    if (h <= FAR_BELOW * guard.lambda * apart) continue;
    return [
      {
        code: "ambiguous-level",
        level: index,
        message:
          `H0 breaks ${node.operator} by up to ${short(h)} between states of the level at ${short(resolved.level.energy)}, which ` +
          `V tells apart by ${apart === 0 ? "nothing" : `${short(guard.lambda * apart)} at λ = ${short(guard.lambda)}`}: H0, and not ` +
          "the label, may decide the states. Use candidates that H0 conserves more sharply, or leave this one out",
      },
    ];
  }
  return [];
}

/**
 * Smallest difference of first-order shifts, over all perturbations, between states below different children of a node; differences
 * within their own uncertainty count as zero, or not at all.
 */
function leastApart({ problem, states, couplings }: LevelCase, node: number, countZero: boolean): number {
  const below = states.flatMap(({ path }, k) => {
    const step = path.find((at) => at.node === node);
    return step === undefined ? [] : [{ k, child: step.child }];
  });
  let least = Number.POSITIVE_INFINITY;
  problem.perturbations.forEach((_, p) => {
    const shifts = couplings.diagonals[p] as Float64Array;
    const blur = 2 * (couplings.elementError[p] ?? 0);
    const order = [...below].sort((a, b) => (shifts[a.k] as number) - (shifts[b.k] as number));
    order.forEach((a, at) => {
      for (let next = at + 1; next < order.length; next++) {
        const b = order[next] as (typeof order)[number];
        const difference = (shifts[b.k] as number) - (shifts[a.k] as number);
        if (difference >= least) break;
        if (b.child === a.child) continue;
        if (difference > blur) least = difference;
        else if (countZero) least = 0;
      }
    });
  });
  return least;
}

/** How far the first-order shifts of the block of a second-order node may differ. */
export function shiftSpread(couplings: LevelCouplings, nodes: readonly TreeNode[], node: number): number {
  const from = nodes[node]?.from;
  const parent = from === undefined ? undefined : nodes[from.node];
  if (from === undefined || parent?.kind !== "perturbation") return 0;
  return 2 * ((parent.spreads[from.child] ?? 0) + Math.max(0, ...couplings.elementError));
}

function guardQuestions({ index, resolved, guard }: LevelCase): Question[] {
  const questions: Question[] = [];
  const { lambda, refuseAbove, outside, inside } = guard;
  const at = `λ = ${short(lambda)}${guard.stated ? "" : " (not stated)"}`;
  // a stated λ is held to ratios of 1, so that is what the advice aims at
  const below = (ratio: number): string => short((lambda * (guard.stated ? refuseAbove : 1)) / ratio);
  if (outside > refuseAbove) {
    const worst = guard.sectors.reduce((a, b) => (ratioOf(b) > ratioOf(a) ? b : a));
    const energy = worst.first.ratio >= worst.second.ratio ? worst.first.energy : worst.second.energy;
    questions.push({
      code: "near-degenerate",
      level: index,
      message:
        `at ${at}, ${worst.perturbation} couples the level at ${short(resolved.level.energy)} to the one at ` +
        `${short(energy ?? 0)} ${short(outside)} times as strongly as they are apart (refused above ${short(refuseAbove)}). ` +
        `Merge the two levels (levelWidth), or state a lambda below ${below(outside)}`,
    });
  }
  if (inside > refuseAbove) {
    questions.push({
      code: "strong-mixing",
      level: index,
      message:
        `at ${at}, the second-order operator couples states of the level at ${short(resolved.level.energy)} ` +
        `${short(inside)} times as strongly as V tells them apart (refused above ${short(refuseAbove)}). ` +
        `Find a label that tells them apart, or state a lambda below ${below(inside)}`,
    });
  }
  return questions;
}

function ratioOf(sector: LevelGuard["sectors"][number]): number {
  return Math.max(sector.first.ratio, sector.second.ratio);
}
