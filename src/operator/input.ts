import { ExactOperator } from "../exact/operator.js";
import type { ExactData } from "./exact-input.js";
import { Operator } from "./operator.js";
import type { MatrixData } from "./read.js";

/** Everything that an operator can be made of: an {@link Operator}, an {@link ExactOperator}, a matrix of plain or of exact numbers. */
export type MatrixInput = Operator | ExactOperator | MatrixData | ExactData;

/**
 * Whether a value has the outer form of a matrix: enough to tell one matrix from a record of named ones, before anything in it
 * is checked.
 *
 * @param value - anything
 * @returns true for an operator, floating or exact, an array, a typed array, an ml-matrix `Matrix`, and an object with one of the keys `re`,
 *   `entries`, `diagonal`, `permutation` holding an array (or, for `re`, a `Matrix`)
 */
export function isMatrixInput(value: unknown): value is MatrixInput {
  if (typeof value !== "object" || value === null) return false;
  if (value instanceof Operator || value instanceof ExactOperator || isArrayLike(value) || isMatrixLike(value))
    return true;
  for (const key of ["re", "entries", "diagonal", "permutation"]) {
    const part: unknown = Reflect.get(value, key);
    if (isArrayLike(part) || (key === "re" && isMatrixLike(part))) return true;
  }
  return false;
}

function isArrayLike(value: unknown): boolean {
  return Array.isArray(value) || ArrayBuffer.isView(value);
}

function isMatrixLike(value: unknown): boolean {
  return typeof value === "object" && value !== null && "rows" in value && "columns" in value && "get" in value;
}
