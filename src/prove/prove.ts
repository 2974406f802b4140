import type { ExactBudget } from "../exact/budget.js";
import { fixExactPhase } from "../exact/phase.js";
import type { ExactVector } from "../exact/vector.js";
import type { Depth } from "../refine/resolve.js";
import { exactAudit } from "./audit.js";
import { type ProofBudget, proofBudget } from "./budget.js";
import { descend, type EnergyBlock, type ExactSector } from "./descent.js";
import { judgeLevel } from "./judge.js";
import { type LabelNames, labelText, namesOf } from "./label.js";
import { alignByLadders } from "./ladder.js";
import { formLevels, type LevelDraft, type LevelDrafts } from "./levels.js";
import { type ExactProblem, requireProblem } from "./problem.js";
import type {
  BlockValue,
  ExactAudit,
  ExactProof,
  ProofStatus,
  ProvedBackground,
  ProvedLabel,
  ProvedLeaf,
} from "./proof.js";
import { type LeafDraft, resolveBlock } from "./resolve.js";
import { middleOf } from "./roots.js";
import { safetyOf } from "./safety.js";
import { secondOrder } from "./second-order.js";
import { ProofTree, type RawLabel } from "./tree.js";

/** Settings of {@link proveExactly}. */
export interface ProofOptions {
  /** Whether a level is studied, by its energy to the nearest double; every level unless stated. */
  readonly isStudied?: ((energy: number) => boolean) | undefined;
  /** How far states are told apart; `"full"` unless stated. */
  readonly depth?: Depth | undefined;
  /** How far each single computation may grow. */
  readonly budget?: ExactBudget | undefined;
  /**
   * Steps that all of them together may cost, as {@link ExactBudget} counts them; two thousand million unless stated.
   */
  readonly work?: number | undefined;
}

/**
 * Builds the refinement tree in exact arithmetic and proves it: guesses come from floating eigenvalues, proofs from
 * exact kernels whose dimensions add up.
 *
 * What leaves the field of square roots, or the budget, is kept apart from the rest and marked node by node; everything
 * else stays exact.
 *
 * @throws GoodBasisError `shape`, `not-hermitian`, `name`; `budget` - where not even the commutators can be had
 *
 * @example
 * ```ts no-check
 * import { ExactOperator, proveExactly } from "goodbasis";
 *
 * const h0 = ExactOperator.diagonal([0, 0, 2]);
 * const v = ExactOperator.from([[0, 0, "3/5"], [0, 0, "4/5"], ["3/5", "4/5", 0]]);
 * const proof = proveExactly({ h0, perturbations: [{ name: "V", operator: v }], candidates: [] });
 * console.log(proof.leaves.map((leaf) => leaf.second?.[0]?.[0]?.text()).join(" ")); // -1/2 0 1/2
 * ```
 */
export function proveExactly(problem: ExactProblem, options: ProofOptions = {}): ExactProof {
  requireProblem("proveExactly", problem);
  const { depth = "full", isStudied = () => true } = options;
  const budget = proofBudget(options.budget, options.work);
  const audit = exactAudit(problem, budget);
  const conserved = audit.candidates.flatMap((finding, place) => (finding.conserved ? [place] : []));
  const tree = new ProofTree();
  const drafts = formLevels(problem.h0, descend(problem, conserved, tree, budget), tree, budget);
  const studied = drafts.levels.flatMap((level, place) => (isStudied(approximate(level)) ? [place] : []));
  const leaves = leavesOf({ problem, drafts, studied, conserved, depth, tree, budget });
  align(problem, leaves);
  const names = namesOfAll(problem, audit, drafts, leaves);
  const finished = finish(problem, names, leaves, tree, studied);
  const levels = studied.map((place) => judgeLevel(problem, drafts, place, finished, depth));
  return {
    n: problem.h0.n,
    audit,
    nodes: tree.nodes,
    leaves: finished,
    background: backgroundOf(problem, names, drafts, leaves),
    families: Object.fromEntries(problem.candidates.map(({ name }, k) => [name, names[k]?.family])),
    depth,
    levels,
    levelCount: drafts.unknown.length === 0 ? drafts.levels.length : undefined,
    undecided: finished.flatMap(({ energy }, leaf) => (energy.kind === "unknown" ? [leaf] : [])),
    status: weakest(tree.nodes.map(({ status }) => status)),
  };
}

function approximate({ energy }: LevelDraft): number {
  if (energy.kind === "value") return energy.value.toNumber();
  const bounds = energy.roots.intervals[energy.place];
  return bounds === undefined ? Number.NaN : middleOf(bounds);
}

function weakest(list: readonly ProofStatus[]): ProofStatus {
  if (list.includes("bounded")) return "bounded";
  return list.includes("separated") ? "separated" : "exact";
}

/** A leaf with the levels it belongs to. */
interface PlacedLeaf {
  readonly draft: LeafDraft;
  /** The block that it is a leaf of. */
  readonly block: EnergyBlock;
  readonly sector: number;
  readonly levels: readonly number[];
  vectors: readonly ExactVector[];
}

interface Leaving {
  readonly problem: ExactProblem;
  readonly drafts: LevelDrafts;
  readonly studied: readonly number[];
  readonly conserved: readonly number[];
  readonly depth: Depth;
  readonly tree: ProofTree;
  readonly budget: ProofBudget;
}

