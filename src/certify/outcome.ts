import type { Coupling, Question, Study } from "./findings.js";
import type { GoodBasis } from "./good-basis.js";

export type * from "./findings.js";
export type * from "./verdict.js";

/** Every level studied is good. */
export interface GoodOutcome<K extends string = string> extends Study<K> {
  /** Every level studied is good. */
  readonly verdict: "good";
  /** The certified basis, which {@link perturb} takes. */
  readonly basis: GoodBasis<K>;
}

/** V couples states inside a level. */
export interface NotGoodOutcome<K extends string = string> extends Study<K> {
  /** Some level is not good. */
  readonly verdict: "not good";
  /** Which states, and how strongly; largest first. */
  readonly couplings: readonly Coupling[];
  /** What else stands in the way. */
  readonly questions: readonly Question[];
}

/** No coupling is proved, but something stands in the way of "good". */
export interface UndecidedOutcome<K extends string = string> extends Study<K> {
  /** No level is proved bad, and some not good. */
  readonly verdict: "undecided";
  /** What could not be told apart, and what would help. */
  readonly questions: readonly Question[];
}

/** What {@link findGoodBasis} returns; branch on `verdict`. */
export type Outcome<K extends string = string> = GoodOutcome<K> | NotGoodOutcome<K> | UndecidedOutcome<K>;
