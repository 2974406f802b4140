import type { ReadProblem } from "../problem/read.js";
import { wrapProse } from "../report/characters.js";
import type { Table } from "../report/table.js";

const WIDTH = 100;

const INVENTED = "All numbers of this problem are invented.";

/** Title and note of a problem as lines above a result; the last one is empty unless there are none. */
export function headingLines({ title, note, invented }: ReadProblem): string[] {
  const lines = [
    ...(title === undefined ? [] : [title]),
    ...(note === undefined ? [] : wrapProse(note, WIDTH)),
    ...(invented ? [INVENTED] : []),
  ];
  return lines.length === 0 ? [] : [...lines, ""];
}

/** The table with title and origin of the problem ahead of its notes. */
export function withHeading(table: Table, { title, invented }: ReadProblem): Table {
  const ahead = [...(title === undefined ? [] : [`${title}.`]), ...(invented ? [INVENTED] : [])];
  return { ...table, notes: [...ahead, ...table.notes] };
}
