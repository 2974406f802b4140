import { Matrix } from "ml-matrix";
import { describe, expect, test } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { isMatrixInput } from "../../src/operator/input.js";
import { Operator } from "../../src/operator/operator.js";
import type { MatrixData } from "../../src/operator/read.js";

function refusal(input: MatrixData): GoodBasisError {
  try {
    Operator.from(input);
  } catch (error) {
    if (error instanceof GoodBasisError) return error;
    throw error;
  }
  throw new Error("nothing thrown");
}

const plain = (json: string): MatrixData => JSON.parse(json);

test("every form gives the same operator", () => {
  const forms: MatrixData[] = [
    [
      [0, 2],
      [3, 4],
    ],
    [Float64Array.of(0, 2), Float64Array.of(3, 4)],
    new Matrix([
      [0, 2],
      [3, 4],
    ]),
    Float64Array.of(0, 2, 3, 4),
    {
      re: [
        [0, 2],
        [3, 4],
      ],
    },
    { re: Float64Array.of(0, 2, 3, 4), n: 2 },
    {
      re: new Matrix([
        [0, 2],
        [3, 4],
      ]),
      im: [
        [0, 0],
        [0, 0],
      ],
    },
    {
      n: 2,
      entries: [
        [1, 1, 4],
        [0, 1, 2],
        [1, 0, 3, 0],
        [0, 0, 0],
      ],
    },
  ];
  for (const form of forms) {
    expect(isMatrixInput(form)).toBe(true);
    expect(Operator.from(form).hash).toBe(
      Operator.from([
        [0, 2],
        [3, 4],
      ]).hash,
    );
  }
});

test("diagonals and permutations", () => {
  const d = Operator.from({ diagonal: [1, 0, 2], imaginary: [0, 0, 3] });
  expect(d.entry(2, 2)).toEqual({ re: 2, im: 3 });
  expect(d.csr.col.length).toBe(2);
  const p = Operator.from({ permutation: [1, 2, 0], phases: [1, -1, { re: 0, im: 1 }] });
  expect(p.entry(1, 0)).toEqual({ re: 1, im: 0 });
  expect(p.entry(2, 1)).toEqual({ re: -1, im: 0 });
  expect(p.entry(0, 2)).toEqual({ re: 0, im: 1 });
  expect(p.isExact).toBe(true);
  const turn = Operator.from({ permutation: [1, 0], phases: [{ re: Math.SQRT1_2, im: Math.SQRT1_2 }, 1] });
  expect(turn.isExact).toBe(false);
  for (const form of [{ diagonal: [1] }, { permutation: [0] }, d]) expect(isMatrixInput(form)).toBe(true);
});

test("what is no matrix is told apart from a record of matrices", () => {
  for (const other of [null, 3, "x", { zeeman: [[1]], stark: [[2]] }, {}, { re: 3 }, () => [[1]]]) {
    expect(isMatrixInput(other)).toBe(false);
  }
});

describe("refusals", () => {
  test("of the wrong shape", () => {
    const wrong: MatrixData[] = [
      [],
      [[1, 2]],
      [[1, 2], [3]],
      Float64Array.of(1, 2, 3),
      new Matrix([
        [1, 2, 3],
        [4, 5, 6],
      ]),
      {
        re: [[1]],
        im: [
          [1, 0],
          [0, 1],
        ],
      },
      { re: Float64Array.of(1, 2, 3, 4), n: 3 },
      { n: 0, entries: [] },
      { n: 2, entries: [[0, 2, 1]] },
      { n: 2, entries: [[-1, 0, 1]] },
      { n: 2, entries: [[0.5, 0, 1]] },
      { diagonal: [] },
      { diagonal: [1, 2], imaginary: [1] },
      { permutation: [] },
      { permutation: [0, 0] },
      { permutation: [0, 2] },
      { permutation: [1, 0], phases: [1] },
      { permutation: [1, 0], phases: [1, 0] },
      plain('"text"'),
      plain("null"),
      plain("7"),
      plain("{}"),
      plain('{"re": 3}'),
      plain('{"n": 2, "entries": 3}'),
      plain('{"diagonal": 3}'),
      plain("[[1, 2], 3]"),
      plain('{"permutation": 3}'),
    ];
    for (const input of wrong) expect(refusal(input).code).toBe("shape");
    expect(refusal([[1, 2], [3]]).message).toContain("row 1");
  });

  test("of entries that are not finite numbers, with their place", () => {
    const nan = refusal([
      [1, 2],
      [Number.NaN, 4],
    ]);
    expect(nan.code).toBe("not-finite");
    expect(nan.message).toContain("(1, 0)");
    expect(nan.details).toMatchObject({ row: 1, col: 0 });
    const wrong: MatrixData[] = [
      { re: [[1]], im: [[Number.POSITIVE_INFINITY]] },
      { n: 2, entries: [[0, 1, 1, Number.NaN]] },
      { diagonal: [1, Number.NaN] },
      { diagonal: [1], imaginary: [Number.NEGATIVE_INFINITY] },
      { permutation: [0], phases: [Number.NaN] },
      plain("[[1, 2], [3, null]]"),
    ];
    for (const input of wrong) expect(refusal(input).code).toBe("not-finite");
  });
});
