import { requireOptions } from "../misuse.js";
import { type CommutatorFinding, judgeCommutator } from "./commutators.js";
import { maximalCommutingSets } from "./commuting-sets.js";
import { type PreparedProblem, type Problem, prepareProblem } from "./problem.js";
import { checkResolution, DEFAULT_RESOLUTION } from "./resolution.js";

/** What the audit found of one candidate. */
export interface CandidateFinding {
  /** Its name, as the caller wrote it. */
  readonly name: string;
  /** What kind of normal operator it is. */
  readonly kind: "hermitian" | "unitary" | "normal";
  /** Whether it may serve as a label: it commutes with H0 and with every perturbation. */
  readonly conserved: boolean;
  /**
   * Whether it may at least describe the levels: H0 conserves it, and a perturbation breaks it or may break it.
   */
  readonly descriptive: boolean;
  /** [A, H0]. */
  readonly withH0: CommutatorFinding;
  /** [A, V] for every perturbation, in their order. */
  readonly withPerturbations: readonly CommutatorFinding[];
  /** Why it is not used as a label, in one sentence; empty if it is conserved. */
  readonly reason: string;
}

/** Everything that commutators alone tell about a problem. */
export interface Audit {
  /** One finding for each candidate, in the caller's order. */
  readonly candidates: readonly CandidateFinding[];
  /** [A, B] for every pair of conserved candidates. */
  readonly pairs: readonly CommutatorFinding[];
  /** The maximal sets of conserved candidates that commute with each other. */
  readonly sets: readonly (readonly string[])[];
  /** False if the search for sets stopped at its budget. */
  readonly setsComplete: boolean;
  /** Conserved candidates that do not commute with each other, one sentence a pair. */
  readonly remarks: readonly string[];
}

/** Options of {@link auditCommutators}. */
export interface AuditOptions {
  /** Couplings below this fraction of ‖V‖ count as vanished; commutators are held to 1/64 of it. Default 1e-10. */
  readonly resolution?: number;
}

/**
 * Which candidates are conserved, and which of them commute with each other.
 *
 * Every commutator is bounded rigorously from above and below; a candidate that fails is a finding, never an exception.
 *
 * @param problem - H0, the perturbation or perturbations, and the candidates, all n × n over the same kets
 * @throws GoodBasisError `shape`, `not-finite`, `not-hermitian`, `not-normal`, `name`, `option`
 *
 * @example
 * ```ts
 * import { auditCommutators } from "goodbasis";
 *
 * const audit = auditCommutators({
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] }, B: { diagonal: [1, 1, 0] } },
 * });
 * console.log(audit.candidates.map((c) => `${c.name}: ${c.conserved ? "conserved" : c.reason}`).join("\n"));
 * ```
 */
export function auditCommutators(problem: Problem, options: AuditOptions = {}): Audit {
  requireOptions("auditCommutators", options, ["resolution"]);
  return auditPrepared(prepareProblem(problem), checkResolution(options.resolution ?? DEFAULT_RESOLUTION));
}

/** {@link auditCommutators} for a problem that has been read already. */
export function auditPrepared(problem: PreparedProblem, resolution: number): Audit {
  const h0 = { name: "H0", operator: problem.h0 };
  const candidates = problem.candidates.map((candidate): CandidateFinding => {
    const withH0 = judgeCommutator(candidate, h0, resolution, problem.ket);
    const withPerturbations = problem.perturbations.map((v) => judgeCommutator(candidate, v, resolution, problem.ket));
    const failed = [withH0, ...withPerturbations].filter((finding) => finding.verdict !== "commutes");
    return {
      name: candidate.name,
      kind: candidate.kind,
      conserved: failed.length === 0,
      descriptive: failed.length > 0 && withH0.verdict === "commutes",
      withH0,
      withPerturbations,
      reason: failed.map(explain).join("; "),
    };
  });
  const conserved = problem.candidates.filter((_, i) => candidates[i]?.conserved === true);
  const pairs: CommutatorFinding[] = [];
  const commuting = conserved.map(() => conserved.map(() => false));
  for (let a = 0; a < conserved.length; a++) {
    for (let b = a + 1; b < conserved.length; b++) {
      const left = conserved[a];
      const right = conserved[b];
      if (left === undefined || right === undefined) continue;
      const finding = judgeCommutator(left, right, resolution, problem.ket);
      pairs.push(finding);
      const together = finding.verdict === "commutes";
      (commuting[a] as boolean[])[b] = together;
      (commuting[b] as boolean[])[a] = together;
    }
  }
  const found = maximalCommutingSets(conserved.length, (a, b) => commuting[a]?.[b] === true);
  return {
    candidates,
    pairs,
    sets: found.sets.map((set) => set.map((index) => conserved[index]?.name ?? "")),
    setsComplete: found.complete,
    remarks: pairs
      .filter((pair) => pair.verdict !== "commutes")
      .map((pair) =>
        pair.verdict === "broken"
          ? `${pair.left} and ${pair.right} are both conserved but do not commute: ${size(pair)}`
          : `${pair.left} and ${pair.right} are both conserved; whether they commute is undecided: ${size(pair)}`,
      ),
  };
}

function explain(finding: CommutatorFinding): string {
  return finding.verdict === "broken"
    ? `does not commute with ${finding.right}: ${size(finding)}${finding.edge ? EDGE_REMARK : ""}`
    : `whether it commutes with ${finding.right} is undecided: ${size(finding)}; ` +
        "smaller entry uncertainties or a coarser resolution would decide it";
}

const EDGE_REMARK =
  "; only the last kets are concerned, a likely edge of a truncated space: build its matrix elements exactly, or enlarge it";

function size(finding: CommutatorFinding): string {
  const worst = finding.largest[0];
  const where =
    worst === undefined
      ? ""
      : `, largest element ${worst.size.toPrecision(4)} at ⟨${worst.rowKet}|…|${worst.columnKet}⟩`;
  const name = `[${finding.left}, ${finding.right}]`;
  return `‖${name}‖ = ${finding.norm.toPrecision(6)} (Frobenius), 2-norm at most ${finding.bound.toExponential(1)}${where}`;
}
