import type { CommutatorFinding } from "../audit/commutators.js";
import { VERSION } from "../version.js";
import type {
  Certificate,
  CertifiedCommutator,
  CertifiedLevel,
  CertifiedNode,
  CertifiedOperator,
} from "./certificate-format.js";
import type { LevelResult, Study } from "./findings.js";
import type { LevelGuard } from "./guard.js";
import type { StudyInternals } from "./internals.js";
import { sealCertificate } from "./seal.js";
import type { Verdict } from "./verdict.js";

export type * from "./certificate-format.js";

/** Writes the certificate of a study: fresh at every call, and with no part of the study in it. */
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
      eta: [...whole.nearby.eta],
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
    safe: { ...level.safe },
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
        commutators: [...node.commutators],
        residual: node.residual,
        couplings: node.couplings.map((bound) => ({
          ...bound,
          selectionRule: Number.isFinite(bound.selectionRule) ? bound.selectionRule : null,
        })),
      };
    }),
    guard: writeGuard(level.guard),
    states: study.states.slice(level.firstState, level.firstState + level.degeneracy).map((state) => ({
      sector: state.sector,
      energy: state.energy,
      energyPlusMinus: state.energyPlusMinus,
      labels: Object.fromEntries(Object.entries(state.labels).map(([name, label]) => [name, { ...label }])),
      shifts: state.shifts.map((shift) => ({ ...shift })),
      safe: { ...state.safe },
      limitedBy: state.limitedBy,
      vector: {
        kets: [...state.vector.kets],
        re: [...state.vector.re],
        ...(state.vector.im === undefined ? {} : { im: [...state.vector.im] }),
      },
    })),
  };
}

function writeGuard(guard: LevelGuard): CertifiedLevel["guard"] {
  return {
    ...guard,
    radius: [...guard.radius],
    sectors: guard.sectors.map((sector) => ({
      ...sector,
      first: { ...sector.first },
      second: { ...sector.second },
      inside: sector.inside === null ? null : { ...sector.inside },
    })),
  };
}
