import fc from "fast-check";
import { expect, test } from "vitest";
import { textWidth, visible, wrapProse } from "../../src/report/characters.js";
import { grid } from "../../src/report/grid.js";

test("decimal points and ± stand below each other", () => {
  const lines = grid(
    [
      { title: "n", align: "right" },
      { title: "E1", under: ["[Eh]"], align: "point" },
    ],
    [
      ["1", "−12.5 ± 4e−15"],
      ["10", "3 ± 1.2e−14"],
      ["2", "2e−9 ± 1e−14"],
      ["3", "—"],
      ["4", ""],
    ],
  );
  expect(lines).toEqual([
    " n  E1",
    "    [Eh]",
    "────────────────────",
    " 1  −12.5  ± 4e−15",
    "10    3    ± 1.2e−14",
    " 2    2e−9 ± 1e−14",
    " 3    —",
    " 4",
  ]);
});

test("combining marks take no column, arrows and bars take one", () => {
  expect(textWidth("ψ̃↑↓⟩")).toBe(4);
  expect(textWidth("𝟙⊗σ")).toBe(3);
  const lines = grid(
    [
      { title: "a", align: "left" },
      { title: "b", align: "left" },
    ],
    [
      ["ψ̃", "x"],
      ["ab", "y"],
    ],
  );
  expect(lines.slice(2)).toEqual(["ψ̃   x", "ab  y"]);
});

test("rules stand before the rows asked for, never before the first", () => {
  const lines = grid([{ title: "x", align: "left" }], [["a"], ["b"]], { rulesBefore: new Set([0, 1]), indent: "> " });
  expect(lines).toEqual(["> x", "> ─", "> a", "> ┈", "> b"]);
});

test("control characters become visible", () => {
  expect(visible("a\nb\tc\u007f\u0085")).toBe("a␊b␉c␡�");
});

test("prose keeps its width and its words, unless one word is too long", () => {
  expect(wrapProse("one two three", 8, "  ")).toEqual(["one two", "  three"]);
  expect(wrapProse("λ\u00a0=\u00a01 holds", 6)).toEqual(["λ = 1", "holds"]);
  const words = fc.array(fc.stringMatching(/^[a-zλψ]{1,9}$/), { minLength: 1, maxLength: 40 });
  fc.assert(
    fc.property(words, fc.integer({ min: 12, max: 60 }), (list, width) => {
      const lines = wrapProse(list.join(" "), width, "  ");
      return (
        lines.every((line) => textWidth(line) <= width) && lines.map((line) => line.trim()).join(" ") === list.join(" ")
      );
    }),
    { seed: 7 },
  );
});

test("a grid keeps its width where it can, and never loses a term", () => {
  const cell = Array.from({ length: 12 }, (_, k) => `${k % 2 === 0 ? "+" : "−"} 0.25 |ket ${k}⟩`).join(" ");
  const columns = [
    { title: "E0", align: "point" as const },
    { title: "state", align: "left" as const, wrap: "terms" as const },
  ];
  const lines = grid(columns, [["1.5", cell]], { maxWidth: 60 });
  expect(Math.max(...lines.map(textWidth))).toBeLessThanOrEqual(60);
  const rejoined = lines.slice(2).map((line) => line.replace("1.5", "").trim());
  expect(rejoined.join(" ")).toBe(cell);
  // numbers are never cut
  expect(grid(columns, [["1.234567890123456789", "|a⟩"]], { maxWidth: 10 })[2]).toBe("1.234567890123456789  |a⟩");
});
