import { roundUp } from "../numerics/rounding.js";
import type { Certificate, CertifiedLevel, CertifiedNode } from "./certificate-format.js";
import type { OwnCandidate } from "./recheck-commutators.js";
import type { OwnResiduals } from "./recheck-labels.js";
import type { OwnLevel } from "./recheck-level.js";
import type { OwnProblem } from "./recheck-operators.js";
import type { Ledger } from "./recheck-report.js";

/** Eigenvalues of V or of the second-order operator are clustered to this fraction of their scale. */
const CLUSTER = 2 ** -35;

/** Everything that the nodes of one level are checked against. */
export interface NodeCase {
  readonly certificate: Certificate;
  readonly problem: OwnProblem;
  readonly candidates: readonly OwnCandidate[];
  readonly residuals: readonly OwnResiduals[];
  readonly level: CertifiedLevel;
  /** Place of the level, and of its first state. */
  readonly l: number;
  readonly first: number;
  readonly own: OwnLevel;
}

/** What the checked nodes of a level leave. */
export interface OwnCouplings {
  /** For each perturbation: the best own bound on every in-level element. */
  readonly bounds: readonly number[];
}

/** Checks the nodes of one level, the bounds that they carry, and what is summed up from them. */
export function checkNodes(ledger: Ledger, given: NodeCase): OwnCouplings {
  const { problem, level, l, own } = given;
  const bounds = own.perturbations.map((elements) => elements.withinLeaves);
  level.nodes.forEach((node, place) => {
    const path = `levels[${l}].nodes[${place}]`;
    checkValues(ledger, given, node, path);
    const residual = checkResidual(ledger, given, node, path);
    checkBounds(ledger, given, node, place, path, residual, bounds);
  });
  const where = `levels[${l}].couplings`;
  const named = ledger.claim(
    level.couplings.map((c) => c.perturbation).join("\n") === problem.perturbations.map((v) => v.name).join("\n"),
    where,
    () => `expected one entry for each of ${problem.perturbations.map((v) => v.name).join(", ")}, in their order`,
  );
  if (!named) return { bounds };
  level.couplings.forEach((claimed, p) => {
    const elements = own.perturbations[p];
    if (elements === undefined) return;
    const path = `${where}[${p}]`;
    const name = claimed.perturbation;
    const { least, loose, certain } = elements.offDiagonal;
    ledger.bound(
      `${path}.offDiagonal`,
      `the off-diagonal block of ${name}`,
      claimed.offDiagonal,
      least,
      loose + leak(given, p),
      certain,
    );
    const looseLeaf = elements.withinLeaves + elements.looseError;
    ledger.bound(
      `${path}.withinLeaves`,
      `${name} inside leaves of several states`,
      claimed.withinLeaves,
      elements.withinLeaves,
      looseLeaf,
      elements.withinLeavesCertain,
    );
    const largest = level.nodes.reduce(
      (most, node) => Math.max(most, node.couplings[p]?.counted ?? 0),
      claimed.withinLeaves,
    );
    ledger.near(
      `${path}.largest`,
      `the largest bound on ${name} that counts`,
      claimed.largest,
      largest,
      1e-12 * largest,
    );
  });
  return { bounds };
}

/** How much of one perturbation its commutators and the overlaps may leave between different labels. */
export function leak({ candidates, certificate, problem, level }: NodeCase, p: number): number {
  let sum = 0;
  candidates.forEach((candidate, place) => {
    if (candidate.role !== "conserved") return;
    const name = problem.candidates[place]?.name;
    const gaps = level.nodes.filter((node) => node.kind === "label" && node.operator === name).map((node) => node.gap);
    const gap = gaps.reduce((least, x) => Math.min(least, x), Number.POSITIVE_INFINITY);
    if (gap > 0 && gap < Number.POSITIVE_INFINITY) sum += (candidate.withPerturbations[p]?.frobeniusBound ?? 0) / gap;
  });
  return sum + certificate.whole.orthonormality * (problem.perturbations[p]?.norm ?? 0);
}

