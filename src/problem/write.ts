import type { Candidate, Problem } from "../audit/problem.js";
import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, requireKnown, requireOptions, shown } from "../misuse.js";
import { isMatrixInput, type MatrixInput } from "../operator/input.js";
import { Operator } from "../operator/operator.js";
import type { Place } from "./place.js";
import type { ProblemOptions } from "./problem-file.js";
import { candidateSchema, conform, FORMS, outlineSchema } from "./schema.js";

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
 * Writes a problem as a problem file, every matrix as triplets with its radii, and as exact numbers in text where it is known
 * exactly: reading it back gives the same bits, the same hashes and the same exact operators.
 *
 * @param problem - the problem
 * @param extra - title, note and options
 * @returns JSON, one matrix a line
 * @throws GoodBasisError `budget` - what an operator is exactly outgrows the budget of exact arithmetic
 * @throws GoodBasisError `shape`, `not-finite` - a matrix that cannot be read; `option` - no problem, or an unknown field; `name` - a
 *   perturbation with the name of a form of matrices; `file` - title, note, kets or options that no file may hold
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
  const next = "give { h0, v, candidates, kets, unit }";
  requireArgument(isObject(problem) && !Array.isArray(problem), "writeProblem", "a problem", problem, next);
  requireKnown("writeProblem: the problem", problem, ["h0", "v", "candidates", "kets", "unit"]);
  requireOptions("writeProblem", extra, ["title", "note", "invented", "options"]);
  const { title, note, invented, options } = extra;
  const { h0, v, candidates, kets, unit } = problem;
  const fields: Record<string, unknown> = { format: "goodbasis-problem", formatVersion: 1 };
  Object.assign(fields, { title, invented, note, unit, kets });
  const stated = Object.entries({ ...fields, options }).filter(([, value]) => value !== undefined);
  conform(outlineSchema, WRITTEN, { ...Object.fromEntries(stated), h0: null, v: null });
  const lines = Object.entries(fields)
    .filter(([, value]) => value !== undefined)
    .map(([name, value]) => field(name, value));
  lines.push(field("h0", matrix(h0)));
  lines.push(isMatrixInput(v) ? field("v", matrix(v)) : group("v", mapped("v", v, matrix)));
  for (const name of isMatrixInput(v) ? [] : Object.keys(v)) checkName(name);
  if (candidates !== undefined) lines.push(group("candidates", mapped("candidates", candidates, candidate)));
  if (options !== undefined) lines.push(field("options", options));
  return `{\n  ${lines.join(",\n  ")}\n}\n`;
}

/** What messages about the document that is being written say of it. */
const WRITTEN: Place = { document: { name: "writeProblem", text: undefined }, path: [] };

/** Refuses a perturbation that a problem file would take for a field of one matrix. */
function checkName(name: string): void {
  if (!FORMS.some((form) => form === name)) return;
  const message = `writeProblem: in a problem file a perturbation may not be called "${name}", a form of matrices; rename it`;
  throw new GoodBasisError("name", message, { name });
}

function field(name: string, value: unknown): string {
  return `${JSON.stringify(name)}: ${JSON.stringify(value)}`;
}

function group(name: string, entries: readonly (readonly [string, unknown])[]): string {
  if (entries.length === 0) return field(name, {});
  const lines = entries.map(([key, value]) => `    ${field(key, value)}`);
  return `${JSON.stringify(name)}: {\n${lines.join(",\n")}\n  }`;
}

function mapped<T>(
  what: string,
  record: Readonly<Record<string, T>>,
  write: (value: T) => unknown,
): (readonly [string, unknown])[] {
  requireArgument(isObject(record), "writeProblem", `operators by name as ${what}`, record, "give { name: matrix, … }");
  return Object.entries(record).map(([key, value]) => [key, write(value)] as const);
}

function candidate(input: MatrixInput | Candidate): unknown {
  if (isMatrixInput(input)) return matrix(input);
  if (!isObject(input))
    throw new GoodBasisError("shape", `writeProblem: a candidate is ${shown(input)}; give a matrix`);
  conform(candidateSchema, WRITTEN, {
    ...input,
    operator: null,
    ...(input.ladder === undefined ? {} : { ladder: null }),
  });
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
  const { exact, radius } = operator;
  if (exact !== undefined && Operator.from(exact).hash === operator.hash) {
    return { n, triplets: Array.from(exact.elements(), ({ row, col, value }) => [row, col, value.text()]) };
  }
  const radii = radius === undefined ? {} : { radii: Array.from(radius) };
  if (exact === undefined) return { n, triplets, ...radii };
  return { n, triplets, ...radii, exact: triplets.map(([row = 0, col = 0]) => exact.entry(row, col).text()) };
}
