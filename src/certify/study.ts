import { type Audit, auditPrepared } from "../audit/audit.js";
import type { PreparedProblem } from "../audit/problem.js";
import { couplingScale, LABEL_WIDTH } from "../audit/resolution.js";
import { rootOfSquares, roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import type { StateLabel } from "../refine/label.js";
import { formLevels, type Level, type LevelChoice, type Levels } from "../refine/levels.js";
import { type Depth, type Leaf, type ResolvedLevel, type ResolvedPart, resolveLevel } from "../refine/resolve.js";
import { buildSectors, energyTolerance, type Sector, type Sectors } from "../refine/sectors.js";
import { TreeBuilder, type TreeNode } from "../refine/tree.js";
import { type Backbone, chooseBackbone } from "./backbone.js";
import { type LevelCouplings, levelCouplings, type NodeEvidence, partingNode } from "./couplings.js";
import { describeState } from "./describe.js";
import type { BasisState, Coupling, LevelResult, StateVector } from "./findings.js";
import { type GuardOptions, type GuardSetting, guardSetting, levelGuard } from "./guard.js";
import { judgeLevel } from "./judge.js";
import { type LevelStates, levelStates } from "./level-states.js";
import { nearbyModel } from "./nearby.js";
import { rootSumSquares } from "./residuals.js";
import { type SafeOrders, safeOrders, weaker } from "./safe-orders.js";
import { type LabelNumber, labelNumbers, nameLabels } from "./state-labels.js";
import type { Shift } from "./verdict.js";
import { type SectorEvidence, type SpaceEvidence, type WholeEvidence, wholeEvidence } from "./whole.js";

/** A step of the work, for a progress display. */
export interface Progress {
  /** What is being done. */
  readonly stage: "audit" | "labels" | "levels";
  /** Steps done of this stage. */
  readonly done: number;
  /** Steps of this stage in all. */
  readonly of: number;
}

/** Settings of a study, all in place. */
export interface StudySettings extends GuardOptions {
  readonly levels: LevelChoice;
  readonly depth: Depth;
  readonly resolution: number;
  readonly levelWidth: number | undefined;
  readonly onProgress: ((progress: Progress) => void) | undefined;
}

/** Everything found, before it is wrapped in a verdict. */
export interface StudyFindings {
  readonly audit: Audit;
  readonly backbone: Backbone;
  readonly nodes: readonly TreeNode[];
  readonly sectors: Sectors;
  readonly levels: Levels;
  readonly whole: WholeEvidence;
  readonly resolved: readonly ResolvedLevel[];
  readonly levelStates: readonly LevelStates[];
  readonly results: readonly LevelResult[];
  readonly states: readonly BasisState[];
}

/** Audits, refines and proves: the main job on a problem that has been read. */
export function runStudy(problem: PreparedProblem, settings: StudySettings): StudyFindings {
  const report = (stage: Progress["stage"], done: number, of: number): void => {
    settings.onProgress?.({ stage, done, of });
  };
  report("audit", 0, 1);
  const audit = auditPrepared(problem, settings.resolution);
  report("labels", 0, 1);
  const backbone = chooseBackbone(problem, audit);
  const tree = new TreeBuilder();
  const sectors = buildSectors(problem, backbone.members, backbone.others, tree);
  const width = settings.levelWidth ?? energyTolerance(problem, problem.n);
  const levels = formLevels(sectors.sectors, width, settings.levels);
  const whole = wholeEvidence(problem, sectors, tree.nodes);
  const guard = guardSetting(settings);
  const resolved: ResolvedLevel[] = [];
  const drafts: LevelDraft[] = [];
  levels.studied.forEach((level, index) => {
    report("levels", index, levels.studied.length);
    const refined = resolveLevel(problem, sectors.sectors, levels, level, backbone.others, settings.depth, tree);
    resolved.push(refined);
    drafts.push(
      proveLevel({ problem, settings, audit, sectors, levels, whole, guard, nodes: tree.nodes }, refined, index),
    );
  });
  report("levels", levels.studied.length, levels.studied.length);
  const { results, states } = nameAll(problem, audit, tree.nodes, drafts);
  return {
    audit,
    backbone,
    nodes: tree.nodes,
    sectors,
    levels,
    whole: {
      ...whole,
      nearby: nearbyModel(
        problem,
        audit,
        whole,
        drafts.map((draft) => draft.couplings),
        tree.nodes,
      ),
    },
    resolved,
    levelStates: drafts.map((draft) => draft.levelStates),
    results,
    states,
  };
}

interface Setting {
  readonly problem: PreparedProblem;
  readonly settings: StudySettings;
  readonly audit: Audit;
  readonly sectors: Sectors;
  readonly levels: Levels;
  readonly whole: SpaceEvidence;
  readonly guard: GuardSetting;
  readonly nodes: readonly TreeNode[];
}

/** A level with its evidence; its states still lack the names of their labels. */
interface LevelDraft {
  readonly level: Level;
  readonly levelStates: LevelStates;
  readonly couplings: LevelCouplings;
  readonly numbers: readonly (readonly LabelNumber[])[];
  readonly states: readonly Omit<BasisState, "labels" | "index" | "vector">[];
  readonly result: Omit<LevelResult, "couplings" | "firstState">;
}

function proveLevel(given: Setting, resolved: ResolvedLevel, index: number): LevelDraft {
  const { problem, settings, audit, sectors, levels, whole, guard, nodes } = given;
  const { level } = resolved;
  const found = levelStates(problem, resolved, sectors.sectors, nodes);
  const { energies, residuals } = stateEnergies(resolved, found, sectors, whole, problem);
  const residual = residuals.reduce((most, x) => Math.max(most, x), 0);
  const sectorOf = (part: number): SectorEvidence | undefined => whole.sectors[resolved.parts[part]?.sector ?? -1];
  const numbers = problem.candidates.map((candidate, place) => labelNumbers(candidate, place, found, sectorOf));
  const thresholds = problem.perturbations.map(({ operator }) => settings.resolution * couplingScale(operator));
  const couplings = levelCouplings({
    problem,
    findings: audit.candidates,
    level: found,
    nodes,
    residuals: numbers.map((list) => new Float64Array(list.map((entry) => entry.radius))),
    energyResiduals: residuals,
    thresholds,
    wholeDefect: whole.orthonormality,
    energyThreshold: settings.resolution * couplingScale(problem.h0),
  });
  const isolation = Math.min(level.gapBelow, level.gapAbove) - 2 * whole.energyEnclosure - level.spread;
  const tilt = isolationTilt(residuals, isolation, couplings.orthonormality);
  const ratios = levelGuard(problem, sectors.sectors, resolved, nodes, levels.energies, whole.energyEnclosure, guard);
  const { verdict, questions } = judgeLevel({
    problem,
    index,
    resolved,
    sectors: sectors.sectors,
    depth: settings.depth,
    couplings,
    guard: ratios,
    findings: audit.candidates,
    states: found.states,
    thresholds,
    residual,
    tilt,
    enclosure: whole.energyEnclosure,
    nodes,
  });
  const evidence = new Map<number, NodeEvidence>(couplings.nodes.map((node) => [node.node, node]));
  const deviation = energies.reduce((most, energy) => Math.max(most, Math.abs(energy - level.energy)), 0);
  const spread = deviation + residual;
  const states = found.states.map((state, k) => {
    const safety = safeOrders(state, evidence, problem.perturbations.length > 1, () =>
      eachPerturbationParts(problem, found, couplings, k),
    );
    return {
      level: index,
      sector: resolved.parts[state.part]?.sector ?? 0,
      energy: energies[k] as number,
      energyPlusMinus: roundUp((residuals[k] as number) * (1 + 2 * couplings.orthonormality)),
      shifts: problem.perturbations.map(({ name, operator }, p): Shift => {
        const v = operator.norm + operator.error;
        return {
          perturbation: name,
          value: couplings.diagonals[p]?.[k] ?? 0,
          plusMinus: roundUp(
            (couplings.offDiagonal[p] ?? 0) +
              2 * v * couplings.orthonormality +
              2 * v * tilt +
              spread +
              (couplings.elementError[p] ?? 0),
            16,
          ),
        };
      }),
      ...safety,
    };
  });
  return {
    level,
    levelStates: found,
    couplings,
    numbers,
    states,
    result: {
      index,
      place: level.place,
      energy: level.energy,
      spread: level.spread,
      degeneracy: level.degeneracy,
      gapBelow: Number.isFinite(level.gapBelow) ? level.gapBelow : null,
      gapAbove: Number.isFinite(level.gapAbove) ? level.gapAbove : null,
      verdict,
      safe: states.reduce<SafeOrders>((least, state) => weaker(least, state.safe), { energies: "all", states: "all" }),
      questions,
      guard: ratios,
      tilt,
      evidence: couplings,
    },
  };
}

/** Whether every perturbation alone gives a state another first-order shift than each partner that perturbations part it from. */
function eachPerturbationParts(
  problem: PreparedProblem,
  { states }: LevelStates,
  { diagonals, elementError, nodes }: LevelCouplings,
  k: number,
): boolean {
  const parting = new Set(nodes.filter((node) => node.kind === "perturbation").map((node) => node.node));
  const path = states[k]?.path ?? [];
  return states.every((other, j) => {
    const node = partingNode(path, other.path);
    if (node === undefined || !parting.has(node)) return true;
    return problem.perturbations.every(({ operator }, p) => {
      const difference = Math.abs((diagonals[p]?.[k] ?? 0) - (diagonals[p]?.[j] ?? 0));
      return difference > LABEL_WIDTH * operator.norm + 2 * (elementError[p] ?? 0);
    });
  });
}

/**
 * Energies of a level's states and bounds on ‖H0 q − E q‖, from those of the sector's vectors they are made of: for
 * q = Σ u_i f_i with E = Σ|u_i|²E_i, the residual is at most √(Σ‖r_i‖²) + √(Σ|u_i|²(E_i − E)²), and rounding.
 */
function stateEnergies(
  resolved: ResolvedLevel,
  found: LevelStates,
  { sectors }: Sectors,
  whole: SpaceEvidence,
  { h0 }: PreparedProblem,
): { energies: Float64Array; residuals: Float64Array } {
  const energies = new Float64Array(found.states.length);
  const residuals = new Float64Array(found.states.length);
  const composed = 2 * (h0.norm + h0.error) * found.leafError;
  found.states.forEach((state, k) => {
    const part = resolved.parts[state.part] as ResolvedPart;
    const rows = (part.leaves[state.leaf] as Leaf).rows;
    const sector = sectors[part.sector] as Sector;
    const own = whole.sectors[part.sector] as SectorEvidence;
    const from = rows.ptr[state.row] as number;
    const to = rows.ptr[state.row + 1] as number;
    const energyAt = (p: number): number => sector.energies[part.indices[rows.col[p] as number] as number] as number;
    const weightAt = (p: number): number =>
      (rows.re[p] as number) ** 2 + (rows.im === undefined ? 0 : (rows.im[p] as number) ** 2);
    const first = energyAt(from);
    let excess = 0;
    let square = 0;
    let inexact = false;
    let uneven = false;
    for (let p = from; p < to; p++) {
      const residual = own.energyResiduals[part.indices[rows.col[p] as number] as number] as number;
      excess += weightAt(p) * (energyAt(p) - first);
      square += residual ** 2;
      if (residual !== 0) inexact = true;
      if (energyAt(p) !== first) uneven = true;
    }
    let spread = 0;
    for (let p = from; p < to; p++) spread += weightAt(p) * (energyAt(p) - first - excess) ** 2;
    energies[k] = first + excess;
    // the energy as stored differs from that of the sum by a rounding
    const stored = uneven ? 2 * UNIT_ROUNDOFF * Math.abs(energies[k] as number) : 0;
    const roots = rootOfSquares(square, inexact ? to - from : 0) + rootOfSquares(spread, uneven ? to - from : 0);
    residuals[k] = roundUp((roots + stored) * (1 + whole.orthonormality) + composed, 2 * (to - from) + 16);
  });
  return { energies, residuals };
}

/**
 * sin Θ ≤ ‖H0 Q − Q Λ‖ / gap (Davis and Kahan, SIAM J. Numer. Anal. 7, 1 (1970)), for rows orthonormal to `defect`; zero
 * where there is no other level.
 */
function isolationTilt(residuals: Float64Array, isolation: number, defect: number): number {
  if (isolation === Number.POSITIVE_INFINITY) return 0;
  if (isolation <= 0 || defect >= 0.5) return 1;
  return Math.min(1, roundUp((rootSumSquares(residuals) * (1 + defect)) / isolation));
}

function stateVector({ vectors }: LevelStates, row: number): StateVector {
  const from = vectors.ptr[row] as number;
  const to = vectors.ptr[row + 1] as number;
  const im = vectors.im?.slice(from, to);
  return {
    kets: vectors.col.slice(from, to),
    re: vectors.re.slice(from, to),
    im: im?.some((y) => y !== 0) ? im : undefined,
  };
}

function nameAll(
  problem: PreparedProblem,
  audit: Audit,
  nodes: readonly TreeNode[],
  drafts: readonly LevelDraft[],
): { results: LevelResult[]; states: BasisState[] } {
  const named = problem.candidates.map((_, place) =>
    nameLabels(
      problem,
      audit,
      place,
      drafts.flatMap((draft) => draft.numbers[place] ?? []),
      nodes,
    ),
  );
  const states: BasisState[] = [];
  const results: LevelResult[] = [];
  for (const draft of drafts) {
    const firstState = states.length;
    for (const state of draft.states) {
      const index = states.length;
      const labels: Record<string, StateLabel> = {};
      problem.candidates.forEach((candidate, place) => {
        labels[candidate.name] = named[place]?.[index] as StateLabel;
      });
      const row = index - firstState;
      states.push({
        index,
        labels,
        ...state,
        // typed arrays cannot be frozen: every reader gets a copy
        get vector() {
          return stateVector(draft.levelStates, row);
        },
      });
    }
    const name = (k: number): string => {
      const state = states[firstState + k] as BasisState;
      return describeState(state.labels, state.vector, problem.ket);
    };
    const couplings = draft.couplings.worst.map(
      (pair): Coupling => ({
        level: draft.result.index,
        perturbation: pair.perturbation,
        states: [firstState + pair.first, firstState + pair.second],
        names: [name(pair.first), name(pair.second)],
        size: pair.size,
        atLeast: pair.atLeast,
        atMost: pair.atMost,
      }),
    );
    results.push({ ...draft.result, firstState, couplings });
  }
  return { results, states };
}
