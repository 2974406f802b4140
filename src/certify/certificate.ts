import type { CommutatorFinding } from "../audit/commutators.js";
import type { StateLabel } from "../refine/label.js";
import type { NodeKind } from "../refine/tree.js";
import { VERSION } from "../version.js";
import type { StudyInternals } from "./internals.js";
import type { LevelGuard } from "./guard.js";
import type { LevelResult, QuestionCode, Shift, Study, Verdict } from "./outcome.js";
import type { SafeOrders } from "./safe-orders.js";
import { sealCertificate } from "./seal.js";

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

/** Writes the certificate of a study. */
export function writeCertificate(study: Study, verdict: Verdict, internals: StudyInternals): Certificate {
  const { problem } = internals;
  const findings = [
    ...study.audit.candidates.flatMap((candidate) => [candidate.withH0, ...candidate.withPerturbations]),
    ...study.audit.pairs,
  ];
  const { whole } = study;
  return sealCertificate({
    format: "goodbasis-certificate",
    formatVersion: 1,
    library: VERSION,
    n: study.n,
    unit: study.unit,
    operators: [
      { role: "h0", name: "H0", hash: problem.h0.hash },
      ...problem.perturbations.map(
        ({ name, operator }): CertifiedOperator => ({ role: "perturbation", name, hash: operator.hash }),
      ),
      ...problem.candidates.map(
        ({ name, operator }): CertifiedOperator => ({ role: "candidate", name, hash: operator.hash }),
      ),
    ],
    resolution: study.resolution,
    verdict,
    commutators: findings.map(writeCommutator),
    whole: {
      orthonormality: whole.orthonormality,
      energyResidual: whole.energyResidual,
      energyEnclosure: whole.energyEnclosure,
      levels: study.levelCount,
      eta0: whole.nearby.eta0,
      eta: whole.nearby.eta,
    },
    levels: study.levels.map((level) => writeLevel(study, level, internals)),
  });
}

function writeCommutator({ left, right, verdict, norm, bound, atLeast }: CommutatorFinding): CertifiedCommutator {
  return { left, right, verdict, norm, bound, atLeast };
}

function writeLevel(study: Study, level: LevelResult, internals: StudyInternals): CertifiedLevel {
  const { evidence } = level;
  const gap = Math.min(level.gapBelow ?? Number.POSITIVE_INFINITY, level.gapAbove ?? Number.POSITIVE_INFINITY);
  const paths = internals.states[level.index]?.states.map((state) => state.path) ?? [];
  return {
    energy: level.energy,
    spread: level.spread,
    degeneracy: level.degeneracy,
    gapBelow: level.gapBelow,
    gapAbove: level.gapAbove,
    verdict: level.verdict,
    questions: level.questions.map((question) => question.code),
    safe: level.safe,
    tilt: level.tilt,
    orthonormality: evidence.orthonormality,
    complete: {
      energiesFound: study.n,
      isolation: Number.isFinite(gap) ? Math.max(0, gap - 2 * study.whole.energyEnclosure) : null,
    },
    couplings: study.perturbations.map((perturbation, p) => ({
      perturbation,
      offDiagonal: evidence.offDiagonal[p] ?? 0,
      withinLeaves: evidence.withinLeaves[p] ?? 0,
      largest: evidence.largest[p] ?? 0,
    })),
    nodes: evidence.nodes.map((node): CertifiedNode => {
      const children = new Map<number, number[]>();
      paths.forEach((path, state) => {
        const step = path.find((at) => at.node === node.node);
        if (step === undefined) return;
        const list = children.get(step.child);
        if (list === undefined) children.set(step.child, [state]);
        else list.push(state);
      });
      return {
        id: node.node,
        kind: node.kind,
        operator: node.operator,
        values: node.values.map((value) => [value.re, value.im] as const),
        states: [...children].sort(([a], [b]) => a - b).map(([, states]) => states),
        gap: node.gap,
        commutators: node.commutators,
        residual: node.residual,
        couplings: node.couplings.map((bound) => ({
          ...bound,
          selectionRule: Number.isFinite(bound.selectionRule) ? bound.selectionRule : null,
        })),
      };
    }),
    guard: level.guard,
    states: study.states.slice(level.firstState, level.firstState + level.degeneracy).map((state) => ({
      energy: state.energy,
      energyPlusMinus: state.energyPlusMinus,
      labels: state.labels,
      shifts: state.shifts,
      safe: state.safe,
      limitedBy: state.limitedBy,
      vector: {
        kets: [...state.vector.kets],
        re: [...state.vector.re],
        ...(state.vector.im === undefined ? {} : { im: [...state.vector.im] }),
      },
    })),
  };
}
