import type { NodeEvidence } from "./couplings.js";
import type { LevelState } from "./level-states.js";

/**
 * Through which order the short non-degenerate formulas give the right number for a state.
 *
 * `"all"` means every order; `"none"` that the zeroth-order state itself is not settled.
 */
export interface SafeOrders {
  /** Highest order of the energies. */
  readonly energies: number | "all";
  /** Highest order of the states. */
  readonly states: number | "all" | "none";
}

/** The weakest link between a state and a partner in its level, and what it allows. */
export interface SafetyFinding {
  readonly safe: SafeOrders;
  /** What limits the orders, in words; empty where nothing does. */
  readonly limitedBy: string;
}

/**
 * The safe orders of a state: the minimum over its partners in the level.
 *
 * | weakest link to a partner | energies | states |
 * |---|---|---|
 * | a conserved label | all | all |
 * | V: different E1 | 2 | 0 |
 * | the effective operator of order s | s + 1 | 0 |
 * | nothing studied, or a label whose commutator bound over its gap exceeds the resolution | 1 | none |
 *
 * Two states that only V tells apart are mixed by W at first order already, c_μ = W_μν/(E1_ν − E1_μ), which adds
 * |W_μν|²/(E1_ν − E1_μ) to the third order: the short formulas miss both.
 *
 * With several perturbations the second order of a pair that only they tell apart exists along each ray of the λ's on which its
 * first-order shifts differ. It is called safe where every perturbation alone tells the pair apart, so that each may be switched
 * off; a ray on which the differences cancel is still excluded, and said to be.
 *
 * @param evidence - the nodes at which states of this level part company
 * @param several - whether several perturbations are studied together
 * @param eachParts - whether every perturbation alone tells the state from all its partners that perturbations tell apart
 */
export function safeOrders(
  state: LevelState,
  evidence: ReadonlyMap<number, NodeEvidence>,
  several: boolean,
  eachParts: () => boolean,
): SafetyFinding {
  if (state.together > 1) {
    const others = state.together === 2 ? "another state" : `${state.together - 1} other states`;
    return {
      safe: { energies: 1, states: "none" },
      limitedBy: `nothing studied tells it from ${others} of its level`,
    };
  }
  const onPath = state.path.flatMap((step) => evidence.get(step.node) ?? []);
  const blurred = onPath.find((node) => !node.sharp);
  if (blurred !== undefined) {
    return {
      safe: { energies: 1, states: "none" },
      limitedBy:
        `${blurred.operator} tells it from a partner by only ${blurred.gap.toPrecision(3)}, too little for how sharply it is ` +
        "known to be conserved",
    };
  }
  const v = onPath.find((node) => node.kind === "perturbation");
  if (v !== undefined && several) {
    const ray = "along a ray of the λ's on which the first-order shifts differ";
    return eachParts()
      ? {
          safe: { energies: 2, states: 0 },
          limitedBy: `only the perturbations tell it from a partner with the same labels; the second order holds ${ray}`,
        }
      : {
          safe: { energies: 1, states: 0 },
          limitedBy: `not every perturbation alone tells it from its partners; a second order exists only ${ray}`,
        };
  }
  if (v !== undefined) {
    return {
      safe: { energies: 2, states: 0 },
      limitedBy: `only ${v.operator} tells it from a partner with the same labels`,
    };
  }
  if (onPath.some((node) => node.kind === "second order")) {
    return {
      safe: { energies: 3, states: 0 },
      limitedBy: "only the second-order operator tells it from a partner with the same labels",
    };
  }
  return { safe: { energies: "all", states: "all" }, limitedBy: "" };
}

/** The smaller of two safe orders, part by part. */
export function weaker(a: SafeOrders, b: SafeOrders): SafeOrders {
  return { energies: lower(a.energies, b.energies), states: lower(a.states, b.states) };
}

function lower<T extends number | "all" | "none">(a: T, b: T): T {
  const height = (x: T): number => (x === "all" ? Number.POSITIVE_INFINITY : x === "none" ? -1 : Number(x));
  return height(a) <= height(b) ? a : b;
}
