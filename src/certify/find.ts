import { type PreparedProblem, type Problem, prepareProblem } from "../audit/problem.js";
import { checkResolution, DEFAULT_RESOLUTION } from "../audit/resolution.js";
import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { LevelChoice } from "../refine/levels.js";
import type { Depth } from "../refine/resolve.js";
import { writeCertificate } from "./certificate.js";
import { certifyBasis } from "./good-basis.js";
import type { GuardOptions } from "./guard.js";
import type { StudyInternals } from "./internals.js";
import { checkLevelWidth, requireOptions } from "./options.js";
import type { BasisState, Coupling, Outcome, Study, Verdict } from "./outcome.js";
import { type Progress, runStudy, type StudySettings } from "./study.js";

/** Options of {@link findGoodBasis}. */
export interface FindOptions extends GuardOptions {
  /** Which levels to study; default all. Nothing is refined or proved for the others. */
  readonly levels?: LevelChoice;
  /**
   * How far states of a level are told apart: `"labels"`, `"first order"` (V may finish), `"second order"`, or `"full"`, as
   * far as the library goes. Default `"full"`.
   */
  readonly depth?: Depth;
  /** An in-level element counts as vanished below this fraction of ‖V − tr V/n‖. Default 1e-10. */
  readonly resolution?: number;
  /** Energies up to this far apart, in the problem's unit, are one level; by default what rounding may leave. */
  readonly levelWidth?: number;
  /** Called as the work goes on. */
  readonly onProgress?: (progress: Progress) => void;
}

const OPTIONS = ["levels", "depth", "resolution", "levelWidth", "lambda", "refuseAbove", "onProgress"];

const DEPTHS: readonly Depth[] = ["labels", "first order", "second order", "full"];

/**
 * The main job: audits the candidates, builds the simultaneous eigenbasis of H0 and the conserved ones, and proves that V
 * does not couple states inside any level.
 *
 * @param problem - H0, one perturbation or several, and candidates; all n × n over the same kets
 * @param options - levels, depth, resolution, λ
 * @returns an outcome whose `verdict` is *good* (with a certified basis), *not good* (with the pairs of states that V couples
 *   and how strongly) or *undecided* (with what stands in the way and what would help). States come level by level, by
 *   ascending energy; inside a level by their labels. Where labels repeat, vectors of one leaf are not unique.
 * @throws GoodBasisError `shape`, `not-finite`, `not-hermitian`, `not-normal`, `name`, `option`, `no-level`
 *
 * @example
 * ```ts
 * import { findGoodBasis } from "goodbasis";
 *
 * const outcome = findGoodBasis({
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] } },
 * });
 * if (outcome.verdict !== "good") throw new Error(outcome.verdict);
 * console.log(outcome.basis.states.map((state) => `${state.energy}: A = ${state.labels.A.text}`).join("\n"));
 * ```
 */
export function findGoodBasis<K extends string = never, P extends string = string>(
  problem: Problem<K, P>,
  options: FindOptions = {},
): Outcome<K> {
  const settings = checkOptions(options);
  const prepared = prepareProblem(problem);
  const found = runStudy(prepared, settings);
  const verdict = overall(found.results.map((level) => level.verdict));
  const internals: StudyInternals = {
    problem: prepared,
    sectors: found.sectors,
    levels: found.levels,
    resolved: found.resolved,
    states: found.levelStates,
  };
  const study: Study<K> = {
    n: prepared.n,
    unit: prepared.unit,
    perturbations: prepared.perturbations.map((v) => v.name),
    candidates: candidateNames<K>(prepared),
    ket: prepared.ket,
    resolution: settings.resolution,
    audit: found.audit,
    sets: found.backbone.reports,
    tree: found.nodes,
    levelCount: found.levels.count,
    levels: found.results,
    states: found.states as readonly BasisState<K>[],
    whole: found.whole,
    certificate: () => writeCertificate(study, verdict, internals),
  };
  const questions = found.results.flatMap((level) => level.questions);
  switch (verdict) {
    case "good":
      return { ...study, verdict, basis: certifyBasis(study, internals) };
    case "not good":
      return {
        ...study,
        verdict,
        questions,
        couplings: sortedCouplings(found.results.map((level) => level.couplings)),
      };
    case "undecided":
      return { ...study, verdict, questions };
    default:
      return verdict satisfies never;
  }
}

function candidateNames<K extends string>(problem: PreparedProblem): readonly K[] {
  return problem.candidates.map((candidate) => candidate.name) as readonly string[] as readonly K[];
}

function sortedCouplings(levels: readonly (readonly Coupling[])[]): Coupling[] {
  return levels.flat().sort((a, b) => b.size - a.size || a.states[0] - b.states[0]);
}

/** *not good* if any level is; *good* if all are; otherwise *undecided*. */
export function overall(verdicts: readonly Verdict[]): Verdict {
  if (verdicts.includes("not good")) return "not good";
  return verdicts.every((verdict) => verdict === "good") ? "good" : "undecided";
}

function checkOptions(options: FindOptions): StudySettings {
  requireOptions("findGoodBasis", options, OPTIONS);
  const depth = options.depth ?? "full";
  if (!DEPTHS.includes(depth)) {
    throw new GoodBasisError("option", `depth is ${shown(depth)}; give ${DEPTHS.map((d) => `"${d}"`).join(", ")}`, {
      depth,
    });
  }
  const { levelWidth, onProgress } = options;
  checkLevelWidth(levelWidth);
  if (onProgress !== undefined && typeof onProgress !== "function") {
    throw new GoodBasisError("option", `onProgress is ${String(onProgress)}; give a function, or leave it out`, {
      onProgress,
    });
  }
  return {
    levels: options.levels ?? "all",
    depth,
    resolution: checkResolution(options.resolution ?? DEFAULT_RESOLUTION),
    levelWidth,
    onProgress,
    ...(options.lambda === undefined ? {} : { lambda: options.lambda }),
    ...(options.refuseAbove === undefined ? {} : { refuseAbove: options.refuseAbove }),
  };
}
