import { GoodBasisError } from "../errors.js";
import type { ExactProblem } from "./problem.js";
import type { ExactProof } from "./proof.js";
import { verifyAudit } from "./verify-audit.js";
import { Faults, type ProofFault } from "./verify-faults.js";
import { verifyLevels } from "./verify-levels.js";
import { verifySafety } from "./verify-safety.js";
import { verifySecondOrder } from "./verify-second-order.js";
import { verifyTree } from "./verify-tree.js";
import { verifyVectors } from "./verify-vectors.js";

/** What came of checking a proof again. */
export interface ProofCheck {
  /** Whether everything was confirmed. */
  readonly passed: boolean;
  /** What was not, in the order in which it was met. */
  readonly faults: readonly ProofFault[];
}

/**
 * Checks an exact proof again from the operators alone, by multiplication and comparison: commutators; that the vectors
 * are mutually orthogonal eigenvectors and make n; that energies called equal or different are; the elements of every
 * perturbation inside every level; second orders by putting the stated corrections into their equation; and the safe
 * orders that follow.
 *
 * Nothing that found the proof is called, no eigenvalue is computed and no system of equations is solved.
 *
 * @throws GoodBasisError `wrong-problem` - operators on another number of kets, or with other names
 *
 * @example
 * ```ts no-check
 * import { ExactOperator, proveExactly, verifyProof } from "goodbasis";
 *
 * const h0 = ExactOperator.diagonal([0, 0, 2]);
 * const v = ExactOperator.from([[0, 0, "3/5"], [0, 0, "4/5"], ["3/5", "4/5", 0]]);
 * const problem = { h0, perturbations: [{ name: "V", operator: v }], candidates: [] };
 * console.log(verifyProof(proveExactly(problem), problem).passed); // true
 * ```
 */
export function verifyProof(proof: ExactProof, problem: ExactProblem): ProofCheck {
  const names = problem.candidates.map(({ name }) => name);
  const same = proof.audit.candidates.map(({ name }) => name).join("\n") === names.join("\n");
  if (proof.n !== problem.h0.n || !same) {
    const message =
      `verifyProof: the proof is about ${proof.n} kets and ${proof.audit.candidates.length} candidates, the problem about ` +
      `${problem.h0.n} and ${names.length}, or they have other names; give the problem that was proved`;
    throw new GoodBasisError("wrong-problem", message, { n: problem.h0.n, proof: proof.n });
  }
  const faults = new Faults();
  for (const { name, operator } of [{ name: "H0", operator: problem.h0 }, ...problem.perturbations]) {
    faults.unless(operator.equals(operator.adjoint()), name, "is not Hermitian");
  }
  verifyAudit(proof.audit, problem, faults);
  verifyVectors(proof, problem, faults);
  verifyTree(proof, faults);
  verifyLevels(proof, problem, faults);
  verifySecondOrder(proof, problem, faults);
  verifySafety(proof, problem, faults);
  return { passed: faults.list.length === 0, faults: faults.list };
}
