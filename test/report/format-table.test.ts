import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import { GoodBasisError } from "../../src/errors.js";
import { basisTable } from "../../src/report/basis-table.js";
import { textField } from "../../src/report/csv.js";
import { expansionText } from "../../src/report/expansion.js";
import { formatTable, type TableFormat } from "../../src/report/format-table.js";
import { latexText } from "../../src/report/latex.js";
import { escapeMarkdown } from "../../src/report/markdown.js";
import type { Cell, Table, TableColumn } from "../../src/report/table.js";
import { doublet, ring, stark } from "./problems.js";

/** A reader of RFC 4180, independent of the writer. */
function readCsv(text: string): string[][] {
  const records: string[][] = [[]];
  let field = "";
  let quoted = false;
  for (let k = 0; k < text.length; k++) {
    const c = text.charAt(k);
    if (quoted) {
      if (c !== '"') field += c;
      else if (text.charAt(k + 1) === '"') {
        field += c;
        k++;
      } else quoted = false;
    } else if (c === '"') {
      if (field !== "") throw new Error("a quote inside a bare field");
      quoted = true;
    } else if (c === ",") {
      records[records.length - 1]?.push(field);
      field = "";
    } else if (c === "\r" && text.charAt(k + 1) === "\n") {
      records[records.length - 1]?.push(field);
      field = "";
      records.push([]);
      k++;
    } else field += c;
  }
  records[records.length - 1]?.push(field);
  return records;
}

/** Cells of a line of a Markdown table: bars that no backslash escapes part them. */
const markdownCells = (line: string): number => line.replace(/\\[\s\S]/g, "").split("|").length - 2;

const column = (key: string, kind: TableColumn["kind"], more: Partial<TableColumn> = {}): TableColumn => ({
  key,
  title: key,
  remark: "",
  unit: "",
  kind,
  showsPlusMinus: kind === "bounded",
  perLevel: false,
  complex: false,
  ...more,
});

const FORMATS: readonly TableFormat[] = ["text", "markdown", "csv", "json", "latex"];

/** A small table by hand: two levels, three states. */
const small: Table = {
  unit: "cm⁻¹",
  columns: [
    column("level", "number", { perLevel: true }),
    column("E0", "bounded", { unit: "cm⁻¹", showsPlusMinus: false, perLevel: true }),
    column("label:Jz", "label", { title: "Jz" }),
    column("label:L2", "label", { title: "L2", remark: "descriptive" }),
    column("E1:V", "bounded", { title: "E1", unit: "cm⁻¹" }),
    column("E2:V·V", "bounded", { title: "E2", unit: "cm⁻¹" }),
    column("evidence", "text"),
    column("expansion", "expansion", { title: "state" }),
  ],
  rows: [
    row(
      0,
      0,
      0,
      -11.46,
      "1/2",
      2,
      [2 / 3, 4e-15],
      ["labels"],
      [
        [Math.sqrt(2 / 3), "1,−1/2"],
        [-Math.sqrt(1 / 3), "0,1/2"],
      ],
    ),
    row(1, 0, 0, -11.46, "−1/2", 2, [-12.5, 2e-14], ["V"], [[1, "a|b"]], 5, 0.0123),
    row(2, 1, 1, 5.73, "3/2", 6, undefined, ["none"], [[-1, "=x_y"]]),
  ],
  notes: ["L2: conserved by H0, names the states."],
};

function row(
  state: number,
  level: number,
  place: number,
  energy: number,
  jz: string,
  l2: number,
  shift: readonly [number, number] | undefined,
  [evidence]: readonly [string],
  terms: readonly (readonly [number, string])[],
  left = 0,
  weight = 0,
): Table["rows"][number] {
  const cells: Cell[] = [
    { kind: "number", value: place },
    { kind: "bounded", value: energy, plusMinus: 2e-14 },
    { kind: "label", label: { re: 0, im: 0, radius: 1e-15, text: jz, status: "declared", role: "conserved" } },
    {
      kind: "label",
      label: { re: l2, im: 0, radius: 0.5, text: `⟨${l2}⟩`, status: "not sharp", role: "descriptive" },
    },
    shift === undefined ? { kind: "none" } : { kind: "bounded", value: shift[0], plusMinus: shift[1] },
    { kind: "bounded", value: 0.00283, plusMinus: 0.00002 },
    { kind: "text", text: evidence },
    {
      kind: "expansion",
      terms: terms.map(([re, ket]) => ({ re, im: 0, ket })),
      leftOut: { terms: left, weight },
    },
  ];
  return { state, level, cells };
}

