/**
 * A complex matrix in compressed sparse rows, real and imaginary parts apart.
 *
 * Row i holds the entries `ptr[i] .. ptr[i + 1] - 1`; column indices ascend strictly within a row. `im` is absent where
 * every imaginary part is zero. The arrays are shared, never copied for safety: treat them as read-only.
 */
export interface Csr {
  /** Number of rows. */
  readonly rows: number;
  /** Number of columns. */
  readonly cols: number;
  /** Row starts, length `rows + 1`. */
  readonly ptr: Int32Array;
  /** Column of each entry. */
  readonly col: Int32Array;
  /** Real parts. */
  readonly re: Float64Array;
  /** Imaginary parts; absent for a real matrix. */
  readonly im: Float64Array | undefined;
}
