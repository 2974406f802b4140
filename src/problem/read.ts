import type { Candidate, Problem } from "../audit/problem.js";
import { GoodBasisError } from "../errors.js";
import { requireOptions } from "../misuse.js";
import type { Operator } from "../operator/operator.js";
import { parseDocument } from "./document.js";
import { looksLikeMatrix, readMatrixAt } from "./matrix.js";
import type { MatrixContext } from "./names.js";
import { fileError, inside, misfit, type Place, type ProblemDocument, showValue } from "./place.js";
import type { ProblemOptions, ProblemOutline } from "./problem-file.js";
import { candidateSchema, conform, outlineSchema } from "./schema.js";
import { rememberDocument } from "./source.js";
import { Space } from "./space.js";

/** Options of {@link readProblem}. */
export interface ReadProblemOptions {
  /** Name of the file, for messages. */
  readonly name?: string;
  /** Reads a matrix file that the problem names, path as written there, and returns its text. */
  readonly loadMatrix?: (path: string) => string;
}

/** A problem file that has been read. */
export interface ReadProblem {
  /** Ready for {@link findGoodBasis} and {@link auditCommutators}. */
  readonly problem: Problem;
  /** Number of kets. */
  readonly n: number;
  /** The options that the file asks for. */
  readonly options: ProblemOptions;
  /** What the problem is called. */
  readonly title: string | undefined;
  /** What a reader should know of it. */
  readonly note: string | undefined;
  /** Whether the file says that its numbers are made up. */
  readonly invented: boolean;
}

/**
 * Reads a problem file: JSON with `"format": "goodbasis-problem"`, as the published JSON Schema `goodbasis/problem-schema.json`
 * describes it.
 *
 * @param source - the text of the file, or what `JSON.parse` made of it; from text, messages name lines
 * @param options - name of the file for messages; how matrix files beside it are read
 * @returns the problem with all its matrices as operators, and the options stated in the file
 * @throws GoodBasisError `file` - no JSON (with line and column), or a field of the wrong form (with its path)
 * @throws GoodBasisError `name`, `shape`, `not-finite`, `option` - an unknown operator name, a matrix that is not square, a
 *   number beyond all bounds, a builder's complaint; with the same place
 *
 * @example
 * ```ts
 * import { findGoodBasis, readProblem } from "goodbasis";
 *
 * const text = `{
 *   "format": "goodbasis-problem", "formatVersion": 1,
 *   "space": [{ "name": "L", "spin": 1 }, { "name": "S", "spin": "1/2" }],
 *   "h0": { "terms": [{ "coefficient": 20, "dot": ["L", "S"] }] },
 *   "v": "L.z + S.z + S.z",
 *   "candidates": { "Jz": { "operator": "L.z + S.z", "label": "m" } }
 * }`;
 * const { problem, options } = readProblem(text);
 * console.log(findGoodBasis(problem, options).verdict); // good
 * ```
 */
export function readProblem(source: unknown, options: ReadProblemOptions = {}): ReadProblem {
  checkOptions(options);
  const text = typeof source === "string" ? source : undefined;
  const document: ProblemDocument = { name: options.name ?? "problem", text };
  const place: Place = { document, path: [] };
  const outline = conform(outlineSchema, place, text === undefined ? source : parseDocument(document, text));
  const space = outline.space === undefined ? undefined : new Space(inside(place, "space"), outline.space);
  if (space !== undefined && outline.n !== undefined && outline.n !== space.n) {
    throw fileError(inside(place, "n"), `${space.n}, the number of kets of the space`, showValue(outline.n));
  }
  const defined = new Map<string, Operator>();
  const context: MatrixContext = {
    space,
    n: space?.n ?? outline.n ?? outline.kets?.length,
    defined,
    loadMatrix: options.loadMatrix,
  };
  for (const [name, value] of Object.entries(outline.define ?? {})) {
    const at = inside(place, "define", name);
    if (!/^[^.,[\]^|+\s]+$/.test(name)) throw fileError(at, "a name without spaces and . , [ ] ^ | +", showValue(name));
    defined.set(name, readMatrixAt(at, value, context));
  }
  const kets = outline.kets ?? space?.kets();
  const h0 = readMatrixAt(inside(place, "h0"), outline.h0, context);
  if (kets !== undefined) checkKets(inside(place, outline.kets === undefined ? "space" : "kets"), kets, h0.n);
  checkLevels(inside(place, "options", "levels"), outline.options?.levels);
  const read: ReadProblem = {
    n: h0.n,
    problem: {
      h0,
      v: readPerturbations(inside(place, "v"), outline.v, context),
      candidates: readCandidates(inside(place, "candidates"), outline.candidates ?? {}, context),
      ...(kets === undefined ? {} : { kets }),
      ...(outline.unit === undefined ? {} : { unit: outline.unit }),
    },
    options: outline.options ?? {},
    title: outline.title,
    note: outline.note,
    invented: outline.invented ?? false,
  };
  rememberDocument(read, document);
  return read;
}

