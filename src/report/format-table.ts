import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, requireOptions, shown } from "../misuse.js";
import { csvTable } from "./csv.js";
import { jsonTable } from "./json.js";
import { latexTable } from "./latex.js";
import { markdownTable } from "./markdown.js";
import type { Table } from "./table.js";
import { textTable } from "./text.js";

/** The formats of {@link formatTable}. */
export type TableFormat = "text" | "markdown" | "csv" | "json" | "latex";

/** Options of {@link formatTable}. */
export interface FormatTableOptions {
  /**
   * Text only: longest line. Expansions are broken to keep it, numbers never are, so that a table of many numbers may be
   * wider. Default 120.
   */
  readonly maxWidth?: number;
  /**
   * Most significant digits in text, Markdown and LaTeX, from 1 to 17; a ± grows to cover the rounding. Default 17, in text 10
   * for a column that states one ± for all its numbers; with `digits` given, every number has its own.
   */
  readonly digits?: number;
  /** Whether the notes follow in text, Markdown and LaTeX. Default true. */
  readonly notes?: boolean;
}

/**
 * Sets a table.
 *
 * Text, Markdown and LaTeX print values as far as their ± supports; CSV (RFC 4180) and JSON carry every digit, with value and
 * ± in fields of their own. Units stand in the headers. In text a column of which every ± is below 1e-9 of its largest number
 * states one ± in its head that holds for all, rounding included. In CSV labels that are fractions are decimal numbers, and the safe orders for
 * energies and states are two fields, so that a spreadsheet takes neither for a date; JSON has the fractions as text, too.
 *
 * @param table - from {@link basisTable}
 * @returns lines without a final line break; CSV records are separated by CR LF
 * @throws GoodBasisError `option` for an unknown format, digits outside 1 to 17, or something that is no table
 *
 * @example
 * ```ts
 * import { basisTable, findGoodBasis, formatTable } from "goodbasis";
 *
 * const outcome = findGoodBasis({ h0: { diagonal: [0, 0] }, v: [[0, 1], [1, 0]], kets: ["a", "b"] });
 * const table = basisTable(outcome, { columns: ["E0", "shift", "expansion"] });
 * console.log(formatTable(table, "markdown"));
 * ```
 */
export function formatTable(table: Table, format: TableFormat = "text", options: FormatTableOptions = {}): string {
  requireTable(table);
  requireOptions("formatTable", options, ["maxWidth", "digits", "notes"]);
  const { maxWidth, digits, notes = true } = options;
  const isCount = (x: unknown, most: number): boolean => typeof x === "number" && x >= 1 && x <= most;
  const whole = digits === undefined || (Number.isInteger(digits) && isCount(digits, 17));
  requireArgument(whole, "formatTable", "as digits a whole number from 1 to 17", digits, "or leave it out");
  const wide = maxWidth === undefined || isCount(maxWidth, Number.POSITIVE_INFINITY);
  requireArgument(wide, "formatTable", "as maxWidth a number of characters", maxWidth, "or leave it out");
  requireArgument(typeof notes === "boolean", "formatTable", "as notes true or false", notes, "or leave it out");
  switch (format) {
    case "text":
      return textTable(table, digits, notes, maxWidth);
    case "markdown":
      return markdownTable(table, digits ?? MOST_DIGITS, notes);
    case "csv":
      return csvTable(table);
    case "json":
      return jsonTable(table);
    case "latex":
      return latexTable(table, digits ?? MOST_DIGITS, notes);
    default: {
      const unknown: never = format;
      throw new GoodBasisError(
        "option",
        `formatTable: there is no format ${shown(unknown)}; give "text", "markdown", "csv", "json" or "latex"`,
        { format: unknown },
      );
    }
  }
}

/** A double has no more. */
const MOST_DIGITS = 17;

const CELLS: readonly unknown[] = ["none", "number", "bounded", "label", "text", "expansion"];

/** Refuses what is not built as a table is; the values in its cells are not looked at. */
function requireTable(table: unknown): void {
  const next = "pass what basisTable returns";
  const lists = ["columns", "rows", "notes"].every(
    (name) => isObject(table) && Array.isArray(Reflect.get(table, name)),
  );
  requireArgument(lists, "formatTable", "a table { unit, columns, rows, notes }", table, next);
  const { columns, rows } = table as { columns: readonly unknown[]; rows: readonly unknown[] };
  const isKind = (item: unknown): boolean => isObject(item) && "kind" in item && CELLS.includes(item.kind);
  const badColumn = columns.find((column) => !isKind(column) || !isObject(column) || !("title" in column));
  requireArgument(badColumn === undefined, "formatTable", "columns { key, title, kind, … }", badColumn, next);
  const badRow = rows.find(
    (row) => !isObject(row) || !("cells" in row) || !Array.isArray(row.cells) || !row.cells.every(isKind),
  );
  requireArgument(badRow === undefined, "formatTable", "rows { state, level, cells }", badRow, next);
}
