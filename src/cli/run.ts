import { GoodBasisError } from "../errors.js";
import { VERSION } from "../version.js";
import { readArguments } from "./arguments.js";
import { markFirstWord } from "./colour.js";
import { overallHelp, verbHelp } from "./help.js";
import type { Terminal } from "./terminal.js";
import type { Verb } from "./verb.js";
import { auditVerb } from "./verbs/audit.js";
import { findVerb, tableVerb } from "./verbs/find.js";
import { recheckVerb } from "./verbs/recheck.js";
import { validateVerb } from "./verbs/validate.js";

const VERBS: readonly Verb[] = [findVerb, tableVerb, auditVerb, validateVerb, recheckVerb];

/**
 * Runs the program.
 *
 * @param args - the arguments after the program's name
 * @param terminal - where it reads and writes
 * @returns the exit status: 0 good, 1 not good or undecided, 2 bad input
 */
export function run(args: readonly string[], terminal: Terminal): 0 | 1 | 2 {
  const [name, ...rest] = args;
  if (name === undefined || name === "--help" || name === "-h" || name === "help") {
    const text = overallHelp(VERBS);
    if (name === undefined) terminal.complain(text);
    else terminal.print(text);
    return name === undefined ? 2 : 0;
  }
  if (name === "--version" || name === "-v") {
    terminal.print(`${VERSION}\n`);
    return 0;
  }
  try {
    return runVerb(name, rest, terminal);
  } catch (error) {
    terminal.complain(`${markFirstWord(complaint(name, error), "bad", terminal.colours.complain)}\n`);
    return 2;
  }
}

function runVerb(name: string, args: readonly string[], terminal: Terminal): 0 | 1 {
  const verb = VERBS.find((known) => known.name === name);
  if (verb === undefined) {
    const known = VERBS.map((each) => each.name).join(", ");
    throw new GoodBasisError("option", `there is no verb "${name}"; give ${known}, or --help`, { verb: name });
  }
  const settings = readArguments(name, args, verb.options);
  if (settings.help) {
    terminal.print(verbHelp(verb));
    return 0;
  }
  if (settings.files.length !== verb.files) {
    const message = `expected ${verb.usage}, got ${settings.files.length} files; see goodbasis ${name} --help`;
    throw new GoodBasisError("option", message, { files: settings.files });
  }
  try {
    return verb.run(terminal, settings, settings.files);
  } catch (error) {
    throw named(error, settings.files.at(-1) ?? "");
  }
}

/** An error about a problem with the problem's name ahead, where it names no file yet. */
function named(error: unknown, file: string): unknown {
  if (!(error instanceof GoodBasisError) || !("operator" in error.details) || "field" in error.details) return error;
  return new GoodBasisError(error.code, `${file}: ${error.message}`, { ...error.details, name: file });
}

function complaint(verb: string, error: unknown): string {
  if (error instanceof GoodBasisError) {
    const message = error.message.startsWith(`${verb}: `) ? error.message.slice(verb.length + 2) : error.message;
    return `error [${error.code}]: goodbasis ${verb}: ${message}`;
  }
  const reason = error instanceof Error ? `${error.name}: ${error.message}` : String(error);
  return `error [unexpected]: goodbasis ${verb}: ${reason}; please report this together with the input`;
}
