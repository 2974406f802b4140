import type { PathStep } from "../refine/tree.js";
import type { BlockValue, LeafKind, ProofNode, ProvedSafety } from "./proof.js";

/** What safety needs to know of a leaf. */
export interface SafetySubject {
  readonly path: readonly PathStep[];
  readonly kind: LeafKind;
  readonly shifts: readonly { readonly value: BlockValue }[];
  /** Whether it has a second order: the second-order operator is a number on it. */
  readonly hasSecond: boolean;
}

const ALL: ProvedSafety = { energies: "all", states: "all", limitedBy: "" };

/**
 * The safe orders of a leaf's states: the minimum over their partners in the level, by the strongest exact separator of
 * each pair, which is the node where their paths part.
 *
 * | weakest link | energies | states |
 * |---|---|---|
 * | a conserved label, exact | all | all |
 * | V: different E1 | 2 | 0 |
 * | the second-order operator | 3 | 0 |
 * | nothing | 1, or 2 where W is a number on the leaf | none |
 *
 * @param level - the other leaves of the level
 */
export function safetyOf(
  own: SafetySubject,
  level: readonly SafetySubject[],
  nodes: readonly ProofNode[],
  perturbations: number,
): ProvedSafety {
  if (own.kind === "together") {
    const energies = own.hasSecond && perturbations === 1 ? 2 : 1;
    return { energies, states: "none", limitedBy: "nothing exact tells it from another state of its level" };
  }
  const parting = level.flatMap((other) => {
    const node = other === own ? undefined : partingNode(own.path, other.path);
    return node === undefined ? [] : [{ other, node: nodes[node] as ProofNode }];
  });
  if (parting.some(({ node }) => node.kind === "label" && node.status === "bounded")) {
    return { energies: 1, states: "none", limitedBy: "the budget left a label unknown that tells it from a partner" };
  }
  const byV = parting.filter(({ node }) => node.kind === "perturbation");
  const [first] = byV;
  if (first !== undefined) {
    if (perturbations === 1) {
      return {
        energies: 2,
        states: 0,
        limitedBy: `only ${first.node.operator} tells it from a partner with the same labels`,
      };
    }
    const ray = "along a ray of the λ's on which the first-order shifts differ";
    return byV.every(({ other }) => own.shifts.every(({ value }, p) => differ(value, other.shifts[p]?.value)))
      ? {
          energies: 2,
          states: 0,
          limitedBy: `only the perturbations tell it from a partner with the same labels; the second order holds ${ray}`,
        }
      : {
          energies: 1,
          states: 0,
          limitedBy: `not every perturbation alone tells it from its partners; a second order exists only ${ray}`,
        };
  }
  if (own.kind === "shifted") {
    return { energies: 2, states: 0, limitedBy: "only the perturbation tells it from a partner with the same labels" };
  }
  if (parting.some(({ node }) => node.kind === "second order")) {
    return {
      energies: 3,
      states: 0,
      limitedBy: "only the second-order operator tells it from a partner with the same labels",
    };
  }
  return ALL;
}

function differ(a: BlockValue, b: BlockValue | undefined): boolean {
  return a.kind === "value" && b?.kind === "value" && !a.value.equals(b.value);
}

/** The node at which two paths part; undefined where one is the other's beginning. */
function partingNode(a: readonly PathStep[], b: readonly PathStep[]): number | undefined {
  for (const [k, step] of a.entries()) {
    const other = b[k];
    if (other === undefined || other.node !== step.node) return undefined;
    if (other.child !== step.child) return step.node;
  }
  return undefined;
}
