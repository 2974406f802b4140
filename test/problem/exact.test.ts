import { describe, expect, it } from "vitest";
import type { Problem } from "../../src/audit/problem.js";
import { findGoodBasis } from "../../src/certify/find.js";
import { ExactOperator } from "../../src/exact/operator.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { productSpace } from "../../src/models/product-space.js";
import { isMatrixInput } from "../../src/operator/input.js";
import { Operator } from "../../src/operator/operator.js";
import { readProblem } from "../../src/problem/read.js";
import { writeProblem } from "../../src/problem/write.js";
import { errorOf, h0Of } from "./files.js";

const ROWS = [
  ["1/3", "-i*sqrt(2)"],
  ["i*sqrt(2)", 2],
];
const EXPECTED = ExactOperator.from(ROWS);
const SPACE = {
  space: [
    { name: "L", spin: 1 },
    { name: "S", spin: "1/2" },
    { name: "ring", spin: "1/2", count: 3 },
    { name: "x", oscillator: 3 },
    { name: "atom", dimension: 2 },
  ],
};

describe("exact numbers in a problem file", () => {
  it("come in every form of a matrix", () => {
    const forms = [
      ROWS,
      { rows: ROWS },
      { rows: ROWS, uncertainty: "exact" },
      {
        n: 2,
        triplets: [
          [0, 0, "1/3"],
          [0, 1, 0, "-sqrt(2)"],
          [1, 0, "i*sqrt(2)"],
          [1, 1, 2],
        ],
      },
    ];
    for (const form of forms) {
      const read = h0Of(form);
      expect(read.exact?.equals(EXPECTED)).toBe(true);
      expect(read.hash).toBe(Operator.from(EXPECTED).hash);
    }
    expect(h0Of({ diagonal: ["1/3", 0.5] }).exact?.equals(ExactOperator.diagonal(["1/3", "1/2"]))).toBe(true);
    const turn = h0Of({ permutation: [1, 0], phases: ["(1+i)/sqrt(2)", "(1-i)/sqrt(2)"] });
    expect(turn.exact?.entry(1, 0).text()).toBe("(1+i)/sqrt(2)");
    const bonds = [
      [0, 1],
      [1, 2],
    ];
    expect(h0Of({ hopping: bonds, amplitude: "-1/3" }, { n: 3 }).exact?.entry(1, 0).text()).toBe("-1/3");
    const flux = h0Of({ hopping: bonds, amplitudes: ["sqrt(2)", "i/2"] }, { n: 3 });
    expect(flux.exact?.entry(2, 1).text()).toBe("-i/2");
    const on = h0Of(
      {
        rows: [
          [0, "sqrt(2)"],
          ["sqrt(2)", 0],
        ],
        on: "S",
      },
      SPACE,
    );
    expect(on.exact?.count).toBe(on.n);
  });

  it("are coefficients of terms, and builders bring theirs", () => {
    const coupling = h0Of({ terms: [{ coefficient: "2/3", dot: ["L", "S"] }] }, { space: SPACE.space.slice(0, 2) });
    const [l, s] = [angularMomentum(1), angularMomentum(0.5)];
    const { embed } = productSpace([3, 2]);
    const dot = Operator.sum(
      embed(l.x, 0).times(embed(s.x, 1)),
      embed(l.y, 0).times(embed(s.y, 1)),
      embed(l.z, 0).times(embed(s.z, 1)),
    ).scale("2/3");
    expect(dot.exact !== undefined && coupling.exact?.equals(dot.exact)).toBe(true);
    for (const form of [
      "L.x + S.x",
      "x.x^4",
      "ring.total.y",
      {
        terms: [{ coefficient: "1/3", product: ["x.x", "ring[1].plus"] }, { coefficient: -2 }].map((t) => ({
          product: [],
          ...t,
        })),
      },
      { translation: "ring" },
      { reflection: "ring" },
      { sitePermutation: [2, 0, 1], on: "ring" },
      { exchange: ["ring[0]", "ring[2]"] },
    ]) {
      expect(h0Of(form, SPACE).isKnownExactly, JSON.stringify(form)).toBe(true);
    }
    expect(h0Of({ terms: [{ coefficient: 0.1, product: ["L.x"] }] }, SPACE).isKnownExactly).toBe(false);
    expect(h0Of({ terms: [{ coefficient: "0.1", product: ["L.x"] }] }, SPACE).isKnownExactly).toBe(false);
  });

  it("leave decimals as well known as they were, with the same hash", () => {
    const decimals = [
      [0.1, "1+2i"],
      ["1-2i", "0.3"],
    ];
    const read = h0Of(decimals);
    expect(read.isKnownExactly).toBe(false);
    expect(read.hash).toBe(
      Operator.from({
        re: [
          [0.1, 1],
          [1, 0.3],
        ],
        im: [
          [0, 2],
          [-2, 0],
        ],
      }).hash,
    );
    const stated = h0Of({ rows: decimals, uncertainty: "exact" });
    expect(stated.exact?.entry(1, 1).text()).toBe("3/10");
    expect(stated.exact?.entry(0, 0).equals(0.1)).toBe(true);
    expect(h0Of({ rows: [["1/3"]], uncertainty: { absolute: 1e-3 } }).isKnownExactly).toBe(false);
  });

  it("are refused with line and field", () => {
    const bad = (h0: unknown, fields = {}): string => errorOf(() => h0Of(h0, fields));
    expect(
      bad([
        ["1/3", "sqrt(x)"],
        [0, 0],
      ]),
    ).toMatch(/^file: p\.json, line 7, h0\[0\]\[1\]: expected .*got "sqrt\(x\)"; .*at character 6/);
    expect(
      bad([
        ["1/3", "1/0"],
        [0, 0],
      ]),
    ).toMatch(/^file: p\.json, line 7, h0\[0\]\[1\]: .*divides by zero/);
    expect(bad({ diagonal: ["1/3", null] })).toMatch(/h0\.diagonal\[1\]: expected a finite number, .*got null/);
    expect(bad({ n: 1, triplets: [[0, 0, "q"]] })).toMatch(/h0\.triplets\[0\]\[2\]: expected .*got "q"/);
    expect(bad({ n: 1, triplets: [[0, 0, "1/3"]], radii: [0] })).toMatch(/h0\.radii: expected triplets of numbers/);
    expect(bad({ n: 1, triplets: [[0, 0, 1]], exact: ["1/3"] })).toMatch(
      /h0\.exact\[0\]: expected a number within .*got "1\/3"/,
    );
    expect(bad({ n: 1, triplets: [[0, 0, 1]], exact: [] })).toMatch(
      /h0\.exact: expected one exact number for each of the 1/,
    );
    expect(bad({ hopping: [[0, 1]], amplitude: "1/" }, { n: 2 })).toMatch(/h0\.amplitude: expected .*got "1\/"/);
    expect(bad({ terms: [{ coefficient: "a", product: [] }] }, { n: 2 })).toMatch(
      /h0\.terms\[0\]\.coefficient: expected a number/,
    );
    expect(bad({ diagonal: ["1e400/3"] })).toMatch(/^not-finite: p\.json, line \d+, h0: .*beyond the range of doubles/);
  });
});

