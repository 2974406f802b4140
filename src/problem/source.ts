import type { Problem } from "../audit/problem.js";
import { GoodBasisError } from "../errors.js";
import { isMatrixInput } from "../operator/input.js";
import { inside, type Place, type ProblemDocument, whereIs } from "./place.js";

/** A problem that was read: a `ReadProblem`. */
interface WithProblem {
  readonly problem: Problem;
}

/** Where problems came from. */
const documents = new WeakMap<object, ProblemDocument>();

/** Keeps the document of a problem, so that errors found later can name a line of it. */
export function rememberDocument(read: WithProblem, document: ProblemDocument): void {
  documents.set(read, document);
}

/**
 * Runs `work` on a problem that was read from a file, and adds file, line and field to an error about an operator, a name or an
 * option of it; the code stays.
 *
 * @param own - the options that come from the file and not from elsewhere
 * @throws GoodBasisError with whatever code `work` throws
 */
export function inSource<T>(read: WithProblem, own: readonly string[], work: () => T): T {
  try {
    return work();
  } catch (error) {
    const document = documents.get(read);
    if (!(error instanceof GoodBasisError) || "field" in error.details || document === undefined) throw error;
    const place = placeOf({ document, path: [] }, read, own, error);
    if (place === undefined) throw error;
    const { text, details } = whereIs(place);
    throw new GoodBasisError(error.code, `${text}: ${error.message}`, { ...error.details, ...details });
  }
}

function placeOf(
  top: Place,
  { problem }: WithProblem,
  own: readonly string[],
  error: GoodBasisError,
): Place | undefined {
  const { operator, name } = error.details;
  const called = operator ?? (error.code === "name" ? name : undefined);
  if (typeof called === "string") {
    if (called === "H0" && operator !== undefined) return inside(top, "h0");
    const candidates = problem.candidates ?? {};
    if (Object.hasOwn(candidates, called)) return inside(top, "candidates", called);
    const [, base = ""] = /^(.*)\.ladder$/s.exec(called) ?? [];
    if (Object.hasOwn(candidates, base)) return inside(top, "candidates", base, "ladder");
    return isMatrixInput(problem.v) ? inside(top, "v") : inside(top, "v", called);
  }
  if (error.code === "no-level") return own.includes("levels") ? inside(top, "options", "levels") : undefined;
  const option = error.code === "option" ? own.find((key) => key in error.details) : undefined;
  return option === undefined ? undefined : inside(top, "options", option);
}
