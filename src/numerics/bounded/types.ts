import type { Dense } from "../dense.js";

/** A dense square matrix with its order. */
export interface Square extends Dense {
  /** Order: the arrays hold n² numbers, row by row. */
  readonly n: number;
}

/** A computed matrix, and how far from the exact one it may lie. */
export interface Bounded<T> {
  /** The computed matrix. */
  readonly value: T;
  /** Upper bound on the Frobenius norm of the difference; infinite where the bound itself overflows. */
  readonly error: number;
}
