import { describe, expect, test } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import type { Outcome } from "../../src/certify/outcome.js";
import { type ErrorCode, GoodBasisError } from "../../src/errors.js";
import { perturb } from "../../src/perturb/perturb.js";
import type { BasisColumn } from "../../src/report/basis-columns.js";
import { basisTable } from "../../src/report/basis-table.js";
import type { Cell } from "../../src/report/table.js";
import { doublet, ring, STARK, stark } from "./problems.js";

function good<K extends string>(outcome: Outcome<K>): Extract<Outcome<K>, { verdict: "good" }> {
  if (outcome.verdict !== "good") throw new Error(outcome.verdict);
  return outcome;
}

function code(run: () => unknown): ErrorCode | undefined {
  try {
    run();
  } catch (error) {
    if (error instanceof GoodBasisError) return error.code;
    throw error;
  }
  return undefined;
}

describe("columns", () => {
  const { basis, ...study } = good(findGoodBasis(stark(), { lambda: 0.01 }));

  test("a certified basis gets all of them, a study all but the second order", () => {
    const keys = [
      "level",
      "E0",
      "degeneracy",
      "label:L2",
      "label:Lz",
      "E1:V",
      "E2:V·V",
      "evidence",
      "safe",
      "expansion",
    ];
    expect(basisTable(basis).columns.map((column) => column.key)).toEqual(keys);
    expect(basisTable(study).columns.map((column) => column.key)).toEqual(keys.filter((key) => key !== "E2:V·V"));
  });

  test("can be chosen and ordered", () => {
    const table = basisTable(basis, { columns: ["expansion", "label:Lz", "state", "E0"] });
    expect(table.columns.map((column) => column.key)).toEqual(["expansion", "label:Lz", "state", "E0"]);
    expect(table.rows.map((row) => row.cells[2])).toEqual([0, 1, 2, 3, 4].map((value) => ({ kind: "number", value })));
  });

  test("carry unit, role and kind", () => {
    const table = basisTable(basis);
    const column = (key: string) => table.columns.find((own) => own.key === key);
    expect(column("label:L2")).toMatchObject({ title: "L2", remark: "descriptive", unit: "", kind: "label" });
    expect(column("label:Lz")).toMatchObject({ title: "Lz", remark: "" });
    expect(column("E1:V")).toMatchObject({ title: "E1", unit: "Eh", kind: "bounded", showsPlusMinus: true });
    expect(column("E0")).toMatchObject({ unit: "Eh", showsPlusMinus: false });
  });

  test("an operator that H0 breaks is marked, and a unitary label is complex", () => {
    const broken = basisTable(findGoodBasis(doublet()), { columns: ["label:Lz"] }).columns[0];
    expect(broken).toMatchObject({ remark: "broken", complex: false });
    const translation = basisTable(findGoodBasis(ring()), { columns: ["label:T"] }).columns[0];
    expect(translation).toMatchObject({ remark: "", complex: true });
  });

  test("two perturbations get a column each, and one for every product", () => {
    const both = good(
      findGoodBasis({ ...stark(), v: { E: STARK, B: { diagonal: [0, 0, -0.5, 0, 0.5] } } }, { lambda: 0.01 }),
    );
    const table = basisTable(both.basis, { columns: ["shift", "second"] });
    expect(table.columns.map((column) => column.title)).toEqual(["E1 E", "E1 B", "E2 E·E", "E2 E·B", "E2 B·B"]);
    // the field B alone does not tell 2s ± 2p0 apart, so their second order is refused and the cells stay empty
    expect(both.states.map((state) => state.safe.energies)).toEqual(["all", "all", 1, 1, "all"]);
    expect(table.rows[2]?.cells[3]).toEqual({ kind: "none" });
    const direct = perturb(both.basis, { select: [1] }).states[0]?.second;
    const mixed = table.rows[1]?.cells[3];
    if (mixed?.kind !== "bounded") throw new Error("no mixed term");
    expect(mixed.value).toBe((direct?.[0]?.[1]?.value ?? 0) + (direct?.[1]?.[0]?.value ?? 0));
    expect(mixed.plusMinus).toBeGreaterThanOrEqual(
      (direct?.[0]?.[1]?.plusMinus ?? 0) + (direct?.[1]?.[0]?.plusMinus ?? 0),
    );
  });

  test("refuse what they cannot give", () => {
    const unknown: readonly BasisColumn<"L2" | "Lz">[] = JSON.parse('["colour"]');
    const misspelt: readonly BasisColumn<"L2" | "Lz">[] = JSON.parse('["label:Lx"]');
    const alike: typeof basis = Object.assign(Object.create(null), {
      study,
      states: basis.states,
      levels: basis.levels,
    });
    expect(code(() => basisTable(basis, { columns: unknown }))).toBe("option");
    expect(code(() => basisTable(basis, { columns: misspelt }))).toBe("option");
    expect(code(() => basisTable(basis, { columns: ["E0", "E0"] }))).toBe("option");
    expect(code(() => basisTable(basis, { columns: ["labels", "label:Lz"] }))).toBe("option");
    expect(code(() => basisTable(study, { columns: ["second"] }))).toBe("not-certified");
    expect(code(() => basisTable(alike))).toBe("not-certified");
    expect(code(() => basisTable(basis, { terms: 0 }))).toBe("option");
    expect(code(() => basisTable(basis, { threshold: Number.NaN }))).toBe("option");
    expect(code(() => basisTable(basis, { levels: [2] }))).toBe("no-level");
  });
});

