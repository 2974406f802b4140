import { type ErrorCode, GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import { type JsonPath, lineAndColumn, offsetOf } from "./json-text.js";

/** The document that is being read. */
export interface ProblemDocument {
  /** Its name, for messages. */
  readonly name: string;
  /** Its text, where it was given as text: then messages name lines. */
  readonly text: string | undefined;
}

/** A value inside a document. */
export interface Place {
  readonly document: ProblemDocument;
  readonly path: JsonPath;
}

/** The place one or more steps further in. */
export function inside(place: Place, ...keys: JsonPath): Place {
  return { document: place.document, path: [...place.path, ...keys] };
}

/** The path as text: `candidates.Fz.ladder`, `v.terms[2].product[0]`. */
function pathText(path: JsonPath): string {
  const parts = path.map((key, k) => {
    if (typeof key === "number") return `[${key}]`;
    const plain = /^[\p{L}_][\p{L}\p{N}_-]*$/u.test(key);
    return plain ? `${k === 0 ? "" : "."}${key}` : `["${key}"]`;
  });
  return parts.join("");
}

/** File, line and field of a place as text, and the same for a program. */
export function whereIs(place: Place): { text: string; details: Readonly<Record<string, unknown>> } {
  const { name, text } = place.document;
  const field = pathText(place.path);
  const spot = text === undefined ? undefined : lineAndColumn(text, offsetOf(text, place.path));
  const parts = [name, spot === undefined ? "" : `line ${spot.line}`, field].filter((part) => part !== "");
  return { text: parts.join(", "), details: { name, field, ...(spot ?? {}) } };
}

/** A short form of any value, for messages. */
export function showValue(value: unknown): string {
  return shown(value);
}

/** The error for a value of the wrong form. */
export function fileError(place: Place, expected: string, came: string, next = ""): GoodBasisError {
  const { text, details } = whereIs(place);
  const message = `${text}: expected ${expected}, got ${came}${next === "" ? "" : `; ${next}`}`;
  return new GoodBasisError("file", message, { ...details, expected });
}

/** The error for a name that nothing has. */
export function nameError(place: Place, name: string, known: string): GoodBasisError {
  const { text, details } = whereIs(place);
  return new GoodBasisError("name", `${text}: there is no "${name}"; ${known}`, { ...details, unknown: name });
}

/**
 * The error for something that the rest of the problem does not fit, with a code of its own.
 *
 * @param message - what does not fit, and the next step
 */
export function misfit(place: Place, code: ErrorCode, message: string): GoodBasisError {
  const { text, details } = whereIs(place);
  return new GoodBasisError(code, `${text}: ${message}`, details);
}

/**
 * Runs `work`, and adds the place to an error of the library that comes out of it; the code stays.
 *
 * @throws GoodBasisError with whatever code `work` throws
 */
export function atPlace<T>(place: Place, work: () => T): T {
  try {
    return work();
  } catch (error) {
    if (!(error instanceof GoodBasisError) || "field" in error.details) throw error;
    const { text, details } = whereIs(place);
    throw new GoodBasisError(error.code, `${text}: ${error.message}`, { ...error.details, ...details });
  }
}
