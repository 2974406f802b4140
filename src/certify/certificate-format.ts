import type { StateLabel } from "../refine/label.js";
import type { NodeKind } from "../refine/tree.js";
import type { LevelGuard } from "./guard.js";
import type { SafeOrders } from "./safe-orders.js";
import type { QuestionCode, Shift, Verdict } from "./verdict.js";

/** An operator as the certificate knows it. */
export interface CertifiedOperator {
  /** What part it plays. */
  readonly role: "h0" | "perturbation" | "candidate";
  /** Its name. */
  readonly name: string;
  /** SHA-256 over its dimension, pattern, entries and radii. */
  readonly hash: string;
}

/** A commutator's verdict in a certificate. */
export interface CertifiedCommutator {
  /** Name of A. */
  readonly left: string;
  /** Name of B. */
  readonly right: string;
  /** Whether [A, B] vanishes. */
  readonly verdict: "commutes" | "broken" | "undecided";
  /** Its Frobenius norm as computed. */
  readonly norm: number;
  /** Upper bound on its 2-norm. */
  readonly bound: number;
  /** Lower bound on its 2-norm. */
  readonly atLeast: number;
}

/** Evidence of one node for one perturbation; a selection rule is null where the node's operator says nothing about V. */
export interface CertifiedBound {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** Bound by the selection rule. */
  readonly selectionRule: number | null;
  /** Bound by direct evaluation. */
  readonly direct: number;
  /** The smaller of the two. */
  readonly counted: number;
}

/** A node of the tree as far as it concerns one level. */
export interface CertifiedNode {
  /** Number of the node in the tree. */
  readonly id: number;
  /** What kind of refinement it is. */
  readonly kind: NodeKind;
  /** Name of its operator. */
  readonly operator: string;
  /** Eigenvalues `[re, im]` that occur in this level. */
  readonly values: readonly (readonly [number, number])[];
  /** States below each value, by place within the level. */
  readonly states: readonly (readonly number[])[];
  /** Smallest distance between the values. */
  readonly gap: number;
  /** Bound on ‖[A, V]‖₂ for each perturbation; empty where the node is no label. */
  readonly commutators: readonly number[];
  /** Largest bound on ‖A q − a q‖ and ‖A†q − a*q‖. */
  readonly residual: number;
  /** One bound for each perturbation. */
  readonly couplings: readonly CertifiedBound[];
}

/** A state's vector in a certificate. */
export interface CertifiedVector {
  /** Numbers of the kets. */
  readonly kets: readonly number[];
  /** Real parts. */
  readonly re: readonly number[];
  /** Imaginary parts; absent for a real vector. */
  readonly im?: readonly number[];
}

/** A state in a certificate. */
export interface CertifiedState {
  /** Number of its symmetry sector, over all levels. */
  readonly sector: number;
  /** Unperturbed energy. */
  readonly energy: number;
  /** An exact eigenvalue of H0 lies within this of it. */
  readonly energyPlusMinus: number;
  /** One label for every candidate. */
  readonly labels: Readonly<Record<string, StateLabel>>;
  /** One shift for every perturbation. */
  readonly shifts: readonly Shift[];
  /** Its safe orders. */
  readonly safe: SafeOrders;
  /** What limits them, in words. */
  readonly limitedBy: string;
  /** Its vector over the kets. */
  readonly vector: CertifiedVector;
}

/** What is certified of one perturbation inside one level. */
export interface CertifiedCoupling {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** Bound on the 2-norm of all off-diagonal elements together. */
  readonly offDiagonal: number;
  /** Bound on the elements inside leaves of several states. */
  readonly withinLeaves: number;
  /** Largest bound that counts, over all pairs. */
  readonly largest: number;
}

/** A level in a certificate. */
export interface CertifiedLevel {
  /** Middle of the energies. */
  readonly energy: number;
  /** Highest minus lowest energy. */
  readonly spread: number;
  /** Number of states. */
  readonly degeneracy: number;
  /** Distance to the next level below; null where there is none. */
  readonly gapBelow: number | null;
  /** Distance to the next level above; null where there is none. */
  readonly gapAbove: number | null;
  /** The verdict on this level. */
  readonly verdict: Verdict;
  /** Codes of what stands in the way. */
  readonly questions: readonly QuestionCode[];
  /** The minimum of its states' safe orders. */
  readonly safe: SafeOrders;
  /** Bound on the sine of the angle between the computed and the exact level. */
  readonly tilt: number;
  /** Bound on ‖QQ† − 1‖₂ of its states. */
  readonly orthonormality: number;
  /** All n eigenvalues of H0 were found; no other lies nearer to the level than this. Null where it is the only level. */
  readonly complete: {
    /** How many eigenvalues of H0 were found. */
    readonly energiesFound: number;
    /** Distance to the next exact eigenvalue outside the level, at least. */
    readonly isolation: number | null;
  };
  /** One entry for each perturbation. */
  readonly couplings: readonly CertifiedCoupling[];
  /** The nodes at which its states part company. */
  readonly nodes: readonly CertifiedNode[];
  /** The denominators guard. */
  readonly guard: LevelGuard;
  /** Its states. */
  readonly states: readonly CertifiedState[];
}

/**
 * The proof as plain JSON: everything needed to check it again from the operators.
 *
 * Numbers are in the problem's unit. `seals` holds a SHA-256 of every section, so that a change is found and named even
 * where the changed claim would still be true.
 */
export interface Certificate {
  /** Tells the file apart from others. */
  readonly format: "goodbasis-certificate";
  /** Version of the layout. */
  readonly formatVersion: 1;
  /** Version of the library that wrote it. */
  readonly library: string;
  /** Number of kets. */
  readonly n: number;
  /** Unit of all energies. */
  readonly unit: string;
  /** The operators it is about. */
  readonly operators: readonly CertifiedOperator[];
  /** The fraction of ‖V − tr V/n‖ below which an in-level element counts as vanished. */
  readonly resolution: number;
  /** The verdict on all levels studied. */
  readonly verdict: Verdict;
  /** Every commutator of the audit. */
  readonly commutators: readonly CertifiedCommutator[];
  /** Bounds for the whole basis. */
  readonly whole: {
    /** Bound on ‖FF† − 1‖₂ of the whole basis. */
    readonly orthonormality: number;
    /** Bound on the Frobenius norm of all residuals H0 q − E q. */
    readonly energyResidual: number;
    /** Every exact eigenvalue of H0 lies within this of a computed one. */
    readonly energyEnclosure: number;
    /** Number of levels of H0. */
    readonly levels: number;
    /** Bound on ‖H0 − H0'‖ to the nearby symmetric model. */
    readonly eta0: number;
    /** The same for each perturbation. */
    readonly eta: readonly number[];
  };
  /** The levels studied, by ascending energy. */
  readonly levels: readonly CertifiedLevel[];
  /** SHA-256 of every section, by its path. */
  readonly seals: Readonly<Record<string, string>>;
}
