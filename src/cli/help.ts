import { VERSION } from "../version.js";
import type { OptionName } from "./arguments.js";

/** What help says of a verb. */
export interface VerbHelp {
  readonly name: string;
  readonly usage: string;
  /** One line for the overview. */
  readonly summary: string;
  readonly about: string;
  readonly options: readonly OptionName[];
  readonly examples: readonly string[];
}

const OPTION_HELP: Readonly<Record<OptionName, readonly [form: string, text: string]>> = {
  format: ["-f, --format FORMAT", "text (default), markdown, csv, json or latex"],
  out: ["-o, --out PATH", "write the result to PATH instead of printing it"],
  force: ["    --force", "replace files that exist"],
  certificate: ["    --certificate PATH", "also write the certificate, which recheck verifies"],
  columns: [
    "    --columns LIST",
    "columns of the table of states, by commas: level, state, E0, degeneracy,\n" +
      "labels, label:NAME, shift, second, evidence, safe, expansion",
  ],
  basis: [
    "    --basis PATH",
    "the basis to be checked: a Matrix Market file (.mtx) with one state a column, or JSON,\n" +
      'a list of states, each a list of numbers or { "ket": coefficient, … }',
  ],
  levels: ["    --levels WHICH", "all, lowest:3, nearest:1350, nearest:1350:2 or a window 0..2000"],
  depth: ["    --depth DEPTH", "labels, first, second or full: how far states may be told apart by V"],
  resolution: ["    --resolution X", "an element of V counts as vanished below X ‖V‖"],
  lambda: ["    --lambda X", "the largest λ at which the basis is to be used"],
  help: ["-h, --help", "this text"],
};

const STATUS =
  "Exit status: 0 good, 1 not good or undecided, 2 bad input (said on standard error; nothing is written).";

/** Help on the whole program. */
export function overallHelp(verbs: readonly VerbHelp[]): string {
  const width = Math.max(...verbs.map(({ usage }) => usage.length));
  return [
    `goodbasis ${VERSION}: the labelled good basis of a degenerate level, with proof`,
    "",
    "Usage:",
    ...verbs.map(({ usage, summary }) => `  goodbasis ${usage.padEnd(width)}  ${summary}`),
    "",
    "FILE is a JSON problem file, or - for standard input. Options of each verb: goodbasis VERB --help.",
    "  --help, --version",
    "",
    "Examples:",
    ...verbs.flatMap(({ examples }) => examples.slice(0, 1)).map((example) => `  ${example}`),
    "",
    STATUS,
    "",
  ].join("\n");
}

/** Help on one verb. */
export function verbHelp({ usage, about, options, examples }: VerbHelp): string {
  const rows = [...options, "help" as const].map((name) => OPTION_HELP[name]);
  const width = Math.max(...rows.map(([form]) => form.length)) + 2;
  const indent = `\n${" ".repeat(width + 2)}`;
  return [
    `Usage: goodbasis ${usage} [options]`,
    "",
    about,
    "",
    "Options:",
    ...rows.map(([form, text]) => `  ${form.padEnd(width)}${text.replaceAll("\n", indent)}`),
    "",
    "Examples:",
    ...examples.map((example) => `  ${example}`),
    "",
    STATUS,
    "",
  ].join("\n");
}
