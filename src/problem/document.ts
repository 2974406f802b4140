import { GoodBasisError } from "../errors.js";
import { jsonFault, lineAndColumn } from "./json-text.js";
import type { ProblemDocument } from "./place.js";

/**
 * The value of a JSON document.
 *
 * @throws GoodBasisError `file` - with line and column of the first fault
 */
export function parseDocument(document: ProblemDocument, text: string): unknown {
  const fault = jsonFault(text);
  if (fault === undefined) return JSON.parse(text.replace(/^\uFEFF/, ""));
  const { line, column } = lineAndColumn(text, fault.offset);
  const message = `${document.name}, line ${line}, column ${column}: expected ${fault.expected}, got ${fault.came}; correct the JSON there`;
  throw new GoodBasisError("file", message, { name: document.name, line, column, expected: fault.expected });
}
