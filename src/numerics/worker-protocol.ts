import { type ErrorCode, GoodBasisError } from "../errors.js";
import { batchedHermitianEigen, batchedHermitianEigenBy, type HermitianEigenBatch } from "./eigen/batch.js";
import { defaultEngine } from "./eigen/engine.js";
import type { UpperTriangle } from "./eigen/types.js";

/** What a pool asks of a worker: the eigenpairs of some matrices, laid out as for `batchedHermitianEigen`. */
export interface PoolRequest {
  /** The order of each matrix. */
  readonly orders: Int32Array;
  /** The matrices, one after the other; real parts. */
  readonly re: Float64Array;
  /** Imaginary parts, or absent where all are real. */
  readonly im: Float64Array | undefined;
  /** Whether the upper triangles are checked. */
  readonly upper: UpperTriangle;
  /** Where the results go, in memory that both threads share; absent where they are to be sent back. */
  readonly into: HermitianEigenBatch | undefined;
}

/** What a worker answers: that the results are written, the results themselves, or the error that it met. */
export type PoolAnswer =
  | {
      /** The results are in the shared memory. */
      readonly written: true;
    }
  | {
      /** Ascending eigenvalues of every matrix. */
      readonly values: Float64Array;
      /** Eigenvectors as rows; real parts. */
      readonly re: Float64Array;
      /** Imaginary parts in the same order. */
      readonly im: Float64Array | undefined;
    }
  | {
      /** A GoodBasisError, taken apart to be sent. */
      readonly error: {
        /** Its code. */
        readonly code: ErrorCode;
        /** Its message. */
        readonly message: string;
        /** Its details. */
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
  const { orders, upper, into } = request;
  try {
    if (into !== undefined) {
      batchedHermitianEigenBy(defaultEngine, orders, request.re, request.im, { upper }, into);
      return { answer: { written: true }, transfer: [] };
    }
    const { values, re, im } = batchedHermitianEigen(orders, request.re, request.im, { upper });
    const transfer = [values.buffer, re.buffer, ...(im === undefined ? [] : [im.buffer])];
    return { answer: { values, re, im }, transfer };
  } catch (error) {
    if (!(error instanceof GoodBasisError)) throw error;
    return { answer: { error: { code: error.code, message: error.message, details: error.details } }, transfer: [] };
  }
}
