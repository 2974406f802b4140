import { visible } from "./characters.js";
import { type ExpansionStyle, expansionText, PLAIN_EXPANSION } from "./expansion.js";
import { labelText } from "./labels.js";
import { boundedText, NOTHING, numberText, supportedText } from "./numbers.js";
import type { Cell, Table, TableColumn } from "./table.js";

/** A cell as formats for the eye print it. */
export function cellText(
  cell: Cell,
  column: TableColumn,
  digits: number,
  style: ExpansionStyle = PLAIN_EXPANSION,
): string {
  switch (cell.kind) {
    case "none":
      return NOTHING;
    case "number":
      return numberText(cell.value, Math.min(digits, 12));
    case "bounded": {
      if (!column.showsPlusMinus) return supportedText(cell.value, cell.plusMinus, Math.min(digits, 12));
      const { value, plusMinus } = boundedText(cell.value, cell.plusMinus, digits);
      return `${value} ± ${plusMinus}`;
    }
    case "label":
      return visible(labelText(cell.label));
    case "text":
      return visible(cell.text);
    case "expansion":
      return expansionText(cell, style);
    default:
      return cell satisfies never;
  }
}

/** The head of a column with its remark and unit: "J2 (descriptive)", "E0 [cm⁻¹]". */
export function headText(column: TableColumn): string {
  const remark = headRemark(column);
  return visible(remark === "" ? column.title : `${column.title} ${remark}`);
}

/** What stands beside or below a title. */
export function headRemark({ remark, unit }: TableColumn): string {
  return [remark === "" ? "" : `(${remark})`, unit === "" ? "" : `[${unit}]`].filter((part) => part !== "").join(" ");
}

/** All cells as text; what the row above in the same level says already is left out in columns that speak of levels. */
export function bodyText(table: Table, digits: number, style: ExpansionStyle = PLAIN_EXPANSION): string[][] {
  const full = table.rows.map((row) =>
    table.columns.map((column, c) => cellText(row.cells[c] ?? { kind: "none" }, column, digits, style)),
  );
  return full.map((cells, r) => {
    const sameLevel = r > 0 && table.rows[r - 1]?.level === table.rows[r]?.level;
    return cells.map((cell, c) =>
      sameLevel && table.columns[c]?.perLevel === true && full[r - 1]?.[c] === cell ? "" : cell,
    );
  });
}

/** Whether a row begins another level than the row above. */
export function levelStarts(table: Table): ReadonlySet<number> {
  const starts = table.rows.flatMap((row, r) => (r > 0 && table.rows[r - 1]?.level !== row.level ? [r] : []));
  // rules between single states would only be noise
  return new Set(starts.length + 1 < table.rows.length ? starts : []);
}
