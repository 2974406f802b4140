import type { Cell, Table } from "../report/table.js";

/** A table of findings that are no states, for formatTable. */
export function plainTable(
  unit: string,
  columns: readonly { readonly key: string; readonly title: string; readonly kind: "text" | "number" }[],
  rows: readonly (readonly (string | number)[])[],
): Table {
  return {
    unit,
    columns: columns.map((column) => ({
      ...column,
      unit: "",
      remark: "",
      showsPlusMinus: false,
      perLevel: false,
      complex: false,
    })),
    rows: rows.map((row, k) => ({
      state: k,
      level: k,
      cells: row.map((cell): Cell => {
        if (cell === "") return { kind: "none" };
        return typeof cell === "string" ? { kind: "text", text: cell } : { kind: "number", value: cell };
      }),
    })),
    notes: [],
  };
}
