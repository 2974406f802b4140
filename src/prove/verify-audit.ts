import { ExactOperator } from "../exact/operator.js";
import type { Surd } from "../exact/surd.js";
import type { ExactProblem } from "./problem.js";
import type { ExactAudit, ExactCandidateFinding, ExactCommutator } from "./proof.js";
import type { Faults } from "./verify-faults.js";

/** Forms every commutator again as A B − B A and compares it with what is stated, element by element. */
export function verifyAudit(audit: ExactAudit, problem: ExactProblem, faults: Faults): void {
  const operators = new Map(
    [{ name: "H0", operator: problem.h0 }, ...problem.perturbations, ...problem.candidates].map(
      ({ name, operator }) => [name, operator] as const,
    ),
  );
  for (const [k, finding] of audit.candidates.entries()) {
    const operator = problem.candidates[k]?.operator ?? ExactOperator.identity(problem.h0.n);
    verifyKind(finding, operator, faults);
    const all = [finding.withH0, ...finding.withPerturbations];
    const names = ["H0", ...problem.perturbations.map(({ name }) => name)];
    const complete =
      all.length === names.length && all.every((c, p) => c.left === finding.name && c.right === names[p]);
    faults.unless(complete, finding.name, "not every commutator is stated");
    for (const commutator of all) verifyCommutator(commutator, operators, faults);
    const [withH0, ...others] = all.map(({ vanishes }) => vanishes);
    const normal = finding.kind !== "general";
    const conserved = normal && withH0 === true && others.every((vanishes) => vanishes);
    const descriptive = normal && withH0 === true && !conserved;
    const right = finding.conserved === conserved && finding.descriptive === descriptive;
    faults.unless(right, finding.name, "what is said of its conservation does not follow from the commutators");
  }
  const conserved = audit.candidates.filter((finding) => finding.conserved).map(({ name }) => name);
  const wanted = conserved.flatMap((a, k) => conserved.slice(k + 1).map((b) => `[${a}, ${b}]`));
  const stated = audit.pairs.map(({ left, right }) => `[${left}, ${right}]`);
  faults.unless(wanted.join() === stated.join(), "pairs", "not every pair of conserved candidates is stated");
  for (const commutator of audit.pairs) verifyCommutator(commutator, operators, faults);
}

function verifyKind({ name, kind, order }: ExactCandidateFinding, operator: ExactOperator, faults: Faults): void {
  const adjoint = operator.adjoint();
  const one = ExactOperator.identity(operator.n);
  const right = operator.times(adjoint);
  const holds = {
    hermitian: () => operator.equals(adjoint),
    unitary: () => right.equals(one),
    normal: () => right.equals(adjoint.times(operator)),
    general: () => true,
  }[kind]();
  faults.unless(holds, name, `is not ${kind}`);
  if (order !== undefined) faults.unless(operator.power(order).equals(one), name, `its power ${order} is not 1`);
}

function verifyCommutator(
  { left, right, vanishes, count, elements }: ExactCommutator,
  operators: ReadonlyMap<string, ExactOperator>,
  faults: Faults,
): void {
  const place = `[${left}, ${right}]`;
  const [a, b] = [operators.get(left), operators.get(right)];
  if (a === undefined || b === undefined) {
    faults.unless(false, place, "there is no such operator");
    return;
  }
  const difference = a.times(b).minus(b.times(a));
  faults.unless(difference.isZero === vanishes, place, vanishes ? "does not vanish" : "vanishes");
  faults.unless(difference.count === count, place, `has ${difference.count} elements, not ${count}`);
  const entries = elements.every(({ row, col, value }) => difference.entry(row, col).equals(value));
  faults.unless(entries, place, "an element is not as stated");
  const places = new Set(elements.map(({ row, col }) => `${row} ${col}`));
  faults.unless(places.size === elements.length, place, "an element is stated twice");
  let before: Surd | undefined;
  for (const { value } of elements) {
    const square = value.squaredModulus();
    if (!faults.unless(before === undefined || square.compare(before) <= 0, place, "is not listed largest first"))
      break;
    before = square;
  }
  if (elements.length < count && before !== undefined) {
    const least = before;
    const larger = [...difference.elements()].filter(({ value }) => value.squaredModulus().compare(least) > 0);
    faults.unless(larger.length <= elements.length, place, "larger elements are left out");
  } else faults.unless(elements.length === count, place, "elements are left out");
}
