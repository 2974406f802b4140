import type { Certificate, CertifiedCommutator } from "./certificate-format.js";
import type { OwnOperator, OwnProblem } from "./recheck-operators.js";
import { type OwnCommutator, ownCommutator } from "./recheck-own-commutator.js";
import type { Ledger } from "./recheck-report.js";

/** A commutator is held to this share of the resolution for couplings, as the audit states it. */
const SHARE = 1 / 64;

/** The commutators of one candidate. */
export interface OwnCandidate {
  readonly withH0: OwnCommutator;
  readonly withPerturbations: readonly OwnCommutator[];
  /** What the certificate's verdicts make of it. */
  readonly role: "conserved" | "descriptive" | "broken";
  /** The certified bounds on ‖[A, V]‖₂, and on ‖[A, H0]‖₂. */
  readonly bounds: readonly number[];
  readonly boundWithH0: number;
}

/** Checks every commutator of a certificate, and that none is missing. */
export function checkCommutators(ledger: Ledger, certificate: Certificate, problem: OwnProblem): OwnCandidate[] {
  const { commutators, resolution } = certificate;
  let next = 0;
  const check = (
    left: OwnOperator,
    right: OwnOperator,
  ): { own: OwnCommutator; claimed: CertifiedCommutator | undefined } => {
    const path = `commutators[${next}]`;
    const claimed = commutators[next++];
    const own = ownCommutator(left.operator, right.operator);
    const name = `[${left.name}, ${right.name}]`;
    const there = ledger.claim(
      claimed !== undefined && claimed.left === left.name && claimed.right === right.name,
      claimed === undefined ? "commutators" : path,
      () => `expected the commutator ${name} here, found ${claimed ? `[${claimed.left}, ${claimed.right}]` : "none"}`,
    );
    if (!there || claimed === undefined) return { own, claimed: undefined };
    const rounding = 8 * problem.n * 2 ** -53 * (left.operator.norm * right.operator.norm);
    const threshold = Math.max(resolution * SHARE * (left.scale * right.scale), rounding);
    checkOne(ledger, path, name, claimed, own, threshold, rounding);
    return { own, claimed };
  };
  const candidates = problem.candidates.map((candidate): OwnCandidate => {
    const withH0 = check(candidate, problem.h0);
    const withPerturbations = problem.perturbations.map((v) => check(candidate, v));
    const kept = withH0.claimed?.verdict === "commutes";
    const conserved = kept && withPerturbations.every(({ claimed }) => claimed?.verdict === "commutes");
    return {
      withH0: withH0.own,
      withPerturbations: withPerturbations.map(({ own }) => own),
      role: conserved ? "conserved" : kept ? "descriptive" : "broken",
      bounds: withPerturbations.map(({ own, claimed }) => claimed?.bound ?? own.bound),
      boundWithH0: withH0.claimed?.bound ?? withH0.own.bound,
    };
  });
  problem.candidates.forEach((left, a) => {
    if (candidates[a]?.role !== "conserved") return;
    problem.candidates.forEach((right, b) => {
      if (b > a && candidates[b]?.role === "conserved") check(left, right);
    });
  });
  ledger.claim(
    next >= commutators.length,
    `commutators[${next}]`,
    () => `${commutators.length} commutators are listed, ${next} belong to this problem`,
  );
  return candidates;
}

function checkOne(
  ledger: Ledger,
  path: string,
  name: string,
  claimed: CertifiedCommutator,
  own: OwnCommutator,
  threshold: number,
  rounding: number,
): void {
  ledger.near(`${path}.norm`, `the Frobenius norm of ${name}`, claimed.norm, own.norm, own.radius + 1e-12 * own.norm);
  ledger.bound(`${path}.bound`, `‖${name}‖`, claimed.bound, own.bound);
  ledger.claim(
    claimed.bound >= own.certain * (1 - 1e-6),
    `${path}.bound`,
    () =>
      `‖${name}‖ is claimed to be at most ${claimed.bound}; its elements and the entries' own uncertainty make it ${own.certain}`,
  );
  ledger.claim(
    claimed.bound >= own.atLeast,
    `${path}.bound`,
    () => `‖${name}‖ is claimed to be at most ${claimed.bound}, but an element alone is ${own.atLeast}`,
  );
  ledger.claim(
    claimed.atLeast <= own.most && claimed.atLeast <= claimed.bound,
    `${path}.atLeast`,
    () => `‖${name}‖ is claimed to be at least ${claimed.atLeast}, but no element exceeds ${own.most}`,
  );
  // a certificate may allow for rounding that does not occur for these numbers: a hundredth of what counts as commuting
  const blur = 2 * (own.most - own.atLeast) + 1e-12 * own.most + threshold / 100 + rounding;
  ledger.claim(
    claimed.atLeast >= own.atLeast - blur,
    `${path}.atLeast`,
    () => `‖${name}‖ is claimed to be at least ${claimed.atLeast} only, but an element alone is ${own.atLeast}`,
  );
  const verdict = claimed.bound <= threshold ? "commutes" : claimed.atLeast > threshold ? "broken" : "undecided";
  ledger.claim(
    claimed.verdict === verdict,
    `${path}.verdict`,
    () =>
      `${name} is claimed to be "${claimed.verdict}", but its bounds ${claimed.atLeast} and ${claimed.bound} against ` +
      `${threshold} say "${verdict}"`,
  );
}
