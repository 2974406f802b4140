import type { LabelDeclaration } from "../audit/label-family.js";
import type { ExactElement } from "../exact/operator.js";
import type { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { Depth } from "../refine/resolve.js";
import type { NodeKind, PathStep } from "../refine/tree.js";
import type { Roots } from "./roots.js";

/**
 * How far a step is proved.
 *
 * | status | meaning |
 * |---|---|
 * | `exact` | eigenvalues and vectors are in the field of square roots, and proved |
 * | `separated` | the parts are proved to be apart, by exact commutation alone; some eigenvalues leave the field |
 * | `bounded` | some eigenvalues leave the field or the budget: that part is for rigorous bounds, apart from the rest |
 */
export type ProofStatus = "exact" | "separated" | "bounded";

/** A commutator [A, B]: exactly zero, or what is not. */
export interface ExactCommutator {
  readonly left: string;
  readonly right: string;
  /** Whether it vanishes, exactly. */
  readonly vanishes: boolean;
  /** The number of elements that are not zero. */
  readonly count: number;
  /** These elements, largest modulus first; at most a thousand of them. */
  readonly elements: readonly ExactElement[];
}

/** What was found about one candidate. */
export interface ExactCandidateFinding {
  readonly name: string;
  readonly kind: "hermitian" | "unitary" | "normal" | "general";
  /** Normal, and both H0 and every perturbation commute with it. */
  readonly conserved: boolean;
  /** H0 conserves it and some perturbation breaks it: it may name levels, and is no evidence. */
  readonly descriptive: boolean;
  readonly withH0: ExactCommutator;
  readonly withPerturbations: readonly ExactCommutator[];
  /** N with A^N = 1, exactly, where the candidate is unitary and there is one up to 64. */
  readonly order: number | undefined;
}

/** Which candidates are conserved and which commute, decided exactly. */
export interface ExactAudit {
  readonly candidates: readonly ExactCandidateFinding[];
  /** Commutators of conserved candidates with one another. */
  readonly pairs: readonly ExactCommutator[];
}

/** The common eigenvalue of a block, or what is known of the eigenvalues in it. */
export type BlockValue =
  | { readonly kind: "value"; readonly value: Surd }
  | RootValues
  /** Nothing but that they are none of the others: the budget ended here. */
  | { readonly kind: "unknown" };

/** Eigenvalues that are not numbers of the field: roots of a polynomial, each as often as any other. */
export interface RootValues {
  readonly kind: "roots";
  readonly roots: Roots;
  /** Of which operator they are eigenvalues: of A, of (A + A†)/2, or of (A − A†)/2i where the real part is exact. */
  readonly part: "whole" | "re" | "im";
  /** The exact real part where `part` is "im". */
  readonly re: Surd | undefined;
}

/** A node of the refinement tree: one block, taken apart by one operator. */
export interface ProofNode {
  /** Its place in the list. */
  readonly id: number;
  /** The node and child that the block came from; undefined for the whole space. */
  readonly from: PathStep | undefined;
  readonly kind: NodeKind;
  readonly operator: string;
  /** Dimension of the block; the sizes of the children add up to it. */
  readonly size: number;
  readonly children: readonly { readonly value: BlockValue; readonly size: number }[];
  readonly status: ProofStatus;
  /** What is proved, and what is not. */
  readonly sentence: string;
}

/** A label that a leaf carries. */
export interface ProvedLabel {
  /** Name of the candidate. */
  readonly candidate: string;
  /** The eigenvalue, or what it may be. */
  readonly value: BlockValue;
  /** As the trade writes it: "3/2", "−1", "exp(2πi·1/3)"; several values are separated by " | ". */
  readonly text: string;
}

/** The first-order shift of a leaf's states. */
export interface ProvedShift {
  readonly perturbation: string;
  /** The shift; roots where V leaves the field in this leaf; unknown where it was not diagonalised. */
  readonly value: BlockValue;
}

/** Safe orders of the short formulas, see the table of the certificate. */
export interface ProvedSafety {
  readonly energies: number | "all";
  readonly states: number | "all" | "none";
  /** What limits the orders; empty where nothing does. */
  readonly limitedBy: string;
}

/**
 * What a leaf holds.
 *
 * | kind | states |
 * |---|---|
 * | `state` | one, with its exact vector |
 * | `separated` | several, apart by energies or labels of their own that leave the field, as their vectors do |
 * | `shifted` | several, apart by first-order shifts of the one perturbation that leave the field |
 * | `together` | several that nothing exact tells apart |
 */
export type LeafKind = "state" | "separated" | "shifted" | "together";

/** States that nothing exact takes further apart; usually one. */
export interface ProvedLeaf {
  /** Labels of conserved candidates, in the order in which they were used. */
  readonly labels: readonly ProvedLabel[];
  readonly energy: BlockValue;
  /** Places of the levels that its states belong to; one where the energy is in the field. */
  readonly levels: readonly number[];
  /** Number of the sector. */
  readonly sector: number;
  /** Mutually orthogonal exact vectors that span the leaf, not normalised; phases as {@link fixExactPhase} has them. */
  readonly vectors: readonly ExactVector[];
  readonly kind: LeafKind;
  readonly shifts: readonly ProvedShift[];
  /**
   * Second order: E2 of perturbations p and q in row p, column q, from Re⟨V_p q|x_q⟩; undefined where it is not a number
   * of the field or was not asked for.
   */
  readonly second: readonly (readonly Surd[])[] | undefined;
  /** For each perturbation and vector, x with (E − H0) x = Q V q, orthogonal to the level; evidence for `second`. */
  readonly corrections: readonly (readonly ExactVector[])[];
  readonly safe: ProvedSafety;
  /** Steps from the whole space down to the leaf. */
  readonly path: readonly PathStep[];
  readonly status: ProofStatus;
}

/** States of levels that are not studied: kept, since only together with them are the levels known to be complete. */
export interface ProvedBackground {
  readonly labels: readonly ProvedLabel[];
  readonly energy: BlockValue;
  readonly sector: number;
  /** Mutually orthogonal, not normalised. */
  readonly vectors: readonly ExactVector[];
  readonly path: readonly PathStep[];
}

/** An element of a perturbation between two states of one level that does not vanish. */
export interface ProvedCoupling {
  readonly perturbation: string;
  /** Leaf and place of the vector in it, twice. */
  readonly states: readonly [readonly [leaf: number, vector: number], readonly [leaf: number, vector: number]];
  /** |⟨q|V|q′⟩|² for vectors of length one. */
  readonly squaredModulus: Surd;
}

/** A level of H0: all states of one energy, decided exactly. */
export interface ProvedLevel {
  /** By ascending energy. */
  readonly place: number;
  /** The energy, or an interval that holds it alone: one root of a polynomial without double roots. */
  readonly energy: { readonly kind: "value"; readonly value: Surd } | ({ readonly kind: "root" } & LevelRoot);
  readonly degeneracy: number;
  /** The leaves with states in this level, and how many of them. */
  readonly members: readonly { readonly leaf: number; readonly size: number }[];
  /** Whether every perturbation is diagonal in the states of the level. */
  readonly verdict: "good" | "not good" | "undecided";
  readonly couplings: readonly ProvedCoupling[];
  readonly sentence: string;
}

/** One root of a polynomial. */
export interface LevelRoot {
  readonly roots: Roots;
  /** Which of the ascending roots. */
  readonly place: number;
}

/**
 * The refinement tree, proved in exact arithmetic. Plain data: everything in it can be checked by multiplication and
 * comparison, see {@link verifyProof}.
 */
export interface ExactProof {
  readonly n: number;
  readonly audit: ExactAudit;
  readonly nodes: readonly ProofNode[];
  readonly leaves: readonly ProvedLeaf[];
  /** With the leaves' vectors, these make n. */
  readonly background: readonly ProvedBackground[];
  /** The family that each candidate's labels are written in. */
  readonly families: Readonly<Record<string, LabelDeclaration | undefined>>;
  /** How far states were told apart. */
  readonly depth: Depth;
  /** The levels studied. */
  readonly levels: readonly ProvedLevel[];
  /** How many levels there are; undefined where some energies are unknown. */
  readonly levelCount: number | undefined;
  /** Leaves whose energies the budget left unknown: no level is known to be complete while there are any. */
  readonly undecided: readonly number[];
  /** `exact` where every node is; otherwise the weakest status. */
  readonly status: ProofStatus;
}
