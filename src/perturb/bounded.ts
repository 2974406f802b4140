/** A number with a rigorous bound on its error. */
export interface Bounded {
  /** The number. */
  readonly value: number;
  /** The exact number lies within this of `value`. */
  readonly plusMinus: number;
}