/** Operator, values and gap of a node; the values belong to the states below them. */
function checkValues(ledger: Ledger, given: NodeCase, node: CertifiedNode, path: string): void {
  const { problem, level, own, candidates } = given;
  const p = problem.perturbations.findIndex((v) => v.name === node.operator);
  const place = problem.candidates.findIndex((c) => c.name === node.operator);
  const known =
    node.kind === "label"
      ? place >= 0
      : node.kind === "perturbation"
        ? p >= 0
        : node.operator === (node.kind === "energy" ? "H0" : "W");
  ledger.claim(known, `${path}.operator`, () => `no ${node.kind} node is made by "${node.operator}" in this problem`);
  if (node.kind === "label" && place >= 0) {
    ledger.claim(
      candidates[place]?.role === "conserved",
      `${path}.operator`,
      () => `${node.operator} tells states apart as a label, but it is not conserved`,
    );
  }
  node.values.forEach(([re, im], child) => {
    for (const state of node.states[child] ?? []) {
      const at = `${path}.values[${child}]`;
      if (node.kind === "label") {
        const label = Object.hasOwn(level.states[state]?.labels ?? {}, node.operator)
          ? level.states[state]?.labels[node.operator]
          : undefined;
        const off = label === undefined ? Number.POSITIVE_INFINITY : Math.hypot(label.re - re, label.im - im);
        const norm = problem.candidates[place]?.norm ?? 0;
        ledger.claim(
          off <= 1e-15 * norm,
          at,
          () => `claimed ${re} + ${im}i, but state ${state} is labelled ${off} off that`,
        );
      } else if (node.kind === "perturbation" || node.kind === "energy") {
        const elements = node.kind === "energy" ? own.h0 : own.perturbations[p];
        const operator = node.kind === "energy" ? problem.h0 : problem.perturbations[p];
        const found = elements?.diagonal[state] ?? Number.NaN;
        const norm = operator?.norm ?? 0;
        const tolerance = CLUSTER * norm + (elements?.looseError ?? 0);
        ledger.claim(
          Math.hypot(found - re, im) <= tolerance,
          at,
          () => `${node.operator} is claimed to have the value ${re} in state ${state}, found ${found}`,
        );
      } else {
        ledger.claim(im === 0, at, () => `the second-order operator is Hermitian, yet its value is ${re} + ${im}i`);
      }
    }
  });
  const gap = smallestDistance(node.values);
  ledger.near(`${path}.gap`, "the smallest distance between its values", node.gap, gap, 1e-12 * gap);
}

function smallestDistance(values: readonly (readonly [number, number])[]): number {
  let gap = Number.POSITIVE_INFINITY;
  if (values.every(([, im]) => im === 0)) {
    const sorted = values.map(([re]) => re).sort((a, b) => a - b);
    for (let k = 1; k < sorted.length; k++) gap = Math.min(gap, (sorted[k] as number) - (sorted[k - 1] as number));
    return gap;
  }
  values.forEach(([a, b], k) => {
    for (const [c, d] of values.slice(0, k)) gap = Math.min(gap, Math.hypot(a - c, b - d));
  });
  return gap;
}

/** The residual of a label node; zero for others. Returns the own one. */
function checkResidual(ledger: Ledger, given: NodeCase, node: CertifiedNode, path: string): number {
  const { problem, residuals, first, candidates } = given;
  const place = problem.candidates.findIndex((candidate) => candidate.name === node.operator);
  const own = node.kind === "label" ? residuals[place] : undefined;
  const expected = own === undefined ? [] : (candidates[place]?.bounds ?? []);
  ledger.claim(
    node.commutators.length === expected.length && expected.every((bound, p) => bound === node.commutators[p]),
    `${path}.commutators`,
    () =>
      `claimed ${node.commutators.join(", ") || "none"}, the certificate's own bounds are ${expected.join(", ") || "none"}`,
  );
  if (own === undefined) {
    ledger.claim(node.residual === 0, `${path}.residual`, () => `claimed ${node.residual}; only labels leave one`);
    return 0;
  }
  let tight = 0;
  let loose = 0;
  let certain = 0;
  for (const state of node.states.flat()) {
    certain = Math.max(certain, own.certain[first + state] ?? 0);
    tight = Math.max(tight, own.tight[first + state] ?? 0);
    loose = Math.max(loose, own.loose[first + state] ?? 0);
  }
  ledger.bound(`${path}.residual`, `the largest residual of ${node.operator}`, node.residual, tight, loose, certain);
  ledger.claim(
    2 * tight < node.gap,
    `${path}.gap`,
    () => `its values are ${node.gap} apart, which residuals of ${tight} do not tell apart`,
  );
  return tight;
}

