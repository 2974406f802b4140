import { type GoodBasis, requireCertified } from "../certify/good-basis.js";
import { requireOptions } from "../certify/options.js";
import type { BasisState, StateVector } from "../certify/outcome.js";
import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Bounded } from "./bounded.js";
import { type LevelSecondOrder, levelSecondOrder } from "./second-order.js";

/** Options of {@link perturb}. */
export interface PerturbOptions {
  /** Energies through this order: 0, 1 or 2. Default 2. */
  readonly order?: number;
  /** States through this order: 0 or 1. Default 0. */
  readonly states?: number;
  /** Indices of the states wanted, as in `basis.states`; default all. */
  readonly select?: readonly number[];
}

/**
 * One state's share of the series E(λ) = E0 + Σ_p λ_p E1_p + Σ_pq λ_p λ_q E2_pq, in the problem's unit.
 */
export interface PerturbedState {
  /** Index of the state in `basis.states`. */
  readonly index: number;
  /** Its unperturbed energy. */
  readonly zeroth: Bounded;
  /** E1 for each perturbation; undefined below order 1. */
  readonly first: readonly Bounded[] | undefined;
  /** E2_pq, symmetric in the perturbations p and q; undefined below order 2. */
  readonly second: readonly (readonly Bounded[])[] | undefined;
  /**
   * For each perturbation, the first-order change of the state Σ_k |k⟩⟨k|V|μ⟩/(E0 − E_k), k outside the level, over the
   * caller's kets; undefined unless states were asked for.
   */
  readonly correction: readonly StateVector[] | undefined;
}

/** What {@link perturb} returns. */
export interface Perturbation {
  /** Unit of all energies. */
  readonly unit: string;
  /** Names of the perturbations. */
  readonly perturbations: readonly string[];
  /** In the order of `select`. */
  readonly states: readonly PerturbedState[];
}

/**
 * Energies and states by the short Rayleigh–Schrödinger formulas, only for a basis proved good and only through the orders
 * its certificate calls safe.
 *
 * E1 = ⟨μ|V|μ⟩, E2 = Σ_k |⟨k|V|μ⟩|²/(E0 − E_k), |1⟩ = Σ_k |k⟩⟨k|V|μ⟩/(E0 − E_k), k outside the level of μ
 * (Messiah, Quantum Mechanics II, ch. XVI). Each bound on E1 holds for the given
 * matrices within their stated uncertainty; one on E2 for the nearby model (`study.whole.nearby`) in which V does not couple
 * different labels and is a number on every block that only the second order tells apart.
 *
 * @param basis - `outcome.basis` of a good outcome
 * @throws GoodBasisError `not-certified` for any other object, `unsafe-order` where a state asked for is not safe at that
 *   order, `option` for an order or index out of range
 *
 * @example
 * ```ts
 * import { findGoodBasis, perturb } from "goodbasis";
 *
 * const outcome = findGoodBasis({
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] } },
 * });
 * if (outcome.verdict === "good") {
 *   const { states } = perturb(outcome.basis, { order: 2 });
 *   console.log(states.map((state) => state.second?.[0]?.[0]?.value)); // [ 0, -1, 1 ]
 * }
 * ```
 */
export function perturb<K extends string>(basis: GoodBasis<K>, options: PerturbOptions = {}): Perturbation {
  const internals = requireCertified("perturb", basis);
  requireOptions("perturb", options, ["order", "states", "select"]);
  const order = checkOrder("order", options.order ?? 2, 2);
  const stateOrder = checkOrder("states", options.states ?? 0, 1);
  const { study } = basis;
  const select = options.select ?? study.states.map((_, index) => index);
  if (!Array.isArray(select)) {
    throw new GoodBasisError("option", `perturb: select is ${shown(select)}; give a list of state indices`, {
      select,
    });
  }
  const chosen = select.map((index: number) => pick(study.states, index));
  requireSafe(chosen, order, stateOrder, study.states.length);
  const byLevel = new Map<number, LevelSecondOrder>();
  const level = (place: number): LevelSecondOrder => {
    let found = byLevel.get(place);
    if (found === undefined) {
      found = levelSecondOrder(study, internals, place);
      byLevel.set(place, found);
    }
    return found;
  };
  return {
    unit: study.unit,
    perturbations: study.perturbations,
    states: chosen.map((state): PerturbedState => {
      const own = state.index - (study.levels[state.level]?.firstState ?? 0);
      return {
        index: state.index,
        zeroth: { value: state.energy, plusMinus: state.energyPlusMinus },
        first: order < 1 ? undefined : state.shifts.map(({ value, plusMinus }) => ({ value, plusMinus })),
        second: order < 2 ? undefined : level(state.level).energies(own),
        correction: stateOrder < 1 ? undefined : level(state.level).corrections(own),
      };
    }),
  };
}

function checkOrder(name: string, order: number, highest: number): number {
  if (Number.isInteger(order) && order >= 0 && order <= highest) return order;
  throw new GoodBasisError(
    "option",
    `perturb: ${name} is ${shown(order)}; the short formulas are given through order ${highest}: ask for 0 to ${highest}`,
    { [name]: order },
  );
}

function pick<K extends string>(states: readonly BasisState<K>[], index: number): BasisState<K> {
  const state = typeof index === "number" ? states[index] : undefined;
  if (state !== undefined) return state;
  throw new GoodBasisError(
    "option",
    `perturb: there is no state ${shown(index)}; states run from 0 to ${states.length - 1}`,
    {
      index,
    },
  );
}

function requireSafe(chosen: readonly BasisState[], order: number, stateOrder: number, all: number): void {
  const unsafe = chosen.filter(({ safe }) => !allows(safe.energies, order) || !allows(safe.states, stateOrder));
  const first = unsafe[0];
  if (first === undefined) return;
  const energies = !allows(first.safe.energies, order);
  const what = energies ? `energies through order ${order}` : `states through order ${stateOrder}`;
  const limit = energies ? first.safe.energies : first.safe.states;
  throw new GoodBasisError(
    "unsafe-order",
    `${what} are not safe for ${unsafe.length} of ${chosen.length} states asked for (first: state ${first.index}, safe ` +
      `through ${limit === "none" ? "no order" : `order ${limit}`}: ${first.limitedBy}). Add a conserved candidate that ` +
      `tells these states apart, lower the order, or pass select without them` +
      `${all === unsafe.length ? "" : " (state.safe tells which)"}`,
    { states: unsafe.map((state) => state.index), order, stateOrder },
  );
}

function allows(safe: number | "all" | "none", order: number): boolean {
  if (safe === "all") return true;
  // a state that is not settled at zeroth order still may be handed out as it is
  if (safe === "none") return order === 0;
  return order <= safe;
}
