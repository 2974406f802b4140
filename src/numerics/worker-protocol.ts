import { type ErrorCode, GoodBasisError } from "../errors.js";
import { batchedHermitianEigen } from "./eigen/batch.js";

/** What a pool asks of a worker: the eigenpairs of some matrices, laid out as for `batchedHermitianEigen`. */
export interface PoolRequest {
  readonly orders: Int32Array;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
  readonly upper: "ignore" | "check";
}

/** What a worker answers: eigenvalues and eigenvectors, or the error that it met. */
export type PoolAnswer =
  | { readonly values: Float64Array; readonly re: Float64Array; readonly im: Float64Array | undefined }
  | {
      readonly error: {
        readonly code: ErrorCode;
        readonly message: string;
        readonly details: Readonly<Record<string, unknown>>;
      };
    };

/**
 * Answers one request; the same code as in the calling thread, so that the bits are the same.
 *
 * @param request - from the pool
 * @returns the answer, and the arrays in it that can be moved instead of copied
 * @throws what is not a GoodBasisError: a defect, which ends the worker
 */
export function answerRequest(request: PoolRequest): { answer: PoolAnswer; transfer: ArrayBufferLike[] } {
  try {
    const { values, re, im } = batchedHermitianEigen(request.orders, request.re, request.im, { upper: request.upper });
    const transfer = [values.buffer, re.buffer, ...(im === undefined ? [] : [im.buffer])];
    return { answer: { values, re, im }, transfer };
  } catch (error) {
    if (!(error instanceof GoodBasisError)) throw error;
    return { answer: { error: { code: error.code, message: error.message, details: error.details } }, transfer: [] };
  }
}
