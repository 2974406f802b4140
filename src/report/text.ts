import { visible, wrapProse } from "./characters.js";
import { type GridColumn, grid } from "./grid.js";
import type { Table, TableColumn } from "./table.js";
import { bodyText, headRemark, levelStarts } from "./typeset-cell.js";

const DEFAULT_WIDTH = 120;

/** Aligned columns with rules between levels, and the notes below. */
export function textTable(table: Table, digits: number, notes: boolean, maxWidth: number = DEFAULT_WIDTH): string {
  const lines = grid(table.columns.map(gridColumn), bodyText(table, digits), {
    rulesBefore: levelStarts(table),
    maxWidth,
  });
  if (notes && table.notes.length > 0) {
    lines.push("", ...table.notes.flatMap((note) => wrapProse(note, maxWidth, "  ")));
  }
  return lines.join("\n");
}

function gridColumn(column: TableColumn): GridColumn {
  const title = visible(column.title);
  const under = visible(headRemark(column));
  switch (column.kind) {
    case "number":
    case "label":
      return { title, under, align: "right" };
    case "bounded":
      return { title, under, align: "point" };
    case "text":
      return { title, under, align: "left" };
    case "expansion":
      return { title, under, align: "left", wrap: "terms" };
    default:
      return column.kind satisfies never;
  }
}
