import type { PreparedProblem } from "../audit/problem.js";
import { FAR_BELOW } from "../audit/resolution.js";
import type { Depth, ResolvedLevel } from "../refine/resolve.js";
import { energyTolerance, type Sector } from "../refine/sectors.js";
import type { TreeNode } from "../refine/tree.js";
import type { LevelCouplings } from "./couplings.js";
import type { Question } from "./findings.js";
import type { LevelGuard } from "./guard.js";
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
  /** For each perturbation: the largest element that counts as vanished. */
  readonly thresholds: readonly number[];
  /** Largest bound on ‖H0 q − E q‖ over the level's states, and on the error of any computed energy. */
  readonly residual: number;
  readonly enclosure: number;
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
          `in-level elements of ${name} are bounded by ${number(largest)} only, above the resolution ${number(threshold)}; ` +
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
        `the level at ${number(level.energy)} is ${number(spread)} wide and the next one only ${number(gap)} away: not far ` +
        `below (1/${1 / FAR_BELOW}). Merge them (levelWidth above ${number(level.spread + gap)}) or give sharper energies`,
    });
  }
  const rounding = energyTolerance(problem, problem.n);
  const strength = guard.lambda * Math.max(...problem.perturbations.map(({ operator }) => operator.norm));
  const mixed = (residual > rounding && 2 * residual > FAR_BELOW * strength && strength > 0) || residual > 4 * rounding;
  if (mixed && couplings.nodes.some((node) => node.kind === "label")) {
    questions.push({
      code: "ambiguous-level",
      level: index,
      message:
        `states of the level at ${number(level.energy)} are off eigenvectors of H0 by ${number(residual)}, not far below ` +
        `λ‖V‖ = ${number(strength)} or above what rounding leaves: H0 breaks a label, and may decide the states. Use ` +
        "candidates that H0 conserves more sharply",
    });
  }
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
        `the level at ${number(level.energy)} was merged over a real spread of ${number(level.spread)} and V tells its states ` +
        "apart, which holds only for a λ large enough; state lambda",
    });
  }
  for (const node of splitting) {
    const shifts = firstOrderSpread(given, node.node);
    if (node.kind === "second order" && shifts > FAR_BELOW * guard.lambda * node.gap) {
      questions.push({
        code: "ambiguous-level",
        level: index,
        message:
          `the second-order operator separates states of the level at ${number(level.energy)} by ${number(node.gap)} λ², but ` +
          `their first-order shifts are equal only to within ${number(shifts)} λ: not far below at λ = ${number(guard.lambda)}. ` +
          "Give sharper entries of V, or find a label",
      });
    }
    const blur = 4 * Math.max(0, ...couplings.elementError);
    if (node.kind === "perturbation" && node.gap <= blur) {
      questions.push({
        code: "ambiguous-level",
        level: index,
        message:
          `${node.operator} separates states of the level at ${number(level.energy)} by ${number(node.gap)} λ, within the ` +
          `uncertainty ${number(blur)} of its elements. Give sharper entries of ${node.operator}, or find a label`,
      });
    }
    const scale = node.kind === "perturbation" ? guard.lambda : guard.lambda * guard.lambda;
    if (spread <= FAR_BELOW * scale * node.gap) continue;
    questions.push({
      code: "ambiguous-level",
      level: index,
      message:
        `${node.operator} separates states of the level at ${number(level.energy)} by ${number(scale * node.gap)} at ` +
        `λ = ${number(guard.lambda)}, which its width ${number(spread)} is not far below (1/${1 / FAR_BELOW}). ` +
        "Treat them as separate levels (a smaller levelWidth), give sharper energies, subtract a common offset from H0, or find a label",
    });
  }
  return questions;
}

/** How far the first-order shifts of the block of a second-order node may differ. */
function firstOrderSpread({ couplings, nodes }: LevelCase, node: number): number {
  const from = nodes[node]?.from;
  const parent = from === undefined ? undefined : nodes[from.node];
  if (from === undefined || parent?.kind !== "perturbation") return 0;
  return 2 * ((parent.spreads[from.child] ?? 0) + Math.max(0, ...couplings.elementError));
}

function guardQuestions({ index, resolved, guard }: LevelCase): Question[] {
  const questions: Question[] = [];
  const at = `λ = ${number(guard.lambda)}${guard.stated ? "" : " (not stated)"}`;
  if (guard.outside > guard.refuseAbove) {
    const worst = guard.sectors.reduce((a, b) => (ratioOf(b) > ratioOf(a) ? b : a));
    const energy = worst.first.ratio >= worst.second.ratio ? worst.first.energy : worst.second.energy;
    questions.push({
      code: "near-degenerate",
      level: index,
      message:
        `at ${at}, ${worst.perturbation} couples the level at ${number(resolved.level.energy)} to the one at ` +
        `${number(energy ?? 0)} ${number(guard.outside)} times as strongly as they are apart (refused above ` +
        `${number(guard.refuseAbove)}). Merge the two levels (levelWidth), or state a lambda below ` +
        `${number((guard.lambda * (guard.stated ? guard.refuseAbove : 1)) / guard.outside)}`,
    });
  }
  if (guard.stated && guard.inside > guard.refuseAbove) {
    questions.push({
      code: "strong-mixing",
      level: index,
      message:
        `at ${at}, the second-order operator couples states of the level at ${number(resolved.level.energy)} ` +
        `${number(guard.inside)} times as strongly as V tells them apart (refused above ${number(guard.refuseAbove)}). ` +
        "Find a label that tells them apart, or state a smaller lambda",
    });
  }
  return questions;
}

function ratioOf(sector: LevelGuard["sectors"][number]): number {
  return Math.max(sector.first.ratio, sector.second.ratio);
}

function number(x: number): string {
  return String(Number(x.toPrecision(4))).replace("-", "−");
}