describe("text", () => {
  test("aligns points and ±, and rules off levels", () => {
    expect(formatTable(small, "text").split("\n")).toEqual([
      "level  E0        Jz        L2  E1            E2              evidence  state",
      "       [cm⁻¹]        (descr.)  [cm⁻¹]        [cm⁻¹]",
      "                               ±4e−9",
      "─".repeat(106),
      "    0  −11.46   1/2       ⟨2⟩    0.66666667  0.00283 ± 2e−5  labels    0.816497 |1,−1/2⟩ − 0.57735 |0,1/2⟩",
      "               −1/2       ⟨2⟩  −12.5         0.00283 ± 2e−5  V         |a|b⟩ … (+5, weight 0.013)",
      "┈".repeat(106),
      "    1    5.73   3/2       ⟨6⟩    —           0.00283 ± 2e−5  none      −|=x_y⟩",
      "",
      "± in the head of a column: it holds for every number below, rounding to 10 digits included; CSV and JSON carry each",
      "  number with a ± of its own.",
      "L2: conserved by H0, names the states.",
    ]);
  });

  test("fewer digits widen the ±", () => {
    expect(formatTable(small, "text", { digits: 3 })).toContain("0.667 ± 4e−4");
  });

  test("states one ± for a column only where that costs nothing, and never with digits given", () => {
    const shifts = (values: readonly (readonly [number, number])[]): Table => ({
      unit: "",
      columns: [column("E1:V", "bounded", { title: "E1" })],
      rows: values.map(([value, plusMinus], state) => ({
        state,
        level: state,
        cells: [{ kind: "bounded", value, plusMinus }],
      })),
      notes: [],
    });
    const fine = shifts([
      [31.68932, 1.4e-11],
      [-0.0107, 1e-12],
      [0, 0],
    ]);
    expect(formatTable(fine, "text", { notes: false }).split("\n")).toEqual([
      "E1",
      "±1.4e−11",
      "────────",
      "31.68932",
      "−0.0107",
      " 0",
    ]);
    expect(formatTable(fine, "text", { digits: 17 })).toContain("−0.0107  ± 1e−12");
    const coarse = shifts([
      [31.68932, 1e-7],
      [-0.0107, 1e-12],
    ]);
    expect(formatTable(coarse, "text")).toContain("31.68932 ± 1e−7");
    expect(formatTable(coarse, "text")).toContain("−0.0107  ± 1e−12");
    expect(formatTable(shifts([[1, 1e-14]]), "text")).toContain("1 ± 1e−14");
  });

  test("notes can be left out", () => {
    expect(formatTable(small, "text", { notes: false })).not.toContain("conserved by H0");
  });
});

describe("markdown", () => {
  test("escapes the bars of kets", () => {
    expect(formatTable(small, "markdown").split("\n")).toEqual([
      "| level | E0 [cm⁻¹] | Jz | L2 (descriptive) | E1 [cm⁻¹] | E2 [cm⁻¹] | evidence | state |",
      "| ---: | ---: | ---: | ---: | ---: | ---: | :--- | :--- |",
      "| 0 | −11.46 | 1/2 | ⟨2⟩ | 0.666666666666667 ± 5e−15 | 0.00283 ± 2e−5 | labels | 0.816497 \\|1,−1/2⟩ − 0.57735 \\|0,1/2⟩ |",
      "|  |  | −1/2 | ⟨2⟩ | −12.5 ± 2e−14 | 0.00283 ± 2e−5 | V | \\|a\\|b⟩ … (+5, weight 0.013) |",
      "| 1 | 5.73 | 3/2 | ⟨6⟩ | — | 0.00283 ± 2e−5 | none | −\\|=x\\_y⟩ |",
      "",
      "- L2: conserved by H0, names the states.",
    ]);
  });

  test("a backslash before a bar does not free it", () => {
    expect(escapeMarkdown("a\\|b\nc")).toBe("a\\\\\\|b␊c");
  });
});

