import { expansionText } from "./expansion.js";
import { fractionValue, labelText } from "./labels.js";
import type { Cell, Table, TableColumn } from "./table.js";
import { headText } from "./typeset-cell.js";

/**
 * Comma-separated values after RFC 4180, records separated by CR LF, with one header line.
 *
 * Numbers carry every digit and an ASCII minus sign; a value with a ± takes two fields, and so do the two safe orders. Labels that
 * are fractions are decimal numbers, the doubles nearest to them: exact where the denominator is a power of two. A spreadsheet
 * would take 3/4 or 2/0 for a date. Text that a spreadsheet would take for a formula (it begins with = + - @, a tab or a line break) is
 * preceded by an apostrophe and quoted.
 */
export function csvTable(table: Table): string {
  const heads = table.columns.flatMap((column) => {
    const head = headText(column);
    if (isSafe(column)) return [textField("safe E"), textField("safe ψ")];
    if (column.kind !== "bounded") return [textField(head)];
    return [textField(head), textField(headText({ ...column, title: `${column.title} ±` }))];
  });
  const records = table.rows.map((row) =>
    table.columns.flatMap((column, c) => fields(row.cells[c] ?? { kind: "none" }, column)),
  );
  return [heads, ...records].map((record) => record.join(",")).join("\r\n");
}

/** The column of safe orders, "2/0" for energies and states. */
function isSafe({ key }: TableColumn): boolean {
  return key === "safe";
}

function fields(cell: Cell, column: TableColumn): string[] {
  switch (cell.kind) {
    case "none":
      return column.kind === "bounded" || isSafe(column) ? ["", ""] : [""];
    case "number":
      return [numberField(cell.value)];
    case "bounded":
      return [numberField(cell.value), numberField(cell.plusMinus)];
    case "label": {
      const { label } = cell;
      const number = fractionValue(label.text);
      if (number !== undefined && label.status !== "measured") return [numberField(number)];
      return [label.status === "measured" && label.im === 0 ? numberField(label.re) : textField(labelText(label))];
    }
    case "text":
      return isSafe(column) ? cell.text.split("/").map(textField) : [textField(cell.text)];
    case "expansion":
      return [textField(expansionText(cell))];
    default:
      return cell satisfies never;
  }
}

/** Every digit of a double; nothing for a value that is not finite. */
function numberField(x: number): string {
  return Number.isFinite(x) ? String(x) : "";
}

/** A field of text, quoted where it must be. */
export function textField(text: string): string {
  const guarded = /^[=+\-@\t\r\n]/.test(text) ? `'${text}` : text;
  return guarded !== text || /[",\r\n]/.test(guarded) ? `"${guarded.replaceAll('"', '""')}"` : guarded;
}
