import type { Candidate, Problem } from "../audit/problem.js";
import { isMatrixInput, type MatrixInput } from "../operator/input.js";
import { Operator } from "../operator/operator.js";
import type { ProblemOptions } from "./problem-file.js";

/** What a problem file holds besides the problem. */
export interface WriteProblemOptions {
  /** What the problem is called. */
  readonly title?: string;
  /** What a reader should know of it. */
  readonly note?: string;
  /** Whether the numbers are made up. */
  readonly invented?: boolean;
  /** Options of the main job. */
  readonly options?: ProblemOptions;
}

/**
 * Writes a problem as a problem file, every matrix as triplets with its radii: reading it back gives the same bits, and the
 * same hashes.
 *
 * @param problem - the problem
 * @param extra - title, note and options
 * @returns JSON, one matrix a line
 * @throws GoodBasisError `shape`, `not-finite` - a matrix that cannot be read
 *
 * @example
 * ```ts
 * import { readProblem, writeProblem } from "goodbasis";
 *
 * const text = writeProblem({ h0: { diagonal: [1, 1] }, v: [[0, 0.1], [0.1, 0]] }, { title: "Two kets" });
 * console.log(readProblem(text).title); // Two kets
 * ```
 */
export function writeProblem(problem: Problem, extra: WriteProblemOptions = {}): string {
  const { title, note, invented, options } = extra;
  const { h0, v, candidates, kets, unit } = problem;
  const fields: Record<string, unknown> = { format: "goodbasis-problem", formatVersion: 1 };
  Object.assign(fields, { title, invented, note, unit, kets });
  const lines = Object.entries(fields)
    .filter(([, value]) => value !== undefined)
    .map(([name, value]) => field(name, value));
  lines.push(field("h0", matrix(h0)));
  lines.push(isMatrixInput(v) ? field("v", matrix(v)) : group("v", mapped(v, matrix)));
  if (candidates !== undefined) lines.push(group("candidates", mapped(candidates, candidate)));
  if (options !== undefined) lines.push(field("options", options));
  return `{\n  ${lines.join(",\n  ")}\n}\n`;
}

function field(name: string, value: unknown): string {
  return `${JSON.stringify(name)}: ${JSON.stringify(value)}`;
}

function group(name: string, entries: readonly (readonly [string, unknown])[]): string {
  if (entries.length === 0) return field(name, {});
  const lines = entries.map(([key, value]) => `    ${field(key, value)}`);
  return `${JSON.stringify(name)}: {\n${lines.join(",\n")}\n  }`;
}

function mapped<T>(record: Readonly<Record<string, T>>, write: (value: T) => unknown): (readonly [string, unknown])[] {
  return Object.entries(record).map(([key, value]) => [key, write(value)] as const);
}

function candidate(input: MatrixInput | Candidate): unknown {
  if (isMatrixInput(input)) return matrix(input);
  const { operator, label, ladder } = input;
  return { operator: matrix(operator), label, ladder: ladder === undefined ? undefined : matrix(ladder) };
}

function matrix(input: MatrixInput): unknown {
  const operator = Operator.from(input);
  const { csr, n } = operator;
  const triplets: number[][] = [];
  for (let row = 0; row < n; row++) {
    for (let e = csr.ptr[row] as number; e < (csr.ptr[row + 1] as number); e++) {
      const place = [row, csr.col[e] as number, csr.re[e] as number];
      triplets.push(csr.im === undefined ? place : [...place, csr.im[e] as number]);
    }
  }
  if (operator.isExact) return { n, triplets, uncertainty: "exact" };
  const { radius } = operator;
  return radius === undefined ? { n, triplets } : { n, triplets, radii: Array.from(radius) };
}