describe("csv", () => {
  test("parts value and ±, keeps every digit, and guards text", () => {
    expect(formatTable(small, "csv").split("\r\n")).toEqual([
      "level,E0 [cm⁻¹],E0 ± [cm⁻¹],Jz,L2 (descriptive),E1 [cm⁻¹],E1 ± [cm⁻¹],E2 [cm⁻¹],E2 ± [cm⁻¹],evidence,state",
      '0,-11.46,2e-14,0.5,⟨2⟩,0.6666666666666666,4e-15,0.00283,0.00002,labels,"0.816497 |1,−1/2⟩ − 0.57735 |0,1/2⟩"',
      '0,-11.46,2e-14,-0.5,⟨2⟩,-12.5,2e-14,0.00283,0.00002,V,"|a|b⟩ … (+5, weight 0.013)"',
      "1,5.73,2e-14,1.5,⟨6⟩,,,0.00283,0.00002,none,−|=x_y⟩",
    ]);
  });

  test("has nothing that a spreadsheet takes for a date: fractions are decimals, safe orders two fields", () => {
    const label = (text: string): Cell => ({
      kind: "label",
      label: { re: 0, im: 0, radius: 0, text, status: "declared", role: "conserved" },
    });
    const safe = (text: string): Cell => ({ kind: "text", text });
    const rows = [
      [label("−3/4"), safe("2/0")],
      [label("1/3"), safe("all/all")],
      [label("3/2"), safe("1/none")],
      [label("exp(2πi·1/6)"), { kind: "none" }],
    ].map((cells, state) => ({ state, level: 0, cells: cells as Cell[] }));
    const columns = [column("label:Q", "label", { title: "Q" }), column("safe", "text", { title: "safe E/ψ" })];
    expect(formatTable({ unit: "", columns, rows, notes: [] }, "csv").split("\r\n")).toEqual([
      "Q,safe E,safe ψ",
      "-0.75,2,0",
      "0.3333333333333333,all,all",
      "1.5,1,none",
      "exp(2πi·1/6),,",
    ]);
  });

  test.each([
    ["=1+1", '"\'=1+1"'],
    ["+x", '"\'+x"'],
    ["-x", '"\'-x"'],
    ["@x", '"\'@x"'],
    ["\tx", '"\'\tx"'],
    ['a"b', '"a""b"'],
    ["a,b", '"a,b"'],
    ["a\nb", '"a\nb"'],
    ["plain", "plain"],
    ["", ""],
  ])("%j becomes %s", (text, field) => expect(textField(text)).toBe(field));
});

describe("json", () => {
  test("has numbers as numbers, and complex ones as { re, im }", () => {
    const json = JSON.parse(formatTable(small, "json"));
    expect(json.unit).toBe("cm⁻¹");
    expect(json.rows[0].at).toEqual({ state: 0, level: 0 });
    expect(json.rows[0]["E1:V"]).toEqual({ value: 2 / 3, plusMinus: 4e-15 });
    expect(json.rows[2]["E1:V"]).toBeNull();
    expect(json.rows[1].expansion).toEqual({
      terms: [{ ket: "a|b", coefficient: { re: 1, im: 0 } }],
      leftOut: { terms: 5, weight: 0.0123 },
    });
    const table = basisTable(findGoodBasis(ring()), { columns: ["labels"] });
    const rows = JSON.parse(formatTable(table, "json")).rows;
    expect(rows[1]["label:T"]).toMatchObject({ text: "exp(2πi·1/6)", status: "declared", role: "conserved" });
    expect(rows[1]["label:T"].value.im).toBeCloseTo(Math.sqrt(3) / 2, 12);
    expect(typeof rows[1]["label:R"].value).toBe("number");
  });

  test("what is not finite is null", () => {
    const table: Table = {
      ...small,
      columns: [column("E1", "bounded")],
      rows: [{ state: 0, level: 0, cells: [{ kind: "bounded", value: 1, plusMinus: Number.POSITIVE_INFINITY }] }],
    };
    expect(JSON.parse(formatTable(table, "json")).rows[0].E1).toEqual({ value: 1, plusMinus: null });
    expect(formatTable(table, "csv")).toBe("E1,E1 ±\r\n1,");
    expect(formatTable(table, "text", { notes: false }).split("\n")[2]).toBe("1 ± ∞");
  });
});

