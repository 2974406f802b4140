import type { Problem } from "../../audit/problem.js";
import { findGoodBasis } from "../../certify/find.js";
import type { Outcome } from "../../certify/outcome.js";
import { GoodBasisError } from "../../errors.js";
import type { ReadProblem } from "../../problem/read.js";
import type { BasisColumn } from "../../report/basis-columns.js";
import { basisTable } from "../../report/basis-table.js";
import { formatOutcome } from "../../report/format-outcome.js";
import { formatTable } from "../../report/format-table.js";
import type { Table } from "../../report/table.js";
import type { Settings } from "../arguments.js";
import { markFirstWord } from "../colour.js";
import { headingLines, withHeading } from "../heading.js";
import { loadProblem, onProblem } from "../input.js";
import { checkOutputs, deliver } from "../output.js";
import { withProgress } from "../progress.js";
import type { Terminal } from "../terminal.js";
import type { Status, Verb } from "../verb.js";

/** The main job. */
export const findVerb: Verb = {
  name: "find",
  usage: "find FILE",
  files: 1,
  summary: "build the labelled good basis and prove it",
  about:
    "Audits the candidates, builds the states that H0 and the conserved ones have in common, and proves that V couples no\n" +
    "two of them inside a level. As text: the verdict with its evidence and the states; in other formats: the states\n" +
    "(json: everything). Options given here override those of the problem file.",
  options: ["format", "out", "force", "certificate", "columns", "levels", "depth", "resolution", "lambda"],
  examples: [
    "goodbasis find problem.json",
    "goodbasis find problem.json --levels lowest:3 --certificate problem.certificate.json",
    "goodbasis find problem.json --format csv --columns level,E0,labels,shift --out states.csv",
  ],
  run: (terminal, settings, [path = ""]) => {
    const { read, outcome } = study(terminal, settings, path);
    const colours = terminal.colours.print && settings.out === undefined;
    const text = findText(settings, read, outcome, colours);
    deliver(terminal, settings, { text, certificate: () => JSON.stringify(outcome.certificate(), undefined, 1) });
    return statusOf(outcome);
  },
};

/** The states alone. */
export const tableVerb: Verb = {
  name: "table",
  usage: "table FILE",
  files: 1,
  summary: "the same, and print the table of states alone",
  about: "Does what find does and prints the table of states and nothing else.",
  options: ["format", "out", "force", "columns", "levels", "depth", "resolution", "lambda"],
  examples: [
    "goodbasis table problem.json --format latex --out states.tex",
    "goodbasis table problem.json --columns level,E0,label:Jz,shift,expansion --levels lowest:1",
  ],
  run: (terminal, settings, [path = ""]) => {
    const { read, outcome } = study(terminal, settings, path);
    const table = withHeading(tableOf(settings, outcome, undefined), read);
    deliver(terminal, settings, { text: formatTable(table, settings.format) });
    return statusOf(outcome);
  },
};

function study(terminal: Terminal, settings: Settings, path: string): { read: ReadProblem; outcome: Outcome } {
  checkOutputs(terminal, settings);
  const read = loadProblem(terminal, path);
  checkColumns(settings, read.problem);
  const outcome = withProgress(terminal, (onProgress) => {
    const progress = onProgress === undefined ? {} : { onProgress };
    return onProblem(read, settings, () =>
      findGoodBasis(read.problem, { ...read.options, ...settings.find, ...progress }),
    );
  });
  return { read, outcome };
}

function statusOf({ verdict }: Outcome): Status {
  return verdict === "good" ? 0 : 1;
}

const COLUMNS = ["level", "state", "E0", "degeneracy", "labels", "shift", "second", "evidence", "safe", "expansion"];

function isColumn(name: string, candidates: readonly string[]): name is BasisColumn {
  return COLUMNS.includes(name) || candidates.some((candidate) => name === `label:${candidate}`);
}

/** Refuses unknown columns before the work begins. */
function checkColumns({ columns }: Settings, { candidates }: Problem): void {
  const names = Object.keys(candidates ?? {});
  for (const column of columns ?? []) {
    if (isColumn(column, names)) continue;
    const known = [...COLUMNS, ...names.map((name) => `label:${name}`)].join(", ");
    throw new GoodBasisError("option", `--columns: there is no column "${column}"; give some of ${known}`, { column });
  }
}

/** The table of all states, or of those in the first levels that together have at most `most` states. */
function tableOf({ columns }: Settings, outcome: Outcome, most: number | undefined): Table {
  const shown = most === undefined ? undefined : firstLevels(outcome, most);
  const options = {
    ...(columns === undefined ? {} : { columns: columns.filter((name) => isColumn(name, outcome.candidates)) }),
    ...(shown === undefined ? {} : { levels: shown }),
  };
  return outcome.verdict === "good" ? basisTable(outcome.basis, options) : basisTable(outcome, options);
}

function firstLevels({ levels }: Outcome, most: number): number[] {
  const shown: number[] = [];
  let states = 0;
  for (const level of levels) {
    states += level.degeneracy;
    if (states > most) break;
    shown.push(level.index);
  }
  return shown;
}

/** So many states are printed below the verdict. */
const MOST_STATES = 60;

function findText(settings: Settings, read: ReadProblem, outcome: Outcome, colours: boolean): string {
  switch (settings.format) {
    case "text":
      return [
        ...headingLines(read),
        markFirstWord(formatOutcome(outcome), moodOf(outcome), colours),
        "",
        ...stateLines(settings, outcome),
      ].join("\n");
    case "json":
      return findJson(settings, read, outcome);
    case "markdown":
    case "csv":
    case "latex":
      return formatTable(withHeading(tableOf(settings, outcome, undefined), read), settings.format);
    default:
      return settings.format satisfies never;
  }
}

function moodOf({ verdict }: Outcome): "good" | "bad" | "open" {
  switch (verdict) {
    case "good":
      return "good";
    case "not good":
      return "bad";
    case "undecided":
      return "open";
    default:
      return verdict satisfies never;
  }
}

function stateLines(settings: Settings, outcome: Outcome): string[] {
  const table = tableOf(settings, outcome, MOST_STATES);
  const rest = outcome.states.length - table.rows.length;
  const more = `${rest} more states: goodbasis table prints all of them, --levels chooses some`;
  if (table.rows.length === 0) return [more];
  return ["States", formatTable(table, "text"), ...(rest === 0 ? [] : [more])];
}

function findJson(settings: Settings, read: ReadProblem, outcome: Outcome): string {
  const { verdict, unit, n, resolution, levelCount, audit, sets } = outcome;
  const levels = outcome.levels.map(({ evidence: _evidence, ...level }) => level);
  const result = {
    format: "goodbasis-result",
    formatVersion: 1,
    title: read.title ?? null,
    invented: read.invented,
    verdict,
    unit,
    n,
    resolution,
    audit,
    sets,
    levelCount,
    levels,
    couplings: outcome.verdict === "not good" ? outcome.couplings : [],
    questions: outcome.verdict === "good" ? [] : outcome.questions,
    table: JSON.parse(formatTable(tableOf(settings, outcome, undefined), "json")),
  };
  return JSON.stringify(result, undefined, 2);
}
