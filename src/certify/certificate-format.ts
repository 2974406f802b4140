import type { StateLabel } from "../refine/label.js";
import type { NodeKind } from "../refine/tree.js";
import type { LevelGuard } from "./guard.js";
import type { SafeOrders } from "./safe-orders.js";
import type { QuestionCode, Shift, Verdict } from "./verdict.js";

/** An operator as the certificate knows it. */
export interface CertifiedOperator {
  readonly role: "h0" | "perturbation" | "candidate";
  readonly name: string;
  /** SHA-256 over its dimension, pattern, entries and radii. */
  readonly hash: string;
}

/** A commutator's verdict in a certificate. */
export interface CertifiedCommutator {
  readonly left: string;
  readonly right: string;
  readonly verdict: "commutes" | "broken" | "undecided";
  readonly norm: number;
  readonly bound: number;
  readonly atLeast: number;
}

/** Evidence of one node for one perturbation; a selection rule is null where the node's operator says nothing about V. */
export interface CertifiedBound {
  readonly perturbation: string;
  readonly selectionRule: number | null;
  readonly direct: number;
  readonly counted: number;
}

/** A node of the tree as far as it concerns one level. */
export interface CertifiedNode {
  readonly id: number;
  readonly kind: NodeKind;
  readonly operator: string;
  /** Eigenvalues `[re, im]` that occur in this level. */
  readonly values: readonly (readonly [number, number])[];
  /** States below each value, by place within the level. */
  readonly states: readonly (readonly number[])[];
  readonly gap: number;
  readonly commutators: readonly number[];
  readonly residual: number;
  readonly couplings: readonly CertifiedBound[];
}

/** A state's vector in a certificate. */
export interface CertifiedVector {
  readonly kets: readonly number[];
  readonly re: readonly number[];
  readonly im?: readonly number[];
}

/** A state in a certificate. */
export interface CertifiedState {
  readonly energy: number;
  readonly energyPlusMinus: number;
  readonly labels: Readonly<Record<string, StateLabel>>;
  readonly shifts: readonly Shift[];
  readonly safe: SafeOrders;
  readonly limitedBy: string;
  readonly vector: CertifiedVector;
}

/** What is certified of one perturbation inside one level. */
export interface CertifiedCoupling {
  readonly perturbation: string;
  /** Bound on the Frobenius norm of all off-diagonal elements. */
  readonly offDiagonal: number;
  /** Bound on the elements inside leaves of several states. */
  readonly withinLeaves: number;
  /** Largest bound that counts, over all pairs. */
  readonly largest: number;
}

/** A level in a certificate. */
export interface CertifiedLevel {
  readonly energy: number;
  readonly spread: number;
  readonly degeneracy: number;
  readonly gapBelow: number | null;
  readonly gapAbove: number | null;
  readonly verdict: Verdict;
  readonly questions: readonly QuestionCode[];
  readonly safe: SafeOrders;
  readonly tilt: number;
  readonly orthonormality: number;
  /** All n eigenvalues of H0 were found; no other lies nearer to the level than this. Null where it is the only level. */
  readonly complete: { readonly energiesFound: number; readonly isolation: number | null };
  readonly couplings: readonly CertifiedCoupling[];
  readonly nodes: readonly CertifiedNode[];
  readonly guard: LevelGuard;
  readonly states: readonly CertifiedState[];
}

/**
 * The proof as plain JSON: everything needed to check it again from the operators.
 *
 * Numbers are in the problem's unit. `seals` holds a SHA-256 of every section, so that a change is found and named even
 * where the changed claim would still be true.
 */
export interface Certificate {
  readonly format: "goodbasis-certificate";
  readonly formatVersion: 1;
  /** Version of the library that wrote it. */
  readonly library: string;
  readonly n: number;
  readonly unit: string;
  readonly operators: readonly CertifiedOperator[];
  readonly resolution: number;
  readonly verdict: Verdict;
  readonly commutators: readonly CertifiedCommutator[];
  readonly whole: {
    readonly orthonormality: number;
    readonly energyResidual: number;
    readonly energyEnclosure: number;
    readonly levels: number;
    readonly eta0: number;
    readonly eta: readonly number[];
  };
  readonly levels: readonly CertifiedLevel[];
  readonly seals: Readonly<Record<string, string>>;
}