describe("cells", () => {
  const column = (cells: readonly (readonly Cell[])[], c: number) =>
    cells.map((row) => {
      const cell = row[c];
      return cell?.kind === "text" ? cell.text : cell?.kind;
    });

  test("say which link is the weakest", () => {
    const table = basisTable(findGoodBasis(stark(), { lambda: 0.01 }), { columns: ["evidence", "safe"] });
    const cells = table.rows.map((row) => row.cells);
    expect(column(cells, 0)).toEqual(["single", "labels", "V", "V", "labels"]);
    expect(column(cells, 1)).toEqual(["all/all", "all/all", "2/0", "2/0", "all/all"]);
    const open = basisTable(findGoodBasis(stark(), { depth: "labels", lambda: 0.01 }), {
      columns: ["evidence", "safe"],
    });
    expect(
      column(
        open.rows.map((row) => row.cells),
        0,
      ),
    ).toEqual(["single", "labels", "none", "none", "labels"]);
    expect(open.notes[0]).toBe("not good, so not certified: level 1.");
  });

  test("second-order shifts are those of perturb, and absent where they are not safe", () => {
    const { basis } = good(findGoodBasis(stark(), { lambda: 0.01 }));
    const shifts = perturb(basis).states.map((state) => state.second?.[0]?.[0]);
    const table = basisTable(basis, { columns: ["second"] });
    expect(table.rows.map((row) => row.cells[0])).toEqual(shifts.map((shift) => ({ kind: "bounded", ...shift })));
    // two states with equal first-order shifts and the same labels stay together
    const rotor = good(
      findGoodBasis(
        {
          h0: { diagonal: [0, 0, 1] },
          v: [
            [0, 0, 0.1],
            [0, 0, 0.1],
            [0.1, 0.1, 0],
          ],
        },
        { depth: "first order" },
      ),
    );
    const kinds = basisTable(rotor.basis, { columns: ["second"] });
    expect(kinds.rows.map((row) => row.cells[0]?.kind)).toEqual(["none", "none", "bounded"]);
    expect(kinds.notes).toContain("E2 —: the short second-order formula is not safe for this state.");
  });

  test("an expansion keeps its largest terms, in the order of the kets where they are equal, and weighs the rest", () => {
    const table = basisTable(findGoodBasis(ring()), { columns: ["expansion"], terms: 4, levels: [0] });
    const cell = table.rows[0]?.cells[0];
    if (cell?.kind !== "expansion") throw new Error("no expansion");
    expect(cell.terms.map((term) => term.ket)).toEqual(["C1", "C2", "C3", "C4"]);
    expect(cell.leftOut.terms).toBe(2);
    expect(cell.leftOut.weight).toBeCloseTo(1 / 3, 12);
  });

  test("coefficients below the threshold are left out and counted", () => {
    const table = basisTable(findGoodBasis(doublet()), { columns: ["expansion"], threshold: 0.6, levels: [0] });
    const cell = table.rows[0]?.cells[0];
    if (cell?.kind !== "expansion") throw new Error("no expansion");
    expect(cell.terms).toHaveLength(1);
    expect(cell.leftOut.terms).toBe(1);
    expect(cell.leftOut.weight).toBeCloseTo(1 / 3, 12);
  });

  test("weights of what is shown and left out add up to one", () => {
    for (const outcome of [findGoodBasis(doublet()), findGoodBasis(ring()), findGoodBasis(stark(), { lambda: 0.01 })]) {
      for (const terms of [1, 2, 6]) {
        for (const row of basisTable<string>(outcome, { columns: ["expansion"], terms }).rows) {
          const cell = row.cells[0];
          if (cell?.kind !== "expansion") throw new Error("no expansion");
          const shown = cell.terms.reduce((sum, { re, im }) => sum + re * re + im * im, 0);
          expect(shown + cell.leftOut.weight).toBeCloseTo(1, 12);
        }
      }
    }
  });

  test("notes explain what is shown, and nothing else", () => {
    const notes = basisTable(findGoodBasis(doublet()), { columns: ["labels"] }).notes;
    expect(notes).toEqual([
      "J2 and L2: the quantum number j is shown; the operator's eigenvalue is j(j + 1).",
      "J2: conserved by H0 but not by the perturbation; names the states, proves nothing.",
      "Lz: not conserved by H0; for information only.",
      "⟨…⟩: expectation value, the state is no eigenvector of this operator.",
    ]);
    expect(basisTable(findGoodBasis(doublet()), { columns: ["E0", "label:Jz"] }).notes).toEqual([]);
  });
});
