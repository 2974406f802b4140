import { describe, expect, it } from "vitest";
import { findGoodBasis, formatOutcome, GoodBasisError, Operator, recheck, validateBasis } from "../../src/index.js";

const h0 = Operator.diagonal([1, 1, 2]);
const v = Operator.from([
  [-1, 0, 0],
  [0, 0, 1],
  [0, 1, 0],
]);
const A = Operator.diagonal([1, 0, 0]);
const eye = [
  [1, 0, 0],
  [0, 1, 0],
  [0, 0, 1],
];

/** What plain JavaScript would hand over. */
function untyped(value: unknown): never {
  return value as never;
}

function codeOf(attempt: () => unknown): string {
  try {
    attempt();
  } catch (error) {
    if (error instanceof GoodBasisError) {
      expect(error.message.length).toBeGreaterThan(20);
      return error.code;
    }
    return `raw ${String(error)}`;
  }
  return "nothing thrown";
}

describe("options of findGoodBasis", () => {
  it.each([
    ["null for options", null],
    ["a number for options", 5],
    ["levels in words", { levels: "lowest" }],
    ["levels as a list", { levels: [0] }],
    ["no lowest level", { levels: { lowest: 0 } }],
    ["levels = null", { levels: null }],
    ["depth = null", { depth: null }],
    ["resolution = null", { resolution: null }],
    ["λ = null", { lambda: null }],
    ["levelWidth = null", { levelWidth: null }],
    ["onProgress = null", { onProgress: null }],
    ["a misspelt choice of levels", { levels: { lowset: 1 } }],
    ["two choices of levels", { levels: { lowest: 1, from: 0, to: 3 } }],
    ["a count that is null", { levels: { nearest: 1, count: null } }],
    ["half a level", { levels: { lowest: 1.5 } }],
    ["lowest as text", { levels: { lowest: "2" } }],
    ["nearest to NaN", { levels: { nearest: Number.NaN } }],
    ["nearest to text", { levels: { nearest: "1" } }],
    ["a fraction of levels near", { levels: { nearest: 1, count: 0.5 } }],
    ["a window of text", { levels: { from: "a", to: "b" } }],
    ["a window without a start", { levels: { from: undefined, to: 3 } }],
    ["a window from NaN", { levels: { from: Number.NaN, to: 3 } }],
    ["a window upside down", { levels: { from: 3, to: 1 } }],
    ["an empty object for levels", { levels: {} }],
    ["an unknown depth", { depth: "third order" }],
    ["a depth by number", { depth: 2 }],
    ["λ = NaN", { lambda: Number.NaN }],
    ["λ = 0", { lambda: 0 }],
    ["λ < 0", { lambda: -1 }],
    ["λ = ∞", { lambda: Number.POSITIVE_INFINITY }],
    ["λ as text", { lambda: "1" }],
    ["refuseAbove = 0", { refuseAbove: 0 }],
    ["refuseAbove = null", { refuseAbove: null }],
    ["resolution = 0", { resolution: 0 }],
    ["resolution = 1", { resolution: 1 }],
    ["resolution < 0", { resolution: -1e-10 }],
    ["resolution = NaN", { resolution: Number.NaN }],
    ["resolution as text", { resolution: "0.1" }],
    ["levelWidth < 0", { levelWidth: -1 }],
    ["levelWidth = NaN", { levelWidth: Number.NaN }],
    ["levelWidth = ∞", { levelWidth: Number.POSITIVE_INFINITY }],
    ["levelWidth as text", { levelWidth: "1" }],
    ["onProgress that is no function", { onProgress: 5 }],
  ])("%s", (_, options) => {
    expect(codeOf(() => findGoodBasis({ h0, v, candidates: { A } }, untyped(options)))).toBe("option");
  });

  it("a window without levels", () => {
    expect(codeOf(() => findGoodBasis({ h0, v }, { levels: { from: 5, to: 6 } }))).toBe("no-level");
  });
});

