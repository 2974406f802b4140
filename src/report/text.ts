import { wrapProse } from "./characters.js";
import { type GridColumn, grid } from "./grid.js";
import type { Table, TableColumn } from "./table.js";
import { bodyText, headText, levelStarts } from "./typeset-cell.js";

const NOTES_WIDTH = 100;

/** Aligned columns with rules between levels, and the notes below. */
export function textTable(table: Table, digits: number, notes: boolean, maxWidth: number | undefined): string {
  const lines = grid(table.columns.map(gridColumn), bodyText(table, digits), {
    rulesBefore: levelStarts(table),
    ...(maxWidth === undefined ? {} : { maxWidth }),
  });
  if (notes && table.notes.length > 0) {
    lines.push("", ...table.notes.flatMap((note) => wrapProse(note, maxWidth ?? NOTES_WIDTH, "  ")));
  }
  return lines.join("\n");
}

function gridColumn(column: TableColumn): GridColumn {
  const title = headText(column);
  switch (column.kind) {
    case "number":
    case "label":
      return { title, align: "right" };
    case "bounded":
      return { title, align: "point" };
    case "text":
      return { title, align: "left" };
    case "expansion":
      return { title, align: "left", wrap: "terms" };
    default:
      return column.kind satisfies never;
  }
}
