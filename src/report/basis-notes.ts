import type { LevelResult, Study } from "../certify/outcome.js";
import type { StateLabel } from "../refine/label.js";
import { fractionValue } from "./labels.js";
import type { Cell, TableColumn, TableRow } from "./table.js";

/** What a reader must know of the columns of a table of states, one sentence each. */
export function basisNotes(
  study: Study,
  levels: readonly LevelResult[],
  columns: readonly TableColumn[],
  rows: readonly TableRow[],
): string[] {
  const notes: string[] = [];
  for (const verdict of ["not good", "undecided"] as const) {
    const places = levels.filter((level) => level.verdict === verdict).map((level) => level.place);
    if (places.length > 0) {
      notes.push(`${verdict}, so not certified: level${places.length === 1 ? "" : "s"} ${listed(places.map(String))}.`);
    }
  }
  const labels = columns.flatMap((column, c) => {
    if (column.kind !== "label") return [];
    const own = rows.flatMap((row) => labelOf(row.cells[c]));
    return [{ name: column.key.slice("label:".length), labels: own }];
  });
  const namesWhere = (test: (label: StateLabel) => boolean): string[] =>
    labels.filter((column) => column.labels.some(test)).map((column) => column.name);
  const say = (names: readonly string[], text: string): void => {
    if (names.length > 0) notes.push(`${listed(names)}: ${text}`);
  };
  say(namesWhere(isSquare), "the quantum number j is shown; the operator's eigenvalue is j(j + 1).");
  say(
    namesWhere((label) => label.status === "proposed"),
    "recognised from the numbers and only proposed; declare the label to fix it.",
  );
  say(
    namesWhere((label) => label.role === "descriptive"),
    "conserved by H0 but not by the perturbation; names the states, proves nothing.",
  );
  say(
    namesWhere((label) => label.role === "broken"),
    "not conserved by H0; for information only.",
  );
  if (labels.some((column) => column.labels.some((label) => label.status === "not sharp"))) {
    notes.push("⟨…⟩: expectation value, the state is no eigenvector of this operator.");
  }
  const second = columns.findIndex((column) => column.key.startsWith("E2:"));
  if (second >= 0 && rows.some((row) => row.cells[second]?.kind === "none")) {
    notes.push("E2 —: the short second-order formula is not safe for this state.");
  }
  const evidence = columns.findIndex((column) => column.key === "evidence");
  if (evidence >= 0) notes.push(...evidenceNotes(study, rows, evidence));
  if (columns.some((column) => column.key === "safe")) {
    notes.push("safe: the short formulas hold through this order, for energies (E) and for states (ψ).");
  }
  return notes;
}

function evidenceNotes(study: Study, rows: readonly TableRow[], column: number): string[] {
  const words = new Set(
    rows.map((row) => {
      const cell = row.cells[column];
      return cell?.kind === "text" ? cell.text : "";
    }),
  );
  const meanings: string[] = [];
  if (words.has("labels")) meanings.push("labels: a conserved label tells it from every partner in its level");
  for (const name of new Set([...study.perturbations, "V"])) {
    if (words.has(name)) meanings.push(`${name}: only the first-order shift tells it from a partner`);
  }
  if ([...words].some((word) => word.endsWith(" order"))) {
    meanings.push("2nd order: only the effective operator of that order does");
  }
  if (words.has("none")) meanings.push("none: nothing studied tells it from a partner surely enough");
  return meanings.length === 0 ? [] : [`evidence — ${meanings.join("; ")}.`];
}

function labelOf(cell: Cell | undefined): StateLabel[] {
  return cell?.kind === "label" ? [cell.label] : [];
}

/** Whether the label is j of an operator with eigenvalue j(j + 1), as far as the number tells. */
function isSquare(label: StateLabel): boolean {
  if (label.status !== "declared" && label.status !== "proposed") return false;
  const j = fractionValue(label.text);
  if (j === undefined || j <= 0) return false;
  const near = (x: number): boolean => Math.abs(label.re - x) <= label.radius + 1e-9 * x;
  return near(j * (j + 1)) && !near(j);
}

/** "a", "a and b", "a, b and c". */
function listed(words: readonly string[]): string {
  if (words.length < 2) return words.join("");
  return `${words.slice(0, -1).join(", ")} and ${words[words.length - 1]}`;
}
