import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { readMatrixMarket, toMatrixMarket } from "../../src/operator/matrix-market.js";
import { sparse } from "./naive.js";

const read = (...lines: string[]): number[][] => readMatrixMarket(lines.join("\n")).toMatrix().to2DArray();

test("coordinate and array, all fields and symmetries", () => {
  expect(read("%%MatrixMarket matrix coordinate real general", "% note", "", "2 2 2", "1 2 -1.5e0", "2 2 1D1")).toEqual(
    [
      [0, -1.5],
      [0, 10],
    ],
  );
  expect(read("%%matrixmarket MATRIX Coordinate Integer Symmetric", "2 2 2", "1 1 3", "2 1 -4")).toEqual([
    [3, -4],
    [-4, 0],
  ]);
  expect(read("%%MatrixMarket matrix coordinate pattern general", "2 2 1", "2 1")).toEqual([
    [0, 0],
    [1, 0],
  ]);
  expect(read("%%MatrixMarket matrix coordinate real skew-symmetric", "2 2 1", "2 1 5")).toEqual([
    [0, -5],
    [5, 0],
  ]);
  expect(read("%%MatrixMarket matrix array real general", "2 2", "1", "2", "3", "4")).toEqual([
    [1, 3],
    [2, 4],
  ]);
  expect(read("%%MatrixMarket matrix array real symmetric", "2 2", "1", "2", "4")).toEqual([
    [1, 2],
    [2, 4],
  ]);
  expect(read("%%MatrixMarket matrix array real skew-symmetric", "2 2", "2")).toEqual([
    [0, -2],
    [2, 0],
  ]);
  const h = readMatrixMarket("%%MatrixMarket matrix coordinate complex hermitian\r\n2 2 2\r\n1 1 2 0\r\n2 1 1 -3\r\n");
  expect(h.entry(0, 1)).toEqual({ re: 1, im: 3 });
  expect(h.isHermitian).toBe(true);
});

test("integers are exact, reals are not unless said so", () => {
  expect(readMatrixMarket("%%MatrixMarket matrix array integer general\n1 1\n3").isExact).toBe(true);
  expect(readMatrixMarket("%%MatrixMarket matrix array real general\n1 1\n3").isExact).toBe(false);
  expect(readMatrixMarket("%%MatrixMarket matrix array real general\n1 1\n3", { uncertainty: "exact" }).isExact).toBe(
    true,
  );
});

test("what is written reads back as the same bits", () => {
  fc.assert(
    fc.property(sparse(4), (a) => {
      expect(readMatrixMarket(toMatrixMarket(a)).hash).toBe(a.hash);
    }),
    { seed: 3, numRuns: 50 },
  );
});

describe("malformed files name line and field", () => {
  const real = "%%MatrixMarket matrix coordinate real general";
  const cases: [string[], number, string][] = [
    [[""], 1, "banner"],
    [["%%MatrixMarket vector coordinate real general"], 1, "object"],
    [["%%MatrixMarket matrix sparse real general"], 1, "format"],
    [["%%MatrixMarket matrix coordinate quaternion general"], 1, "field"],
    [["%%MatrixMarket matrix array pattern general"], 1, "field"],
    [["%%MatrixMarket matrix coordinate real hermitian"], 1, "symmetry"],
    [["%%MatrixMarket matrix coordinate real upper"], 1, "symmetry"],
    [["%%MatrixMarket matrix coordinate pattern skew-symmetric"], 1, "symmetry"],
    [[real], 1, "size"],
    [[real, "2 2"], 2, "size"],
    [[real, "2 3 1"], 2, "size"],
    [[real, "0 0 0"], 2, "rows"],
    [[real, "2 2 -1"], 2, "entries"],
    [[real, "2 2 1"], 2, "entry"],
    [[real, "2 2 1", "1 1"], 3, "entry"],
    [[real, "2 2 1", "% c", "1 3 1.0"], 4, "column"],
    [[real, "2 2 1", "0 1 1.0"], 3, "row"],
    [[real, "2 2 1", "1 1 nan"], 3, "value"],
    [[real, "2 2 1", "1 1 1e999"], 3, "value"],
    [[real, "2 2 1", "1 1 1", "2 2 1"], 4, "entries"],
    [[real, "2 2 2", "1 1 1", "1 1 1"], 4, "entry"],
    [["%%MatrixMarket matrix coordinate real symmetric", "2 2 1", "1 2 1"], 3, "entry"],
    [["%%MatrixMarket matrix coordinate real skew-symmetric", "2 2 1", "1 1 1"], 3, "entry"],
    [["%%MatrixMarket matrix coordinate complex hermitian", "2 2 1", "1 1 1 1"], 3, "imaginary part"],
    [["%%MatrixMarket matrix coordinate integer general", "1 1 1", "1 1 1.5"], 3, "value"],
    [["%%MatrixMarket matrix array real general", "2 2", "1", "2", "3"], 5, "value"],
  ];
  test.each(cases)("%j", (lines, line, field) => {
    let error: unknown;
    try {
      readMatrixMarket(lines.join("\n"), { name: "h0.mtx" });
    } catch (thrown) {
      error = thrown;
    }
    expect(error).toBeInstanceOf(GoodBasisError);
    expect(error).toMatchObject({ code: "file", details: { name: "h0.mtx", line, field } });
  });
});
