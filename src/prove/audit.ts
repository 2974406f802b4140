import type { ExactBudget } from "../exact/budget.js";
import { type ExactElement, ExactOperator } from "../exact/operator.js";
import type { ExactProblem } from "./problem.js";
import type { ExactAudit, ExactCandidateFinding, ExactCommutator } from "./proof.js";

/** Elements that are listed of one commutator. */
const MOST_LISTED = 1000;

/** Powers that are tried in the search for A^N = 1. */
const MOST_POWERS = 64;

/** Products of numbers that this search may cost. */
const MOST_WORK = 1_000_000;

/**
 * Decides every commutator exactly: zero, or the list of what is not.
 *
 * @throws GoodBasisError `budget`, `shape`
 *
 * @example
 * ```ts no-check
 * import { exactAudit, ExactOperator } from "goodbasis";
 *
 * const h0 = ExactOperator.diagonal([0, 0, 1]);
 * const v = ExactOperator.from([[0, 0, 1], [0, 0, 1], [1, 1, 0]]);
 * const candidates = [{ name: "swap", operator: ExactOperator.permutation([1, 0, 2]) }];
 * const audit = exactAudit({ h0, perturbations: [{ name: "V", operator: v }], candidates });
 * console.log(audit.candidates[0]?.conserved, audit.candidates[0]?.order); // true 2
 * ```
 */
export function exactAudit(problem: ExactProblem, budget?: ExactBudget): ExactAudit {
  const candidates = problem.candidates.map(({ name, operator }): ExactCandidateFinding => {
    const kind = kindOf(operator, budget);
    const withH0 = commutator(name, operator, "H0", problem.h0, budget);
    const withPerturbations = problem.perturbations.map((v) => commutator(name, operator, v.name, v.operator, budget));
    const byAll = withPerturbations.every(({ vanishes }) => vanishes);
    return {
      name,
      kind,
      conserved: kind !== "general" && withH0.vanishes && byAll,
      descriptive: kind !== "general" && withH0.vanishes && !byAll,
      withH0,
      withPerturbations,
      order: orderOf(operator, kind, budget),
    };
  });
  const conserved = problem.candidates.filter((_, k) => candidates[k]?.conserved);
  const pairs = conserved.flatMap((a, k) =>
    conserved.slice(k + 1).map((b) => commutator(a.name, a.operator, b.name, b.operator, budget)),
  );
  return { candidates, pairs };
}

function kindOf(operator: ExactOperator, budget: ExactBudget | undefined): ExactCandidateFinding["kind"] {
  if (operator.isHermitian) return "hermitian";
  const adjoint = operator.adjoint();
  const product = operator.times(adjoint, budget);
  if (product.equals(ExactOperator.identity(operator.n))) return "unitary";
  return product.equals(adjoint.times(operator, budget)) ? "normal" : "general";
}

function commutator(
  left: string,
  a: ExactOperator,
  right: string,
  b: ExactOperator,
  budget: ExactBudget | undefined,
): ExactCommutator {
  const difference = a.commutator(b, budget);
  return { left, right, vanishes: difference.isZero, count: difference.count, elements: largestFirst(difference) };
}

function largestFirst(operator: ExactOperator): ExactElement[] {
  const list = [...operator.elements()].map((element) => {
    const square = element.value.squaredModulus();
    return { element, square, size: square.toNumber() };
  });
  // equal doubles are decided exactly, and equal moduli by their place
  list.sort((x, y) => y.size - x.size || y.square.compare(x.square));
  return list.slice(0, MOST_LISTED).map(({ element }) => element);
}

/** The least N with A^N = 1, where it is small. */
function orderOf(
  operator: ExactOperator,
  kind: ExactCandidateFinding["kind"],
  budget: ExactBudget | undefined,
): number | undefined {
  if (kind === "normal" || kind === "general") return undefined;
  const one = ExactOperator.identity(operator.n);
  // real eigenvalues are roots of unity only where they are ±1
  const most = kind === "hermitian" ? 2 : MOST_POWERS;
  let power = operator;
  for (let [k, work] = [1, 0]; k <= most && work <= MOST_WORK; k++) {
    if (power.equals(one)) return k;
    work += (power.count * operator.count) / operator.n;
    power = power.times(operator, budget);
  }
  return undefined;
}