/**
 * |V_μν| ≤ ( ‖[A, V]‖ ‖q_μ‖‖q_ν‖ + (‖s_μ‖ + ‖r_ν‖) ‖V‖ ‖q‖ ) / |a_μ − a_ν| for a label A with residuals r and s.
 *
 * @param defect - ‖Q Q† − 1‖, from which ‖q‖² ≤ 1 + defect
 */
export function selectionRule(commutator: number, norm: number, residual: number, defect: number, gap: number): number {
  const length = Math.sqrt(1 + defect);
  return ((commutator * length + 2 * norm * residual) * length) / gap;
}

/** What a node says of each perturbation. */
function checkBounds(
  ledger: Ledger,
  given: NodeCase,
  node: CertifiedNode,
  place: number,
  path: string,
  residual: number,
  bounds: number[],
): void {
  const { problem, level, own, candidates } = given;
  const named = ledger.claim(
    node.couplings.map((c) => c.perturbation).join("\n") === problem.perturbations.map((v) => v.name).join("\n"),
    `${path}.couplings`,
    () => `expected one entry for each of ${problem.perturbations.map((v) => v.name).join(", ")}, in their order`,
  );
  if (!named) return;
  const candidate = candidates[problem.candidates.findIndex((c) => c.name === node.operator)];
  node.couplings.forEach((claimed, p) => {
    const elements = own.perturbations[p];
    const v = problem.perturbations[p];
    if (elements === undefined || v === undefined) return;
    const at = `${path}.couplings[${p}]`;
    const size = elements.atNode[place] as number;
    const tight = elements.atNodeBound[place] as number;
    const loose = Math.max(size, 0) + elements.looseError + elements.offDiagonal.loose + leak(given, p);
    const what = `${v.name} between the states that part here`;
    ledger.bound(`${at}.direct`, what, claimed.direct, tight, loose, elements.atNodeCertain[place] as number);
    const byLabel = node.kind === "label" && node.commutators[p] !== undefined;
    const expected = byLabel
      ? selectionRule(node.commutators[p] as number, v.norm, node.residual, level.orthonormality, node.gap)
      : null;
    ledger.claim(
      expected === null
        ? claimed.selectionRule === null
        : claimed.selectionRule !== null && Math.abs(claimed.selectionRule - expected) <= 1e-9 * expected,
      `${at}.selectionRule`,
      () => `claimed ${claimed.selectionRule}; commutator, residual and gap of this node give ${expected ?? "none"}`,
    );
    const counted = Math.min(claimed.selectionRule ?? Number.POSITIVE_INFINITY, claimed.direct);
    ledger.claim(
      claimed.counted === counted,
      `${at}.counted`,
      () => `claimed ${claimed.counted}; the smaller of the two bounds is ${counted}`,
    );
    ledger.claim(
      claimed.counted >= size - elements.error,
      `${at}.counted`,
      () => `${v.name} is claimed to be at most ${claimed.counted} between the states that part here, found ${size}`,
    );
    const commutator = candidate?.withPerturbations[p]?.bound;
    const ownRule =
      byLabel && commutator !== undefined
        ? roundUp(selectionRule(commutator, v.norm, residual, own.orthonormality.tight, node.gap), 32)
        : Number.POSITIVE_INFINITY;
    bounds[p] = Math.max(bounds[p] ?? 0, Math.min(ownRule, tight));
  });
}
