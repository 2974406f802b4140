import type { CertifiedNode, CertifiedState } from "./certificate-format.js";
import { type NodeCase, selectionRule } from "./recheck-nodes.js";
import type { Ledger } from "./recheck-report.js";

type Safe = CertifiedState["safe"];

/** Checks how far the short formulas are said to be safe: state by state, and their minimum. */
export function checkSafeOrders(ledger: Ledger, given: NodeCase): void {
  const { level, l } = given;
  const blurred = level.nodes.map((node) => isBlurred(given, node));
  const found = level.states.map((state, k): Safe => {
    const safe = safeOrders(given, blurred, k);
    const path = `levels[${l}].states[${k}]`;
    ledger.claim(
      state.safe.energies === safe.energies && state.safe.states === safe.states,
      `${path}.safe`,
      () => `claimed safe through ${write(state.safe)}; its weakest separator allows ${write(safe)}`,
    );
    ledger.claim(
      (state.limitedBy === "") === (safe.energies === "all" && safe.states === "all"),
      `${path}.limitedBy`,
      () => `"${state.limitedBy}" does not go with orders ${write(safe)}`,
    );
    return safe;
  });
  const least = found.reduce<Safe>((a, b) => (height(b) < height(a) ? b : a), { energies: "all", states: "all" });
  ledger.claim(
    level.safe.energies === least.energies && level.safe.states === least.states,
    `levels[${l}].safe`,
    () => `claimed safe through ${write(level.safe)}; its states allow ${write(least)}`,
  );
}

/** The weakest separator from any partner decides. */
function safeOrders({ level, own }: NodeCase, blurred: readonly boolean[], state: number): Safe {
  const { tree } = own;
  if ((tree.together[state] ?? 1) > 1) return { energies: 1, states: "none" };
  const path = (tree.paths[state] ?? []).filter((_, at) => at % 2 === 0);
  if (path.some((place) => blurred[place] === true)) return { energies: 1, states: "none" };
  const kinds = path.flatMap((place) => level.nodes[place]?.kind ?? []);
  if (kinds.includes("perturbation")) return { energies: 2, states: 0 };
  if (kinds.includes("second order")) return { energies: 3, states: 0 };
  return { energies: "all", states: "all" };
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
  if (energyRule > resolution * problem.h0.operator.norm) return true;
  return node.couplings.some(
    (coupling, p) =>
      (coupling.selectionRule ?? Number.POSITIVE_INFINITY) >
      resolution * (problem.perturbations[p]?.operator.norm ?? 0),
  );
}

/** In the table both columns fall together, so the energies' order ranks a pair. */
function height(safe: Safe): number {
  return safe.energies === "all" ? Number.POSITIVE_INFINITY : safe.energies;
}

function write(safe: Safe): string {
  return `${safe.energies} (energies) and ${safe.states} (states)`;
}
