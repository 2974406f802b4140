import { dirname, isAbsolute, join } from "node:path";
import { GoodBasisError } from "../errors.js";
import { type ReadProblem, readProblem } from "../problem/read.js";
import { inSource } from "../problem/source.js";
import type { Settings } from "./arguments.js";
import type { Terminal } from "./terminal.js";

/** The name by which messages call a file. */
export function nameOf(path: string): string {
  return path === "-" ? "standard input" : path;
}

/** What the platform says went wrong, without the call and the path that it was about. */
export function reasonOf(error: unknown): string {
  const message = error instanceof Error ? error.message : String(error);
  return message.replace(/, (?:[a-z]+ '.*'|[a-z]+)$/s, "");
}

/**
 * The text of a file.
 *
 * @throws GoodBasisError `file`
 */
export function readFile(terminal: Terminal, path: string): string {
  try {
    return terminal.read(path);
  } catch (error) {
    const reason = reasonOf(error);
    const message = `${nameOf(path)} cannot be read (${reason}); check the path and the rights to it`;
    throw new GoodBasisError("file", message, { name: nameOf(path) });
  }
}

/**
 * Reads a problem file; matrix files are sought beside it.
 *
 * @throws GoodBasisError as readProblem does
 */
export function loadProblem(terminal: Terminal, path: string): ReadProblem {
  return readProblem(readFile(terminal, path), { name: nameOf(path), loadMatrix: matrixLoader(terminal, path) });
}

/** Reads files whose paths are relative to the folder of `path`. */
function matrixLoader(terminal: Terminal, path: string): (matrix: string) => string {
  const folder = path === "-" ? "." : dirname(path);
  return (matrix) => readFile(terminal, isAbsolute(matrix) ? matrix : join(folder, matrix));
}

/**
 * Runs `work` on a problem; its errors name the line of the problem file where they can.
 *
 * @param settings - options given here and not in the file
 */
export function onProblem<T>(read: ReadProblem, { find }: Settings, work: () => T): T {
  const own = Object.keys(read.options).filter((name) => !Object.hasOwn(find, name));
  return inSource(read, own, work);
}