describe("problems", () => {
  it.each([
    ["null", null, "option"],
    ["nothing", undefined, "option"],
    ["a number", 5, "option"],
    ["no H0", { v }, "shape"],
    ["no V", { h0 }, "option"],
    ["V = null", { h0, v: null }, "option"],
    ["no perturbation by name", { h0, v: {} }, "option"],
    ["H0 in words", { h0: "sigma z", v }, "shape"],
    ["NaN", { h0: [[Number.NaN]], v: [[1]] }, "not-finite"],
    ["different sizes", { h0, v: [[1]] }, "shape"],
    [
      "H0 not Hermitian",
      {
        h0: [
          [0, 1],
          [0, 0],
        ],
        v: [
          [1, 0],
          [0, 1],
        ],
      },
      "not-hermitian",
    ],
    [
      "V not Hermitian",
      {
        h0: [
          [0, 0],
          [0, 0],
        ],
        v: {
          re: [
            [0, 0],
            [0, 0],
          ],
          im: [
            [0, 1],
            [1, 0],
          ],
        },
      },
      "not-hermitian",
    ],
    [
      "a candidate that is not normal",
      {
        h0: [
          [1, 0],
          [0, 1],
        ],
        v: [
          [1, 0],
          [0, 1],
        ],
        candidates: {
          up: [
            [0, 1],
            [0, 0],
          ],
        },
      },
      "not-normal",
    ],
    ["a candidate as number", { h0, v, candidates: { A: 5 } }, "shape"],
    ["a candidate as null", { h0, v, candidates: { A: null } }, "shape"],
    ["a ladder as number", { h0, v, candidates: { A: { operator: A, ladder: 5 } } }, "shape"],
    ["an unknown family", { h0, v, candidates: { A: { operator: A, label: "spin" } } }, "option"],
    ["a candidate called V", { h0, v, candidates: { V: A } }, "name"],
    ["a candidate called H0", { h0, v, candidates: { H0: A } }, "name"],
    ["an empty name", { h0, v, candidates: { " ": A } }, "name"],
    ["a perturbation called H0", { h0, v: { H0: v } }, "name"],
    ["too few kets", { h0, v, kets: ["a", "b"] }, "shape"],
    ["an empty ket", { h0, v, kets: ["a", "", "c"] }, "name"],
    ["kets alike", { h0, v, kets: ["a", "b", "a"] }, "name"],
  ])("%s", (_, problem, code) => {
    expect(codeOf(() => findGoodBasis(untyped(problem)))).toBe(code);
    expect(codeOf(() => validateBasis(untyped(problem), eye))).toBe(code);
  });

  it("kets may be left out: they are numbered then", () => {
    expect(findGoodBasis({ h0, v }).ket(2)).toBe("2");
    expect(findGoodBasis({ h0, v, kets: ["a", "b", "c"] }).ket(2)).toBe("c");
  });
});

it("options that are undefined take their defaults", () => {
  const stated = {
    levels: undefined,
    depth: undefined,
    resolution: undefined,
    lambda: undefined,
    levelWidth: undefined,
  };
  const plain = findGoodBasis({ h0, v, candidates: { A } }).certificate();
  expect(findGoodBasis({ h0, v, candidates: { A } }, untyped(stated)).certificate()).toEqual(plain);
});

it("H0 and V at the largest size that is taken: all numbers of the certificate are finite, and it stands", () => {
  const scaled = (factor: number): readonly [Operator, Operator] => [h0.scale(factor), v.scale(factor)];
  for (const [energy, field] of [
    [4e59, 4e59],
    [1, 4e59],
    [4e59, 1],
  ] as const) {
    const problem = { h0: scaled(energy)[0], v: scaled(field)[1], candidates: { A: A.scale(energy) } };
    const outcome = findGoodBasis(problem);
    expect(JSON.stringify(outcome.audit)).not.toContain("null");
    expect(recheck(JSON.stringify(outcome.certificate()), problem)).toMatchObject({ ok: true });
    expect(formatOutcome(outcome)).not.toMatch(/∞|NaN|Infinity/);
  }
});

describe("columns, claims and options of validateBasis", () => {
  it.each([
    ["null", null, "shape"],
    ["a number", 5, "shape"],
    ["no rows", [], "shape"],
    [
      "ragged rows",
      [
        [1, 0, 0],
        [0, 1],
        [0, 0, 1],
      ],
      "shape",
    ],
    ["a row that is null", [null, [0], [1]], "shape"],
    ["a flat list", [1, 0, 0], "shape"],
    ["too few rows", [[1], [0]], "shape"],
    [
      "more columns than kets",
      [
        [1, 0, 0, 0],
        [0, 1, 0, 0],
        [0, 0, 1, 0],
      ],
      "shape",
    ],
    ["NaN", [[Number.NaN], [0], [1]], "not-finite"],
    ["text", [["1"], [0], [0]], "not-finite"],
    ["re and im of different sizes", { re: eye, im: [[0], [0], [0]] }, "shape"],
    ["an operator over other kets", Operator.identity(2), "shape"],
  ])("columns: %s", (_, columns, code) => {
    expect(codeOf(() => validateBasis({ h0, v, candidates: { A } }, untyped(columns)))).toBe(code);
  });

  it.each([
    ["an unknown label", { B: [1, 1, 1] }, "name"],
    ["too few claims", { A: [1] }, "shape"],
    ["claims that are no list", { A: 5 }, "shape"],
    ["an empty object", { A: [{}, 0, 0] }, "option"],
    ["null", { A: [null, 0, 0] }, "option"],
    ["NaN", { A: [Number.NaN, 0, 0] }, "option"],
    ["a complex NaN", { A: [{ re: 0, im: Number.NaN }, 0, 0] }, "option"],
    ["a word", { A: ["one", 0, 0] }, "option"],
    ["a fraction over zero", { A: ["1/0", 0, 0] }, "option"],
  ])("claims: %s", (_, labels, code) => {
    expect(codeOf(() => validateBasis({ h0, v, candidates: { A } }, eye, untyped(labels)))).toBe(code);
  });

  it.each([
    ["null", null],
    ["a misspelt option", { resolutoin: 1e-9 }],
    ["resolution = null", { resolution: null }],
    ["resolution = 0", { resolution: 0 }],
    ["levelWidth < 0", { levelWidth: -1 }],
    ["levelWidth = NaN", { levelWidth: Number.NaN }],
    ["levelWidth as text", { levelWidth: "x" }],
    ["λ = NaN", { lambda: Number.NaN }],
  ])("options: %s", (_, options) => {
    expect(codeOf(() => validateBasis({ h0, v, candidates: { A } }, eye, undefined, untyped(options)))).toBe("option");
  });
});
