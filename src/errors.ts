/**
 * Stable codes of every error that goodbasis throws. A code never changes its meaning; messages may.
 *
 * | code | meaning |
 * |---|---|
 * | `shape` | a matrix, vector or list has the wrong size or form |
 * | `not-finite` | an entry is NaN, infinite, or so large that products of operators would overflow |
 * | `not-hermitian` | H0 or a perturbation is not Hermitian |
 * | `not-normal` | a candidate does not commute with its adjoint |
 * | `name` | an operator, ket or label name is empty, duplicate or unknown |
 * | `option` | an argument or option is unknown, of the wrong kind, or outside its range |
 * | `no-level` | a choice of levels matches nothing |
 * | `unsafe-order` | an order was asked for that the certificate does not call safe |
 * | `not-certified` | an object that is not a certified basis was handed over |
 * | `wrong-problem` | a certificate belongs to another problem |
 * | `file` | a problem, matrix or certificate file cannot be read or is malformed |
 * | `output` | an output path exists already or cannot be written |
 * | `text` | a text is not an exact number |
 * | `zero-division` | an exact number is divided by zero |
 * | `not-real` | an exact number with an imaginary part where a real one is needed |
 * | `budget` | an exact computation outgrows its budget |
 * | `no-convergence` | an iteration did not finish within its bound |
 * | `worker` | a worker thread died or could not be started |
 * | `memory` | a result needs more memory than the platform gives |
 */
export type ErrorCode =
  | "shape"
  | "not-finite"
  | "not-hermitian"
  | "not-normal"
  | "name"
  | "option"
  | "no-level"
  | "unsafe-order"
  | "not-certified"
  | "wrong-problem"
  | "file"
  | "output"
  | "text"
  | "zero-division"
  | "not-real"
  | "budget"
  | "no-convergence"
  | "worker"
  | "memory";

/**
 * The one error class of goodbasis: thrown for misuse. Mathematics never throws; it returns a verdict.
 *
 * @example
 * ```ts
 * import { GoodBasisError, Operator } from "goodbasis";
 *
 * try {
 *   Operator.from([[1, 2], [3]]);
 * } catch (error) {
 *   if (!(error instanceof GoodBasisError) || error.code !== "shape") throw error;
 * }
 * ```
 */
export class GoodBasisError extends Error {
  /** Always "GoodBasisError". */
  override readonly name = "GoodBasisError";
  /** The stable code; branch on this, never on the message. */
  readonly code: ErrorCode;
  /** Numbers and names behind the message (indices, sizes, the offending element), ready for a program. */
  readonly details: Readonly<Record<string, unknown>>;

  /**
   * @param code - the stable code
   * @param message - what was expected, what came, where, and the next step
   * @param details - the same facts for a program
   */
  constructor(code: ErrorCode, message: string, details: Readonly<Record<string, unknown>> = {}) {
    super(message);
    this.code = code;
    this.details = details;
  }
}