describe("latex", () => {
  test("is a plain tabular with kets, true minus signs and \\pm", () => {
    const unit = ["{[}cm$^", "{-1}$", "{]}"].join("");
    expect(formatTable(small, "latex").split("\n")).toEqual([
      "\\begin{tabular}{rrrrrrll}",
      "\\hline",
      `level & $E_0$ ${unit} & Jz & L2 (descriptive) & $E_1$ ${unit} & $E_2$ ${unit} & evidence & state ${"\\\\"}`,
      "\\hline",
      "$0$ & $-11.46$ & $1/2$ & $\\langle 2\\rangle$ & $0.666666666666667 \\pm 5\\times 10^{-15}$ & $0.00283 \\pm 2\\times 10^{-5}$ & labels & $0.816497 |1,-1/2\\rangle - 0.57735 |0,1/2\\rangle$ \\\\",
      " &  & $-1/2$ & $\\langle 2\\rangle$ & $-12.5 \\pm 2\\times 10^{-14}$ & $0.00283 \\pm 2\\times 10^{-5}$ & V & $|\\mathrm{a|b}\\rangle \\ldots (+5, \\mbox{weight }0.013)$ \\\\",
      "\\hline",
      "$1$ & $5.73$ & $3/2$ & $\\langle 6\\rangle$ & --- & $0.00283 \\pm 2\\times 10^{-5}$ & none & $-|\\mathrm{=x\\_y}\\rangle$ \\\\",
      "\\hline",
      "\\end{tabular}",
      "\\par L2: conserved by H0, names the states.",
    ]);
  });

  test("escapes every special", () => {
    expect(latexText("a_b & 50% #1 {x} $y$ ~ ^ \\ λ ⟨cm⁻¹⟩")).toBe(
      "a\\_b \\& 50\\% \\#1 \\{x\\} \\$y\\$ \\textasciitilde{} \\textasciicircum{} \\textbackslash{} $\\lambda$ " +
        "$\\langle$cm$^{-1}$$\\rangle$",
    );
  });

  test("translates roots of unity", () => {
    const table = basisTable(findGoodBasis(ring()), { columns: ["label:T"] });
    expect(formatTable(table, "latex")).toContain("$e^{2\\pi i\\cdot 1/6}$");
  });
});

describe("expansions", () => {
  const text = (terms: readonly (readonly [number, number, string])[], left = 0, weight = 0): string =>
    expansionText({
      terms: terms.map(([re, im, ket]) => ({ re, im, ket })),
      leftOut: { terms: left, weight },
    });
  const half = Math.SQRT1_2;

  test.each([
    [text([[1, 0, "a"]]), "|a⟩"],
    [text([[-1, 0, "a"]]), "−|a⟩"],
    [
      text([
        [half, 0, "a"],
        [0, -half, "b"],
      ]),
      "0.707107 |a⟩ − 0.707107i |b⟩",
    ],
    [
      text([
        [half, 0, "a"],
        [0.5, -0.5, "b"],
      ]),
      "0.707107 |a⟩ + (0.5−0.5i) |b⟩",
    ],
    [
      text(
        [
          [0.5, 0, "a"],
          [-0.5, 0, "b"],
          [0.5, 0, "c"],
        ],
        1,
        0.25,
      ),
      "0.5 (|a⟩ − |b⟩ + |c⟩) … (+1, weight 0.25)",
    ],
    [text([[1, 0, "a"]], 2, 3e-33), "|a⟩ … (+2, weight 3e−33)"],
    [text([], 3, 1), "… (+3, weight 1)"],
    [text([[0, 1, "a\nb"]]), "i |a␊b⟩"],
  ])("%s", (printed, expected) => expect(printed).toBe(expected));
});

