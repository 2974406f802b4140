import { GoodBasisError } from "../errors.js";
import { requireOptions, shown } from "../misuse.js";
import { bitLength } from "./integer.js";
import type { Terms } from "./terms.js";

/** How far an exact computation may grow before it stops with a typed error. */
export interface ExactBudget {
  /** Decimal digits of the longest whole number inside a coefficient; 20,000 unless stated. */
  readonly digits?: number | undefined;
  /** Different square roots inside one number, 1 among them; 256 unless stated. */
  readonly roots?: number | undefined;
  /**
   * Steps in one call: one for a product of machine integers, twenty for one of other exact numbers; 500 million unless
   * stated.
   */
  readonly steps?: number | undefined;
}

/** The budget of a caller who states none. */
const DEFAULT_BUDGET: Readonly<Required<{ [K in keyof ExactBudget]: number }>> = {
  digits: 20_000,
  roots: 256,
  steps: 500_000_000,
};

/** What a product of two exact numbers counts for; one with many roots or digits costs more, and is weighed apart. */
const STEPS_PER_PRODUCT = 20;

const DIGITS_PER_BIT = Math.log10(2);

/** Watches one computation; every count is deterministic, none is a time. */
export class Meter {
  readonly #where: string;
  readonly #bits: number;
  readonly #roots: number;
  readonly #steps: number;
  #spent = 0;

  /**
   * @param where - the function that computes, for messages
   * @throws GoodBasisError `option` - a limit that is not a positive number
   */
  constructor(where: string, budget: ExactBudget = {}) {
    requireOptions(where, budget, ["digits", "roots", "steps"]);
    this.#where = where;
    this.#bits = limit(where, "digits", budget) / DIGITS_PER_BIT;
    this.#roots = limit(where, "roots", budget);
    this.#steps = limit(where, "steps", budget);
  }

  /**
   * Counts products of machine integers.
   *
   * @throws GoodBasisError `budget`
   */
  spend(steps: number): void {
    this.#spent += steps;
    if (this.#spent > this.#steps) this.#stop("steps", `more than ${this.#steps} steps`, this.#steps);
  }

  /**
   * Counts products of exact numbers.
   *
   * @throws GoodBasisError `budget`
   */
  spendProducts(count: number): void {
    this.spend(STEPS_PER_PRODUCT * count);
  }

  /**
   * Looks at the size of a number; one whose numbers are all safe integers needs no look.
   *
   * @param terms - the number in its general form, undefined for a small one
   * @throws GoodBasisError `budget`
   */
  weigh(terms: Terms | undefined): void {
    if (terms === undefined) return;
    if (terms.roots.length > this.#roots) {
      this.#stop("roots", `a number with ${terms.roots.length} square roots`, this.#roots);
    }
    let bits = bitLength(terms.den);
    for (const list of [terms.re, terms.im]) for (const n of list) bits = Math.max(bits, bitLength(n));
    if (bits > this.#bits) {
      this.#stop("digits", `a coefficient of ${Math.ceil(bits * DIGITS_PER_BIT)} digits`, this.#bits * DIGITS_PER_BIT);
    }
  }

  #stop(kind: keyof ExactBudget, what: string, most: number): never {
    throw new GoodBasisError(
      "budget",
      `${this.#where}: ${what}, where the budget allows ${kind} up to ${Math.floor(most)}; raise budget.${kind}, ` +
        "split the space by more symmetries first, or use floating-point operators with rigorous bounds",
      { kind, most: Math.floor(most) },
    );
  }
}

function limit(where: string, kind: keyof ExactBudget, budget: ExactBudget): number {
  const value = budget[kind] ?? DEFAULT_BUDGET[kind];
  if (typeof value === "number" && value > 0) return value;
  throw new GoodBasisError("option", `${where}: budget.${kind} must be a positive number, got ${shown(value)}`, {
    kind,
    value,
  });
}
