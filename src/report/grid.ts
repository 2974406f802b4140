import { padLeft, padRight, textWidth, wrapChunks } from "./characters.js";

/** How a column of plain text is set; `point` aligns decimal points, and the ± behind them. */
export type Alignment = "left" | "right" | "point";

/** A column of a plain-text grid. */
export interface GridColumn {
  readonly title: string;
  /** Further lines of the title. */
  readonly under?: readonly string[];
  readonly align: Alignment;
  /** Where its cells may be broken when the grid is too wide; never, if absent. */
  readonly wrap?: "words" | "terms";
}

/** Options of {@link grid}. */
export interface GridOptions {
  /** Lines are kept within this by breaking cells that may be broken; numbers are never cut. */
  readonly maxWidth?: number;
  /** Rows (by number) before which a rule is drawn. */
  readonly rulesBefore?: ReadonlySet<number>;
  /** What every line begins with. */
  readonly indent?: string;
}

const GAP = "  ";

/** A column is not made narrower than this: one short word a line reads worse than a line too long. */
const LEAST_WIDTH = 36;

/** Sets rows of cells in aligned columns under their titles; returns the lines, without blanks at their ends. */
export function grid(
  columns: readonly GridColumn[],
  rows: readonly (readonly string[])[],
  options: GridOptions = {},
): string[] {
  const { indent = "", rulesBefore } = options;
  const set = columns.map((column, c) => {
    const cells = rows.map((row) => row[c] ?? "");
    return column.align === "point" ? alignPoints(cells) : cells;
  });
  const widths = columns.map((column, c) => Math.max(titleWidth(column), ...(set[c] ?? []).map(textWidth)));
  if (options.maxWidth !== undefined) shrink(columns, set, widths, options.maxWidth - textWidth(indent));
  const total = widths.reduce((sum, width) => sum + width, GAP.length * Math.max(0, widths.length - 1));
  const line = (cells: readonly string[]): string => {
    const padded = cells.map((cell, c) => {
      const width = widths[c] ?? 0;
      return columns[c]?.align === "right" ? padLeft(cell, width) : padRight(cell, width);
    });
    return (indent + padded.join(GAP)).trimEnd();
  };
  const rule = (stroke: string): string => indent + stroke.repeat(total);
  const lines = [line(columns.map((column) => column.title))];
  const heads = Math.max(0, ...columns.map(({ under = [] }) => under.length));
  for (let k = 0; k < heads; k++) {
    const below = columns.map(({ under = [] }) => under[k] ?? "");
    if (below.some((title) => title !== "")) lines.push(line(below));
  }
  lines.push(rule("─"));
  rows.forEach((_, r) => {
    if (r > 0 && rulesBefore?.has(r) === true) lines.push(rule("┈"));
    const broken = columns.map((column, c) => breakCell(set[c]?.[r] ?? "", column.wrap, widths[c] ?? 0));
    const height = Math.max(1, ...broken.map((part) => part.length));
    for (let k = 0; k < height; k++) lines.push(line(broken.map((part) => part[k] ?? "")));
  });
  return lines;
}

function titleWidth({ title, under = [] }: GridColumn): number {
  return Math.max(textWidth(title), ...under.map(textWidth));
}

/** Takes width from the columns whose cells may be broken, the widest first, until the grid fits or cannot shrink further. */
function shrink(
  columns: readonly GridColumn[],
  set: readonly (readonly string[])[],
  widths: number[],
  maxWidth: number,
): void {
  const least = columns.map((column, c) =>
    column.wrap === undefined
      ? (widths[c] ?? 0)
      : Math.min(
          widths[c] ?? 0,
          Math.max(
            LEAST_WIDTH,
            titleWidth(column),
            ...(set[c] ?? []).flatMap((cell) => chunksOf(cell, column.wrap).map((chunk) => textWidth(chunk) + 2)),
          ),
        ),
  );
  let excess = widths.reduce((sum, width) => sum + width, GAP.length * Math.max(0, widths.length - 1)) - maxWidth;
  const order = widths.map((_, c) => c).sort((a, b) => (widths[b] ?? 0) - (widths[a] ?? 0) || a - b);
  for (const c of order) {
    const give = Math.min(Math.max(0, excess), Math.max(0, (widths[c] ?? 0) - (least[c] ?? 0)));
    widths[c] = (widths[c] ?? 0) - give;
    excess -= give;
  }
}

function chunksOf(cell: string, wrap: GridColumn["wrap"]): string[] {
  return wrap === "words" ? cell.split(" ") : cell.split(/ (?=[+−…] )/u);
}

function breakCell(cell: string, wrap: GridColumn["wrap"], width: number): string[] {
  if (wrap === undefined || textWidth(cell) <= width) return [cell];
  return wrapChunks(chunksOf(cell, wrap), " ", width, wrap === "terms" ? "  " : "");
}

/** Pads numbers so that their decimal points, and the ± behind them, stand below each other. */
function alignPoints(cells: readonly string[]): string[] {
  const parts = cells.map((cell) => {
    const [value = "", plusMinus] = cell.split(" ± ");
    const point = value.indexOf(".");
    const whole = point < 0 ? wholeLength(value) : point;
    return { whole: value.slice(0, whole), rest: value.slice(whole), plusMinus };
  });
  const whole = Math.max(0, ...parts.map((part) => textWidth(part.whole)));
  const rest = Math.max(0, ...parts.map((part) => textWidth(part.rest)));
  return parts.map((part) => {
    if (part.whole === "" && part.rest === "") return "";
    const value = padLeft(part.whole, whole) + part.rest;
    return part.plusMinus === undefined ? value : `${padRight(value, whole + rest)} ± ${part.plusMinus}`;
  });
}

/** The exponent of "2e−9" stands behind the point that is not there. */
function wholeLength(value: string): number {
  const exponent = value.search(/e[−\d]/u);
  return exponent < 0 ? value.length : exponent;
}
