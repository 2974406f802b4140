import { GoodBasisError } from "../../src/errors.js";
import { isMatrixInput, type MatrixInput } from "../../src/operator/input.js";
import { Operator } from "../../src/operator/operator.js";
import { type ReadProblem, type ReadProblemOptions, readProblem } from "../../src/problem/read.js";

/** A problem file with the given fields; two kets with nothing in them unless the fields say otherwise. */
export function file(fields: Readonly<Record<string, unknown>>): Record<string, unknown> {
  return { format: "goodbasis-problem", formatVersion: 1, h0: [[0]], v: [[0]], ...fields };
}

/** Reads such a file, from its text. */
export function readFields(fields: Readonly<Record<string, unknown>>, options: ReadProblemOptions = {}): ReadProblem {
  return readProblem(JSON.stringify(file(fields), undefined, 1), { name: "p.json", ...options });
}

/** H0 of a file with the given fields. */
export function h0Of(
  h0: unknown,
  fields: Readonly<Record<string, unknown>> = {},
  options: ReadProblemOptions = {},
): Operator {
  return Operator.from(readFields({ ...fields, h0 }, options).problem.h0);
}

/** Code and message of what `work` throws. */
export function errorOf(work: () => unknown): string {
  try {
    work();
  } catch (error) {
    if (error instanceof GoodBasisError) return `${error.code}: ${error.message}`;
    throw error;
  }
  return "no error";
}

/** A matrix as rows of numbers; complex ones as text. */
export function rowsOf(input: MatrixInput): (number | string)[][] {
  const operator = Operator.from(input);
  const rows = Array.from({ length: operator.n }, (_, i) => i);
  return rows.map((i) =>
    rows.map((j) => {
      const { re, im } = operator.entry(i, j);
      return im === 0 ? re : `${re}${im < 0 ? "" : "+"}${im}i`;
    }),
  );
}

/** A candidate's operator. */
export function candidateOf(read: ReadProblem, name: string): Operator {
  const candidate = read.problem.candidates?.[name];
  if (candidate === undefined) throw new Error(`no candidate ${name}`);
  return Operator.from(isMatrixInput(candidate) ? candidate : candidate.operator);
}
