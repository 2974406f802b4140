import { visible, wrapProse } from "./characters.js";
import { type GridColumn, grid } from "./grid.js";
import { commonBound, NOTHING } from "./numbers.js";
import type { Table, TableColumn } from "./table.js";
import { bodyText, headRemark, levelStarts } from "./typeset-cell.js";

const DEFAULT_WIDTH = 120;

/** Most digits of a column that states its ± once. */
const COMMON_DIGITS = 10;

const COMMON_NOTE =
  `± in the head of a column: it holds for every number below, rounding to ${COMMON_DIGITS} digits included; CSV and JSON ` +
  "carry each number with a ± of its own.";

/** Aligned columns with rules between levels, and the notes below. */
export function textTable(
  table: Table,
  digits: number | undefined,
  notes: boolean,
  maxWidth: number = DEFAULT_WIDTH,
): string {
  const body = bodyText(table, digits ?? 17);
  const common = table.columns.map((column, c) =>
    digits === undefined ? stateOnce(table, column, c, body) : undefined,
  );
  const lines = grid(
    table.columns.map((column, c) => gridColumn(column, common[c])),
    body,
    { rulesBefore: levelStarts(table), maxWidth },
  );
  const all = common.some((bound) => bound !== undefined) ? [COMMON_NOTE, ...table.notes] : table.notes;
  if (notes && all.length > 0) lines.push("", ...all.flatMap((note) => wrapProse(note, maxWidth, "  ")));
  return lines.join("\n");
}

/** Rewrites a column whose numbers can share one ±, and returns that ±. */
function stateOnce(table: Table, { showsPlusMinus }: TableColumn, c: number, body: string[][]): string | undefined {
  if (!showsPlusMinus) return undefined;
  const bounded = table.rows.flatMap((row, r) => {
    const cell = row.cells[c];
    return cell?.kind === "bounded" ? [{ r, value: cell.value, plusMinus: cell.plusMinus }] : [];
  });
  const found = commonBound(bounded, COMMON_DIGITS);
  if (found === undefined) return undefined;
  for (const [k, { r }] of bounded.entries()) {
    const row = body[r];
    if (row !== undefined) row[c] = found.values[k] ?? NOTHING;
  }
  return found.plusMinus;
}

function gridColumn(column: TableColumn, plusMinus: string | undefined): GridColumn {
  const title = visible(column.title);
  const remark = visible(headRemark(column)).replace("(descriptive)", "(descr.)");
  switch (column.kind) {
    case "number":
    case "label":
      return { title, under: [remark], align: "right" };
    case "bounded":
      return { title, under: plusMinus === undefined ? [remark] : [remark, `±${plusMinus}`], align: "point" };
    case "text": {
      // "safe E/ψ" takes two lines
      const [first = "", ...rest] = title.split(" ");
      return { title: first, under: [rest.join(" ")], align: "left" };
    }
    case "expansion":
      return { title, under: [remark], align: "left", wrap: "terms" };
    default:
      return column.kind satisfies never;
  }
}
