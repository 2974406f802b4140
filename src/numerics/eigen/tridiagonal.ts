/** A real symmetric tridiagonal matrix with the scalars of the reflectors that led to it. */
export interface Tridiagonal {
  /** n diagonal entries. */
  readonly diagonal: Float64Array;
  /** Entry i couples i and i + 1; the last of the n entries is scratch. */
  readonly off: Float64Array;
  /** τ_i of the reflector stored in row i; zero where there is none. */
  readonly tau: Float64Array;
}

/**
 * A row whose off-tridiagonal entries have squares that add up to no more than this is taken as reduced already.
 * Entries are scaled to about one beforehand, so what is dropped is below 1e-135 of the norm, and no sum of squares
 * that is used has lost digits to underflow.
 */
export const NEGLIGIBLE_SQUARE: number = 2 ** -900;
