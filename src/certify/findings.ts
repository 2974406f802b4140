import type { Audit } from "../audit/audit.js";
import type { StateLabel } from "../refine/label.js";
import type { TreeNode } from "../refine/tree.js";
import type { Certificate } from "./certificate-format.js";
import type { LevelCouplings } from "./couplings.js";
import type { LevelGuard } from "./guard.js";
import type { SafeOrders } from "./safe-orders.js";
import type { QuestionCode, Shift, Verdict } from "./verdict.js";
import type { WholeEvidence } from "./whole.js";

/** A vector over the caller's kets: entry k is coefficient `re[k] + i im[k]` of ket number `kets[k]`, ascending. */
export interface StateVector {
  /** Numbers of the kets with a coefficient, ascending. */
  readonly kets: Int32Array;
  /** Real part of each coefficient. */
  readonly re: Float64Array;
  /** Absent for a real vector. */
  readonly im: Float64Array | undefined;
}

/** A state of the basis. */
export interface BasisState<K extends string = string> {
  /** Place among all states studied. */
  readonly index: number;
  /** Place of its level among the levels studied. */
  readonly level: number;
  /** Number of its symmetry sector: states of different sectors differ in labels that hold for whole sectors, over all levels. */
  readonly sector: number;
  /** Unperturbed energy ⟨μ|H0|μ⟩. */
  readonly energy: number;
  /** An exact eigenvalue of H0 lies within this of `energy`. */
  readonly energyPlusMinus: number;
  /** One entry for every candidate, conserved or not; look at `role` and `status`. */
  readonly labels: Readonly<Record<K, StateLabel>>;
  /** One entry for each perturbation. */
  readonly shifts: readonly Shift[];
  /** Through which order the short formulas are right for it. */
  readonly safe: SafeOrders;
  /** What limits the safe orders, in words. */
  readonly limitedBy: string;
  /** The state over the caller's kets, normalised, its phase fixed. */
  readonly vector: StateVector;
}

/** Something that stands between a level and the verdict "good", and what would help. */
export interface Question {
  /** What kind of question it is. */
  readonly code: QuestionCode;
  /** Place of the level among the levels studied. */
  readonly level: number;
  /** The numbers, and the next step. */
  readonly message: string;
}

/** Two states that V couples inside a level. */
export interface Coupling {
  /** Place of the level among the levels studied. */
  readonly level: number;
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** Index of each state among all states studied. */
  readonly states: readonly [number, number];
  /** The states in words: their labels, or their largest ket. */
  readonly names: readonly [string, string];
  /** |V_μν| in the problem's unit, and rigorous bounds on it. */
  readonly size: number;
  /** Rigorous lower bound on |V_μν|. */
  readonly atLeast: number;
  /** Rigorous upper bound on |V_μν|. */
  readonly atMost: number;
}

/** What was found of one level. */
export interface LevelResult {
  /** Place among the levels studied. */
  readonly index: number;
  /** Place among all levels of H0, by ascending energy. */
  readonly place: number;
  /** Middle of the energies clustered here, in the problem's unit. */
  readonly energy: number;
  /** Highest minus lowest energy that was clustered here. */
  readonly spread: number;
  /** Number of states. */
  readonly degeneracy: number;
  /** Distance to the next level below and above; null where there is none. */
  readonly gapBelow: number | null;
  /** Distance to the next level above; null where there is none. */
  readonly gapAbove: number | null;
  /** Whether V leaves its states uncoupled. */
  readonly verdict: Verdict;
  /** Index of its first state; its states are consecutive. */
  readonly firstState: number;
  /** Safe orders of the level: the minimum of its states'. */
  readonly safe: SafeOrders;
  /** The pairs that V certainly couples, largest first; at most ten. */
  readonly couplings: readonly Coupling[];
  /** What stands in the way of "good". */
  readonly questions: readonly Question[];
  /** The denominators guard. */
  readonly guard: LevelGuard;
  /** Bound on the sine of the angle between the computed and the exact level. */
  readonly tilt: number;
  /** The level's share of the tree, and the bounds on every in-level element. */
  readonly evidence: LevelCouplings;
}

/** A commuting set of conserved candidates and what it separates. */
export interface SetReport {
  /** Names of its members. */
  readonly names: readonly string[];
  /** Number of label sectors. */
  readonly sectors: number;
  /** Dimension of the largest. */
  readonly largest: number;
  /** Pairs of states that stay together: Σ d(d − 1)/2. */
  readonly pairsTogether: number;
  /** Whether it is the backbone of the basis. */
  readonly chosen: boolean;
}

/** What every outcome carries, whatever the verdict. */
export interface Study<K extends string = string> {
  /** Number of kets. */
  readonly n: number;
  /** Unit of all energies. */
  readonly unit: string;
  /** Names of the perturbations. */
  readonly perturbations: readonly string[];
  /** Names of the candidates, in the caller's order. */
  readonly candidates: readonly K[];
  /** Name of ket i. */
  readonly ket: (i: number) => string;
  /** The fraction of ‖V − tr V/n‖ below which an in-level element counts as vanished. */
  readonly resolution: number;
  /** Commutators and what follows from them. */
  readonly audit: Audit;
  /** The commuting sets that were compared; empty where there is only one. */
  readonly sets: readonly SetReport[];
  /** All nodes of the refinement tree. */
  readonly tree: readonly TreeNode[];
  /** Number of levels of H0. */
  readonly levelCount: number;
  /** The levels studied, by ascending energy. */
  readonly levels: readonly LevelResult[];
  /** The states studied, level by level. */
  readonly states: readonly BasisState<K>[];
  /** Bounds that hold for the whole basis. */
  readonly whole: WholeEvidence;
  /** The certificate as plain JSON; written when called. */
  readonly certificate: () => Certificate;
}