describe("exact operators that are written", () => {
  const [l, s] = [angularMomentum(1), angularMomentum(1.5)];
  const { embed } = productSpace([3, 4]);
  const dot = Operator.sum(
    embed(l.x, 0).times(embed(s.x, 1)),
    embed(l.y, 0).times(embed(s.y, 1)),
    embed(l.z, 0).times(embed(s.z, 1)),
  );
  const jx = embed(l.x, 0).plus(embed(s.x, 1));
  const problem: Problem = {
    h0: dot.scale("1/3"),
    v: {
      field: embed(l.z, 0).plus(embed(s.z, 1).scale("sqrt(2)")),
      texts: Operator.diagonal(new Array<string>(12).fill("1/7")),
    },
    candidates: {
      Jx: { operator: jx, label: "m" },
      turn: { permutation: [1, 0, 2, 3, 4, 5, 6, 7, 8, 9, 10, 11], phases: ["i", "-i", 1, 1, 1, 1, 1, 1, 1, 1, 1, 1] },
    },
  };

  it("are read back with the same bits and the same exact numbers", () => {
    const text = writeProblem(problem);
    const { problem: read } = readProblem(text);
    const pairs: (readonly [unknown, unknown])[] = [[problem.h0, read.h0]];
    if (isMatrixInput(problem.v) || isMatrixInput(read.v)) throw new Error("one perturbation");
    pairs.push(
      [problem.v["field"], read.v["field"]],
      [problem.v["texts"], read.v["texts"]],
      [jx, operatorOf(read, "Jx")],
    );
    pairs.push([problem.candidates?.["turn"], operatorOf(read, "turn")]);
    for (const [given, back] of pairs) {
      if (!isMatrixInput(given) || !isMatrixInput(back)) throw new Error("no matrix");
      const [a, b] = [Operator.from(given), Operator.from(back)];
      expect(b.hash).toBe(a.hash);
      expect(a.exact !== undefined && b.exact?.equals(a.exact)).toBe(true);
    }
    expect(text).toContain('"exact":[');
    expect(text).toContain('[0,0,"1/7"]');
    expect(writeProblem(read)).toBe(text);
    expect(findGoodBasis(read).certificate()).toEqual(findGoodBasis(problem).certificate());
  });
});

function operatorOf(problem: Problem, name: string): unknown {
  const candidate = problem.candidates?.[name];
  return candidate !== undefined && "operator" in candidate ? candidate.operator : candidate;
}