/** The leaves of all studied levels, level by level, and then those of unknown energy. */
function leavesOf({ problem, drafts, studied, conserved, depth, tree, budget }: Leaving): PlacedLeaf[] {
  const leaves: PlacedLeaf[] = [];
  const done = new Set<string>();
  const add = (sector: number, block: number): void => {
    const key = `${sector} ${block}`;
    const own = drafts.sectors[sector] as ExactSector;
    const energyBlock = own.blocks[block];
    if (done.has(key) || energyBlock === undefined) return;
    done.add(key);
    const levels = drafts.levels.flatMap(({ blocks }, place) =>
      blocks.some((member) => member.sector === sector && member.block === block) ? [place] : [],
    );
    for (const draft of resolveBlock({ problem, sector: own, conserved, depth, tree, budget }, energyBlock)) {
      leaves.push({ draft, block: energyBlock, sector, levels, vectors: draft.frame.vectors.map(fixExactPhase) });
    }
  };
  for (const place of studied) for (const { sector, block } of drafts.levels[place]?.blocks ?? []) add(sector, block);
  for (const { sector, block } of drafts.unknown) add(sector, block);
  return leaves;
}

/** Relative phases by ladder operators, level by level. */
function align(problem: ExactProblem, leaves: readonly PlacedLeaf[]): void {
  if (problem.candidates.every(({ ladder }) => ladder === undefined)) return;
  const byLevel = new Map<number, PlacedLeaf[]>();
  for (const leaf of leaves) {
    const [level] = leaf.levels;
    if (leaf.draft.kind !== "state" || level === undefined) continue;
    byLevel.set(level, [...(byLevel.get(level) ?? []), leaf]);
  }
  for (const members of byLevel.values()) {
    const states = members.map(({ draft, vectors }) => ({
      labels: draft.labels,
      vector: vectors[0] as ExactVector,
    }));
    for (const [k, vector] of alignByLadders(problem, states).entries()) {
      (members[k] as PlacedLeaf).vectors = [vector];
    }
  }
}

/** The families of all labels, from every block and so from all eigenvalues of the conserved candidates. */
function namesOfAll(
  problem: ExactProblem,
  audit: ExactAudit,
  drafts: LevelDrafts,
  leaves: readonly PlacedLeaf[],
): LabelNames[] {
  const blocks = [...drafts.sectors.flatMap((sector) => sector.blocks), ...leaves.map(({ draft }) => draft)];
  const labels = blocks.flatMap((block) => block.labels);
  return problem.candidates.map(({ label }, candidate) => {
    const values = labels.flatMap((own) => (own.candidate === candidate ? [own.value] : []));
    return namesOf(label, values, audit.candidates[candidate]?.order);
  });
}

function named(problem: ExactProblem, names: readonly LabelNames[], labels: readonly RawLabel[]): ProvedLabel[] {
  return labels.map(({ candidate, value }) => ({
    candidate: problem.candidates[candidate]?.name ?? "",
    value,
    text: labelText(value, names[candidate] ?? { family: undefined, order: undefined }),
  }));
}

/** Blocks that no leaf was made of. */
function backgroundOf(
  problem: ExactProblem,
  names: readonly LabelNames[],
  { sectors }: LevelDrafts,
  leaves: readonly PlacedLeaf[],
): ProvedBackground[] {
  const used = new Set(leaves.map(({ block }) => block));
  return sectors.flatMap(({ blocks }, sector) =>
    blocks
      .filter((block) => !used.has(block))
      .map(({ labels, energy, frame, path }) => ({
        labels: named(problem, names, labels),
        energy,
        sector,
        vectors: frame.vectors,
        path,
      })),
  );
}

function finish(
  problem: ExactProblem,
  names: readonly LabelNames[],
  leaves: readonly PlacedLeaf[],
  tree: ProofTree,
  studied: readonly number[],
): ProvedLeaf[] {
  const operators = problem.perturbations.map(({ operator }) => operator);
  const seconds = leaves.map(({ draft: { resolvent, scalarSecond }, vectors }) =>
    resolvent === undefined || !scalarSecond ? undefined : secondOrder(vectors, operators, resolvent),
  );
  const subjects = leaves.map(({ draft }, k) => ({
    path: draft.path,
    kind: draft.kind,
    shifts: draft.shifts.map((value) => ({ value })),
    hasSecond: seconds[k] !== undefined,
  }));
  const inLevel = new Map(studied.map((place) => [place, [] as (typeof subjects)[number][]]));
  leaves.forEach(({ levels }, k) => {
    for (const place of levels) inLevel.get(place)?.push(subjects[k] as (typeof subjects)[number]);
  });
  return leaves.map(({ draft, sector, levels, vectors }, k): ProvedLeaf => {
    const subject = subjects[k] as (typeof subjects)[number];
    const partners = levels.flatMap((place) => inLevel.get(place) ?? []);
    const second = seconds[k];
    const shifts = problem.perturbations.map(({ name }, p) => ({
      perturbation: name,
      value: draft.shifts[p] ?? ({ kind: "unknown" } as const),
    }));
    return {
      labels: named(problem, names, draft.labels),
      energy: draft.energy,
      levels,
      sector,
      vectors,
      kind: draft.kind,
      shifts,
      second: second?.energies,
      corrections: second?.corrections ?? [],
      safe: safetyOf(subject, partners, tree.nodes, problem.perturbations.length),
      path: draft.path,
      status: statusOf(
        draft,
        shifts.map(({ value }) => value),
      ),
    };
  });
}

function statusOf({ energy, kind }: LeafDraft, shifts: readonly BlockValue[]): ProofStatus {
  const known = energy.kind === "value" && shifts.every((value) => value.kind === "value");
  if (!known) return "bounded";
  return kind === "separated" ? "separated" : "exact";
}
