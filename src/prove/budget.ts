import { type ExactBudget, Meter } from "../exact/budget.js";

/** The budget of each computation, and the ledger of all of them together. */
export interface ProofBudget extends ExactBudget {
  /** What is left of the work that the whole proof may cost. */
  readonly ledger: Meter;
}

/** Steps that a proof may cost unless stated: a minute or two. */
const DEFAULT_WORK = 2_000_000_000;

/**
 * @param budget - of each computation
 * @param work - steps of all together, one for a product of machine integers, twenty for one of other exact numbers
 * @throws GoodBasisError `option` - a limit that is not a positive number
 */
export function proofBudget(budget: ExactBudget = {}, work: number = DEFAULT_WORK): ProofBudget {
  return { ...budget, ledger: new Meter("proveExactly", { steps: work }) };
}
