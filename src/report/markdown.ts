import { visible } from "./characters.js";
import { PLAIN_EXPANSION } from "./expansion.js";
import type { Table } from "./table.js";
import { bodyText, headText } from "./typeset-cell.js";

/** A table in GitHub's Markdown; bars inside kets and other active signs are escaped. */
export function markdownTable(table: Table, digits: number, notes: boolean): string {
  const line = (cells: readonly string[]): string => `| ${cells.join(" | ")} |`;
  const heads = table.columns.map((column) => escapeMarkdown(headText(column)));
  const rules = table.columns.map((column) =>
    column.kind === "text" || column.kind === "expansion" ? ":---" : "---:",
  );
  const body = bodyText(table, digits, PLAIN_EXPANSION).map((cells) => line(cells.map(escapeMarkdown)));
  const lines = [line(heads), line(rules), ...body];
  if (notes && table.notes.length > 0) lines.push("", ...table.notes.map((note) => `- ${escapeMarkdown(note)}`));
  return lines.join("\n");
}

/** Escapes what Markdown would act on inside a cell. */
export function escapeMarkdown(text: string): string {
  return visible(text).replace(/[\\|*_`<~]/g, (character) => `\\${character}`);
}
