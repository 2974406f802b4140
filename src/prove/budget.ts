import { GoodBasisError } from "../errors.js";
import { type ExactBudget, Meter } from "../exact/budget.js";
import type { Terms } from "../exact/terms.js";

import { RootCache } from "./root-cache.js";

/** Steps that a proof may cost unless stated: a minute or two. */
const DEFAULT_WORK = 2_000_000_000;

/** What a product of two exact numbers counts for. */
const STEPS_PER_PRODUCT = 20;

/**
 * What a whole proof may cost. A computation asks before it starts, by an estimate; one that is refused costs nothing,
 * so that cheaper ones go on.
 */
export class Ledger {
  readonly #work: number;
  readonly #meter: Meter;
  #spent = 0;

  /** @throws GoodBasisError `option` - a limit that is not a positive number */
  constructor(budget: ExactBudget, work: number) {
    if (!(work > 0)) {
      throw new GoodBasisError("option", `proveExactly: work must be a positive number of steps, got ${work}`, {
        work,
      });
    }
    this.#work = work;
    this.#meter = new Meter("proveExactly", budget);
  }

  /** Asks for products of exact numbers. @throws GoodBasisError `budget` */
  spendProducts(count: number): void {
    const steps = STEPS_PER_PRODUCT * count;
    if (this.#spent + steps > this.#work) {
      const message =
        `proveExactly: about ${Math.ceil(steps)} steps where ${Math.floor(this.#work - this.#spent)} of work are left; ` +
        "raise work, study fewer levels, or give more symmetries, which make blocks smaller";
      throw new GoodBasisError("budget", message, { steps, work: this.#work });
    }
    this.#spent += steps;
  }

  /** Looks at the size of a number. @throws GoodBasisError `budget` */
  weigh(terms: Terms | undefined): void {
    this.#meter.weigh(terms);
  }
}

/** The budget of each computation; the ledger of all of them together goes with it. */
export class ProofBudget implements ExactBudget {
  declare readonly digits?: number;
  declare readonly roots?: number;
  declare readonly steps?: number;
  readonly #ledger: Ledger;
  readonly #known = new RootCache();

  /** @throws GoodBasisError `option` - a limit that is not a positive number */
  constructor(budget: ExactBudget, work: number) {
    Object.assign(this, budget);
    this.#ledger = new Ledger(budget, work);
  }

  get ledger(): Ledger {
    return this.#ledger;
  }

  /** What is known of polynomials from other blocks. */
  get known(): RootCache {
    return this.#known;
  }
}

/**
 * @param budget - of each computation
 * @param work - steps of all together, one for a product of machine integers, twenty for one of other exact numbers
 * @throws GoodBasisError `option` - a limit that is not a positive number
 */
export function proofBudget(budget: ExactBudget = {}, work: number = DEFAULT_WORK): ProofBudget {
  return new ProofBudget(budget, work);
}