describe("any table", () => {
  const name = fc.string({ minLength: 1, maxLength: 8, unit: "grapheme" });
  const nasty = fc.oneof(
    name,
    fc.constantFrom("=1", "+x", "-x", "@x", "a|b", 'a"b', "a,b", "a\r\nb", "\\", "a\\|b", "%&_#"),
  );
  const number = fc.oneof(fc.double({ noNaN: true, noDefaultInfinity: true }), fc.constantFrom(0, -0, 1e-300, 1e300));
  const cells = fc.record({
    value: number,
    plusMinus: fc.double({ min: 0, noNaN: true }),
    text: nasty,
    ket: nasty,
    re: fc.double({ min: -1, max: 1, noNaN: true }),
    im: fc.double({ min: -1, max: 1, noNaN: true }),
  });
  const tables = fc.tuple(nasty, fc.array(fc.tuple(fc.integer({ min: 0, max: 3 }), cells), { maxLength: 6 })).map(
    ([title, rows]): Table => ({
      unit: title,
      columns: [
        column("n", "number", { perLevel: true }),
        column("x", "bounded", { title, unit: title }),
        column("t", "text"),
        column("e", "expansion"),
      ],
      rows: rows.map(([level, { value, plusMinus, text, ket, re, im }], state) => ({
        state,
        level,
        cells: [
          { kind: "number", value: level },
          { kind: "bounded", value, plusMinus },
          { kind: "text", text },
          { kind: "expansion", terms: [{ re, im, ket }], leftOut: { terms: 0, weight: 0 } },
        ],
      })),
      notes: [],
    }),
  );
  const params = { seed: 314159, numRuns: 300 };

  test("parses back from CSV", () => {
    fc.assert(
      fc.property(tables, (table) => {
        const records = readCsv(formatTable(table, "csv"));
        expect(records).toHaveLength(table.rows.length + 1);
        for (const record of records) expect(record).toHaveLength(5);
        table.rows.forEach((own, r) => {
          const bounded = own.cells[1];
          const text = own.cells[2];
          if (bounded?.kind !== "bounded" || text?.kind !== "text") throw new Error("wrong kind");
          expect(Number(records[r + 1]?.[1])).toBe(bounded.value + 0);
          const field = records[r + 1]?.[3] ?? "";
          expect(/^[=+\-@]/.test(field)).toBe(false);
          expect([text.text, `'${text.text}`]).toContain(field);
        });
      }),
      params,
    );
  });

  test("has as many cells in every Markdown line, one line a row, and no NaN anywhere", () => {
    fc.assert(
      fc.property(tables, (table) => {
        const lines = formatTable(table, "markdown").split("\n");
        expect(lines).toHaveLength(table.rows.length + 2);
        for (const line of lines) expect(markdownCells(line)).toBe(4);
        const named = table.unit + JSON.stringify(table.rows);
        if (named.includes("NaN")) return;
        for (const format of FORMATS) expect(formatTable(table, format)).not.toMatch(/NaN|undefined/);
      }),
      params,
    );
  });

  test("opens no group in LaTeX that it does not close, and uses & for cells only", () => {
    fc.assert(
      fc.property(tables, (table) => {
        for (const line of formatTable(table, "latex").split("\n")) {
          const bare = line.replace(/\\(?:[a-zA-Z]+|[^a-zA-Z])/g, "");
          let depth = 0;
          for (const c of bare) {
            if (c === "{") depth++;
            if (c === "}") depth--;
            expect(depth).toBeGreaterThanOrEqual(0);
          }
          expect(depth).toBe(0);
          expect((bare.match(/\$/g) ?? []).length % 2).toBe(0);
          if (line.endsWith("\\\\")) expect((bare.match(/&/g) ?? []).length).toBe(3);
        }
      }),
      params,
    );
  });

  test("of a real basis is the same every time, in every format", () => {
    for (const problem of [stark(), ring(), doublet()]) {
      const make = (): string[] => {
        const table = basisTable<string>(findGoodBasis<string>(problem));
        return FORMATS.map((format) => formatTable(table, format));
      };
      expect(make()).toEqual(make());
    }
  });
});

test("misuse is named", () => {
  const code = (run: () => unknown): string => {
    try {
      run();
    } catch (error) {
      return error instanceof GoodBasisError ? error.code : String(error);
    }
    return "nothing thrown";
  };
  expect(code(() => formatTable(small, "html" as TableFormat))).toBe("option");
  expect(code(() => formatTable(small, "text", { digits: 0 }))).toBe("option");
  expect(code(() => formatTable(small, "text", { maxWidth: Number.NaN }))).toBe("option");
});
