import type { LabelDeclaration } from "../audit/label-family.js";
import { GoodBasisError } from "../errors.js";
import type { ExactOperator } from "../exact/operator.js";

/** A perturbation by name, exactly. */
export interface ExactPerturbation {
  /** As its shifts are called. */
  readonly name: string;
  /** Hermitian. */
  readonly operator: ExactOperator;
}

/** A candidate conserved operator, exactly. */
export interface ExactCandidate {
  /** As its label is called. */
  readonly name: string;
  /** Hermitian, unitary or any other normal matrix. */
  readonly operator: ExactOperator;
  /** The family of its labels; recognised from the exact eigenvalues where none is declared. */
  readonly label?: LabelDeclaration | undefined;
  /** An operator that raises the label by one step; it fixes the relative phases inside a multiplet. */
  readonly ladder?: ExactOperator | undefined;
}

/** H(λ) = H0 + λ V and its candidates in exact numbers; all operators act on the same kets. */
export interface ExactProblem {
  /** Hermitian. */
  readonly h0: ExactOperator;
  readonly perturbations: readonly ExactPerturbation[];
  /** In the order of refinement: those that commute with one another first. */
  readonly candidates: readonly ExactCandidate[];
}

/**
 * Checks that the operators fit together and that H0 and the perturbations are Hermitian, exactly.
 *
 * @throws GoodBasisError `shape`, `not-hermitian`, `name`
 */
export function requireProblem(where: string, problem: ExactProblem): void {
  const { n } = problem.h0;
  const hermitian = [{ name: "H0", operator: problem.h0 }, ...problem.perturbations];
  const seen = new Set<string>();
  for (const { name, operator } of [...hermitian, ...problem.candidates]) {
    if (operator.n !== n) {
      const message = `${where}: ${name} acts on ${operator.n} kets but H0 on ${n}; give all over the same kets`;
      throw new GoodBasisError("shape", message, { operator: name, n: operator.n, expected: n });
    }
    if (seen.has(name)) {
      throw new GoodBasisError("name", `${where}: two operators are called "${name}"; rename one`, { name });
    }
    seen.add(name);
  }
  for (const { name, operator } of hermitian) {
    if (operator.isHermitian) continue;
    const [element] = operator.minus(operator.adjoint()).elements();
    const where0 = element === undefined ? "" : ` at row ${element.row}, column ${element.col}`;
    const message = `${where}: ${name} is not Hermitian${where0}; correct the matrix`;
    throw new GoodBasisError("not-hermitian", message, { operator: name, row: element?.row, column: element?.col });
  }
}
