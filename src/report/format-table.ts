import { GoodBasisError } from "../errors.js";
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
  /** Most significant digits in text, Markdown and LaTeX, from 1 to 17; a ± grows to cover the rounding. Default 17. */
  readonly digits?: number;
  /** Whether the notes follow in text, Markdown and LaTeX. Default true. */
  readonly notes?: boolean;
}

/**
 * Sets a table.
 *
 * Text, Markdown and LaTeX print values as far as their ± supports; CSV (RFC 4180) and JSON carry every digit, with value and
 * ± in fields of their own. Units stand in the headers.
 *
 * @param table - from {@link basisTable}
 * @returns lines without a final line break; CSV records are separated by CR LF
 * @throws GoodBasisError `option` for an unknown format or digits outside 1 to 17
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
  const { maxWidth, digits = 17, notes = true } = options;
  if (!(Number.isInteger(digits) && digits >= 1 && digits <= 17)) {
    throw new GoodBasisError("option", `formatTable: digits is ${digits}; give a whole number from 1 to 17`, {
      digits,
    });
  }
  if (maxWidth !== undefined && !(maxWidth >= 1)) {
    throw new GoodBasisError("option", `formatTable: maxWidth is ${maxWidth}; give a number of characters`, {
      maxWidth,
    });
  }
  switch (format) {
    case "text":
      return textTable(table, digits, notes, maxWidth);
    case "markdown":
      return markdownTable(table, digits, notes);
    case "csv":
      return csvTable(table);
    case "json":
      return jsonTable(table);
    case "latex":
      return latexTable(table, digits, notes);
    default: {
      const unknown: never = format;
      throw new GoodBasisError(
        "option",
        `formatTable: there is no format ${JSON.stringify(unknown)}; give "text", "markdown", "csv", "json" or "latex"`,
        { format: unknown },
      );
    }
  }
}
