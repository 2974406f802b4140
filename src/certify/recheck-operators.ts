import type { PreparedProblem } from "../audit/problem.js";
import { gamma, roundUp } from "../numerics/rounding.js";
import type { Operator } from "../operator/operator.js";
import { adjointColumnsOf, type Columns, columnsOf } from "./recheck-vectors.js";

/** An operator of the problem as the re-check multiplies with it. */
export interface OwnOperator {
  readonly name: string;
  readonly operator: Operator;
  readonly columns: Columns;
  /** Columns of A†; undefined where A is Hermitian. */
  readonly adjoint: Columns | undefined;
  /** What couplings are measured against: see {@link couplingScale}. */
  readonly scale: number;
  /** Upper bound on ‖A‖₂, entry uncertainties included. */
  readonly norm: number;
  /**
   * Bound on the rounding of an image A q (or A†q) of a unit vector: √2 γ_{m+4} ‖|A|‖₂, m the longest sum (complex products,
   * Higham, Accuracy and Stability of Numerical Algorithms, ch. 3).
   */
  readonly rounding: number;
  /** The same with the longest sum that n kets allow. */
  readonly looseRounding: number;
}

/** All operators of a problem. */
export interface OwnProblem {
  readonly n: number;
  readonly h0: OwnOperator;
  readonly perturbations: readonly OwnOperator[];
  readonly candidates: readonly OwnOperator[];
}

/** Prepares the operators of a problem for the re-check. */
export function ownProblem(problem: PreparedProblem): OwnProblem {
  return {
    n: problem.n,
    h0: ownOperator("H0", problem.h0, true),
    perturbations: problem.perturbations.map(({ name, operator }) => ownOperator(name, operator, true)),
    candidates: problem.candidates.map(({ name, operator, kind }) => ownOperator(name, operator, kind === "hermitian")),
  };
}

function ownOperator(name: string, operator: Operator, hermitian: boolean): OwnOperator {
  const columns = columnsOf(operator.csr);
  const adjoint = hermitian ? undefined : adjointColumnsOf(operator.csr);
  const longest = Math.max(columns.longest, adjoint?.longest ?? 0);
  const scale = Math.SQRT2 * operator.norm * 1.001;
  return {
    name,
    operator,
    columns,
    adjoint,
    scale: couplingScale(operator),
    norm: roundUp(operator.norm + operator.error),
    rounding: roundUp(scale * gamma(longest + 4)),
    looseRounding: roundUp(scale * gamma(operator.n + 4)),
  };
}

/** A lower bound on ‖A − tr A/n‖, at least 2^−13 of one on ‖A‖; that one where A may be nothing but a multiple of 1. */
function couplingScale({ n, norm, variation, normAtLeast }: Operator): number {
  if (variation <= 8 * n * 2 ** -53 * norm) return normAtLeast;
  return Math.max(variation, normAtLeast * 2 ** -13);
}

/** √2 γ_{m+4}: the relative rounding error of a complex product of m terms. */
export function productRounding(terms: number): number {
  return Math.SQRT2 * gamma(terms + 4) * 1.001;
}
