import type { Cell, Table, TableColumn } from "./table.js";

type Json = string | number | boolean | null | readonly Json[] | { readonly [key: string]: Json };

/**
 * A table as JSON: `unit`, `columns`, `rows` (each an object by column key, next to `state` and `level` of the study under
 * `at`) and `notes`.
 *
 * Numbers are numbers; a value with a ± is `{ value, plusMinus }`; a label `{ text, value, plusMinus, status, role }`, its
 * value `{ re, im }` for a candidate that is not Hermitian; coefficients of an expansion are `{ re, im }`. What is not there
 * or not finite is null.
 */
export function jsonTable(table: Table): string {
  const json: Json = {
    unit: table.unit,
    columns: table.columns.map(({ key, title, remark, unit, kind }): Json => ({ key, title, remark, unit, kind })),
    rows: table.rows.map(
      (row): Json => ({
        at: { state: row.state, level: row.level },
        ...Object.fromEntries(
          table.columns.map((column, c): [string, Json] => [column.key, value(row.cells[c], column)]),
        ),
      }),
    ),
    notes: table.notes,
  };
  return JSON.stringify(json, undefined, 2);
}

function finite(x: number): number | null {
  return Number.isFinite(x) ? x : null;
}

function value(cell: Cell | undefined, column: TableColumn): Json {
  if (cell === undefined) return null;
  switch (cell.kind) {
    case "none":
      return null;
    case "number":
      return finite(cell.value);
    case "bounded":
      return { value: finite(cell.value), plusMinus: finite(cell.plusMinus) };
    case "label": {
      const { label } = cell;
      return {
        text: label.text,
        value: column.complex ? { re: finite(label.re), im: finite(label.im) } : finite(label.re),
        // for a label that is not sharp: the standard deviation
        plusMinus: finite(label.radius),
        status: label.status,
        role: label.role,
      };
    }
    case "text":
      return cell.text;
    case "expansion":
      return {
        terms: cell.terms.map(({ ket, re, im }): Json => ({ ket, coefficient: { re: finite(re), im: finite(im) } })),
        leftOut: { terms: cell.leftOut.terms, weight: finite(cell.leftOut.weight) },
      };
    default:
      return cell satisfies never;
  }
}
