import { type Audit, auditCommutators } from "../../audit/audit.js";
import type { ReadProblem } from "../../problem/read.js";
import { formatAudit } from "../../report/format-audit.js";
import { formatTable } from "../../report/format-table.js";
import { commutatorText, reasons, useText } from "../../report/sentences.js";
import type { Table } from "../../report/table.js";
import type { Settings } from "../arguments.js";
import { markFirstWord } from "../colour.js";
import { headingLines, withHeading } from "../heading.js";
import { loadProblem, onProblem } from "../input.js";
import { checkOutputs, deliver } from "../output.js";
import { plainTable } from "../plain-table.js";
import type { Terminal } from "../terminal.js";
import type { Status, Verb } from "../verb.js";

/** Which candidates are conserved, and which of them commute. */
export const auditVerb: Verb = {
  name: "audit",
  usage: "audit FILE",
  files: 1,
  summary: "which candidates are conserved",
  about:
    "Bounds the commutators of every candidate with H0 and with each perturbation, and of the conserved ones with each\n" +
    "other. Exit status 0 if every candidate is conserved, 1 if not.",
  options: ["format", "out", "force", "resolution"],
  examples: ["goodbasis audit problem.json", "goodbasis audit problem.json --format json --out audit.json"],
  run: runAudit,
};

function runAudit(terminal: Terminal, settings: Settings, [path = ""]: readonly string[]): Status {
  checkOutputs(terminal, settings);
  const read = loadProblem(terminal, path);
  const resolution = settings.find.resolution ?? read.options.resolution;
  const audit = onProblem(read, settings, () =>
    auditCommutators(read.problem, resolution === undefined ? {} : { resolution }),
  );
  const good = audit.candidates.every(({ conserved }) => conserved);
  const colours = terminal.colours.print && settings.out === undefined;
  deliver(terminal, settings, { text: auditText(settings, read, audit, good, colours) });
  return good ? 0 : 1;
}

function auditText(settings: Settings, read: ReadProblem, audit: Audit, good: boolean, colours: boolean): string {
  switch (settings.format) {
    case "text": {
      const text = markFirstWord(formatAudit(audit), good ? "good" : "open", colours);
      return [...headingLines(read), text].join("\n");
    }
    case "json":
      return JSON.stringify({ title: read.title ?? null, invented: read.invented, ...audit }, undefined, 2);
    case "markdown":
    case "csv":
    case "latex":
      return formatTable(withHeading(auditTable(read, audit), read), settings.format);
    default:
      return settings.format satisfies never;
  }
}

function auditTable(read: ReadProblem, audit: Audit): Table {
  const names = audit.candidates[0]?.withPerturbations.map(({ right }) => right) ?? [];
  const text = (key: string, title: string): { key: string; title: string; kind: "text" } => ({
    key,
    title,
    kind: "text",
  });
  const table = plainTable(
    read.problem.unit ?? "",
    [
      text("candidate", "candidate"),
      text("kind", "kind"),
      text("H0", "with H0"),
      ...names.map((name) => text(name, `with ${name}`)),
      text("verdict", "verdict"),
      text("reason", "reason"),
    ],
    audit.candidates.map((candidate) => [
      candidate.name,
      candidate.kind,
      commutatorText(candidate.withH0),
      ...candidate.withPerturbations.map(commutatorText),
      useText(candidate),
      reasons(candidate).join(" "),
    ]),
  );
  return { ...table, notes: audit.remarks.map((remark) => `${remark}.`) };
}