function checkOptions(options: ReadProblemOptions): void {
  requireOptions("readProblem", options, ["name", "loadMatrix"]);
  const { name, loadMatrix } = options;
  if (name !== undefined && typeof name !== "string") {
    throw new GoodBasisError(
      "option",
      `readProblem: name is ${showValue(name)}; give the name of the file as text`,
      {},
    );
  }
  if (loadMatrix !== undefined && typeof loadMatrix !== "function") {
    const message = `readProblem: loadMatrix is ${showValue(loadMatrix)}; give a function (path) => text of the file`;
    throw new GoodBasisError("option", message, {});
  }
}

function checkKets(place: Place, kets: readonly string[], n: number): void {
  if (kets.length !== n) {
    const message = `${kets.length} kets are named, but h0 is ${n} × ${n}; name every ket once`;
    throw misfit(place, "shape", message);
  }
  const first = new Map<string, number>();
  for (const [k, ket] of kets.entries()) {
    if (ket.trim() === "") throw misfit(inside(place, k), "name", "the name of the ket is empty; name every ket");
    const other = first.get(ket);
    if (other !== undefined) {
      throw misfit(inside(place, k), "name", `kets ${other} and ${k} are both called "${ket}"; names must differ`);
    }
    first.set(ket, k);
  }
}

function checkLevels(place: Place, levels: ProblemOptions["levels"]): void {
  if (levels === undefined || levels === "all" || !("from" in levels) || levels.from <= levels.to) return;
  throw misfit(place, "option", `the window runs from ${levels.from} down to ${levels.to}; give from ≤ to`);
}

function readPerturbations(place: Place, value: unknown, context: MatrixContext): Problem["v"] {
  if (typeof value !== "object" || value === null || Array.isArray(value)) return readMatrixAt(place, value, context);
  const entries = Object.entries(value);
  if (looksLikeMatrix(value)) return readSingle(place, value, context);
  if (entries.length === 0) throw fileError(place, "a matrix, or at least one named one", "an empty object");
  for (const [name] of entries) {
    if (!PROBLEM_FIELDS_OF_MATRICES.includes(name)) continue;
    throw misfit(inside(place, name), "name", `a perturbation may not be called "${name}"; rename it`);
  }
  return Object.fromEntries(
    entries.map(([name, matrix]) => [name, readMatrixAt(inside(place, name), matrix, context)] as const),
  );
}

/** Fields by which matrices of a {@link Problem} are told from records of named ones. */
const PROBLEM_FIELDS_OF_MATRICES = ["re", "im", "entries"];

/** V given as one matrix; what is wrong with it may be that its fields were meant as names. */
function readSingle(place: Place, value: object, context: MatrixContext): Operator {
  const form = Object.keys(value).find((name) => looksLikeMatrix({ [name]: undefined }));
  try {
    const operator = readMatrixAt(place, value, context);
    if (form !== "diagonal" || operator.isHermitian) return operator;
    throw misfit(place, "not-hermitian", "V is not Hermitian: numbers on its diagonal have imaginary parts");
  } catch (error) {
    if (!(error instanceof GoodBasisError) || form === undefined) throw error;
    const hint = `v is read as one matrix, as it has the field "${form}"; if that is a perturbation's name, rename it`;
    throw new GoodBasisError(error.code, `${error.message} (${hint})`, error.details);
  }
}

function readCandidates(
  place: Place,
  values: NonNullable<ProblemOutline["candidates"]>,
  context: MatrixContext,
): Record<string, Operator | Candidate> {
  return Object.fromEntries(
    Object.entries(values).map(([name, value]): [string, Operator | Candidate] => {
      const at = inside(place, name);
      if (looksLikeMatrix(value)) return [name, readMatrixAt(at, value, context)];
      const { operator, label, ladder } = conform(candidateSchema, at, value);
      const candidate: Candidate = {
        operator: readMatrixAt(inside(at, "operator"), operator, context),
        ...(label === undefined ? {} : { label }),
        ...(ladder === undefined ? {} : { ladder: readMatrixAt(inside(at, "ladder"), ladder, context) }),
      };
      return [name, candidate];
    }),
  );
}
