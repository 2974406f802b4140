import type { CertifiedNode, CertifiedState } from "./certificate-format.js";
import { type NodeCase, selectionRule } from "./recheck-nodes.js";
import type { Ledger } from "./recheck-report.js";
import { partingPlace } from "./recheck-tree.js";

type Safe = CertifiedState["safe"];

/** Shifts closer than this fraction of ‖V‖ do not tell two states apart, as the refinement states it. */
const SHIFT_WIDTH = 2 ** -36;

/** Checks how far the short formulas are said to be safe: state by state, and their minimum. */
export function checkSafeOrders(ledger: Ledger, given: NodeCase): void {
  const { level, l } = given;
  const blurred = level.nodes.map((node) => isBlurred(given, node));
  level.states.forEach((state, k) => {
    const allowed = safeOrders(given, blurred, k);
    const path = `levels[${l}].states[${k}]`;
    ledger.claim(
      allowed.some((safe) => state.safe.energies === safe.energies && state.safe.states === safe.states),
      `${path}.safe`,
      () =>
        `claimed safe through ${write(state.safe)}; its weakest separator allows ${allowed.map(write).join(" or ")}`,
    );
    ledger.claim(
      (state.limitedBy === "") === (state.safe.energies === "all" && state.safe.states === "all"),
      `${path}.limitedBy`,
      () => `"${state.limitedBy}" does not go with orders ${write(state.safe)}`,
    );
  });
  const least = level.states.reduce<Safe>(
    ({ energies, states }, { safe }) => ({
      energies: height(safe.energies) < height(energies) ? safe.energies : energies,
      states: height(safe.states) < height(states) ? safe.states : states,
    }),
    { energies: "all", states: "all" },
  );
  ledger.claim(
    level.safe.energies === least.energies && level.safe.states === least.states,
    `levels[${l}].safe`,
    () => `claimed safe through ${write(level.safe)}; its states allow ${write(least)}`,
  );
}

/** The weakest separator from any partner decides; two answers where the own evaluation cannot tell. */
function safeOrders(given: NodeCase, blurred: readonly boolean[], state: number): Safe[] {
  const { level, own, problem } = given;
  const { tree } = own;
  if ((tree.together[state] ?? 1) > 1) return [{ energies: 1, states: "none" }];
  const path = (tree.paths[state] ?? []).filter((_, at) => at % 2 === 0);
  if (path.some((place) => blurred[place] === true)) return [{ energies: 1, states: "none" }];
  const kinds = path.flatMap((place) => level.nodes[place]?.kind ?? []);
  if (kinds.includes("perturbation")) {
    const margin = problem.perturbations.length > 1 ? smallestMargin(given, state) : 1;
    const answers: Safe[] = [];
    if (margin > -MARGIN_ERROR) answers.push({ energies: 2, states: 0 });
    if (margin < MARGIN_ERROR) answers.push({ energies: 1, states: 0 });
    return answers;
  }
  if (kinds.includes("second order")) return [{ energies: 3, states: 0 }];
  return [{ energies: "all", states: "all" }];
}

/** Error of a margin in units of the limit: the limit itself rests on bounds that differ from evaluation to evaluation. */
const MARGIN_ERROR = 0.5;

/**
 * With several perturbations, each alone must tell a state from every partner that perturbations part it from: by how much the
 * smallest difference of shifts exceeds the limit below which shifts count as equal, in units of that limit.
 */
function smallestMargin({ level, own, problem }: NodeCase, state: number): number {
  let least = Number.POSITIVE_INFINITY;
  for (let other = 0; other < level.states.length; other++) {
    if (other === state) continue;
    const node = partingPlace(own.tree, state, other);
    if (level.nodes[node]?.kind !== "perturbation") continue;
    problem.perturbations.forEach(({ operator }, p) => {
      const elements = own.perturbations[p];
      if (elements === undefined) return;
      const difference = Math.abs((elements.diagonal[state] ?? 0) - (elements.diagonal[other] ?? 0));
      const limit = SHIFT_WIDTH * operator.norm + 2 * elements.error;
      // without V there is no limit, and no difference either
      least = Math.min(least, limit === 0 ? -1 : difference / limit - 1);
    });
  }
  return least;
}

/** Whether a label is conserved too loosely for its gap to count at every order, for H0 or for a perturbation. */
function isBlurred({ certificate, problem, candidates, level }: NodeCase, node: CertifiedNode): boolean {
  const candidate = candidates[problem.candidates.findIndex((c) => c.name === node.operator)];
  if (node.kind !== "label" || candidate === undefined) return false;
  const { resolution } = certificate;
  const energyRule = selectionRule(
    candidate.boundWithH0,
    problem.h0.norm,
    node.residual,
    level.orthonormality,
    node.gap,
  );
  if (energyRule > resolution * problem.h0.scale) return true;
  return node.couplings.some(
    (coupling, p) =>
      (coupling.selectionRule ?? Number.POSITIVE_INFINITY) > resolution * (problem.perturbations[p]?.scale ?? 0),
  );
}

function height(order: Safe["energies"] | Safe["states"]): number {
  return order === "all" ? Number.POSITIVE_INFINITY : order === "none" ? -1 : order;
}

function write(safe: Safe): string {
  return `${safe.energies} (energies) and ${safe.states} (states)`;
}
