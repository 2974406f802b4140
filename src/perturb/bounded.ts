/** A number with a rigorous bound on its error. */
export interface Bounded {
  readonly value: number;
  readonly plusMinus: number;
}
