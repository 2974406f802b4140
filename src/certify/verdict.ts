/** The three answers to "is this basis good for V?" */
export type Verdict = "good" | "not good" | "undecided";

/** A first-order shift ⟨μ|V|μ⟩, in the problem's unit for λ = 1. */
export interface Shift {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** ⟨μ|V|μ⟩. */
  readonly value: number;
  /**
   * Rigorous: the exact first-order shift of the exact level lies within this of `value`. Contains the in-level block of V
   * that was dropped, the orthonormality defect, the tilt of the computed level, its spread, and rounding.
   */
  readonly plusMinus: number;
}

/** Why something could not be decided or was refused. */
export type QuestionCode =
  | "labels-insufficient"
  | "coupling-undecided"
  | "ambiguous-level"
  | "merged-level"
  | "near-degenerate"
  | "strong-mixing";
