import { describe, expect, it } from "vitest";
import { Operator } from "../../src/operator/operator.js";
import { readProblem } from "../../src/problem/read.js";
import { errorOf, h0Of, rowsOf } from "./files.js";

const X = [
  [0, 1],
  [1, 0],
];

describe("matrices of a problem file", () => {
  it("come as rows", () => {
    expect(
      rowsOf(
        h0Of([
          [1, "2-3i"],
          [[2, 3], 4],
        ]),
      ),
    ).toEqual([
      [1, "2-3i"],
      ["2+3i", 4],
    ]);
    expect(rowsOf(h0Of({ rows: X, uncertainty: "exact" }))).toEqual(X);
    expect(h0Of({ rows: X, uncertainty: "exact" }).isExact).toBe(true);
  });

  it("come as triplets", () => {
    const triplets = [
      [0, 1, 1],
      [1, 0, 1],
    ];
    expect(rowsOf(h0Of({ n: 2, triplets }))).toEqual(X);
    expect(rowsOf(h0Of({ triplets }, { kets: ["a", "b"] }))).toEqual(X);
    expect(rowsOf(h0Of({ triplets }, { n: 2 }))).toEqual(X);
    expect(
      rowsOf(
        h0Of({
          n: 2,
          triplets: [
            [0, 1, 0, -1],
            [1, 0, 0, 1],
          ],
        }),
      ),
    ).toEqual([
      [0, "0-1i"],
      ["0+1i", 0],
    ]);
    expect(errorOf(() => h0Of({ triplets }))).toBe(
      'file: p.json, line 4, h0: expected the number of kets, from "n" here, or "n", "space" or "kets" of the file, got none of these',
    );
    expect(errorOf(() => h0Of({ n: 1, triplets }))).toMatch(
      /^file: p.json, line 7, h0.triplets\[0\]: expected row and col/,
    );
    const again = [...triplets, [1, 0, 0.5]];
    for (const radii of [{}, { radii: [0, 0, 0] }]) {
      expect(errorOf(() => h0Of({ n: 2, triplets: again, ...radii }))).toMatch(
        /^file: p\.json, line \d+, h0\.triplets\[2\]: expected every place once, got \(1, 0\) again; write the sum/,
      );
    }
  });

  it("come with radii of their own", () => {
    const operator = h0Of({
      n: 2,
      triplets: [
        [0, 0, 1],
        [1, 1, 2],
      ],
      radii: [0.25, 0],
    });
    expect(Array.from(operator.radius ?? [])).toEqual([0.25, 0]);
  });

  it("come as a diagonal or a permutation with phases", () => {
    expect(rowsOf(h0Of({ diagonal: [1, "i"] }))).toEqual([
      [1, 0],
      [0, "0+1i"],
    ]);
    expect(rowsOf(h0Of({ permutation: [1, 2, 0] }))).toEqual([
      [0, 0, 1],
      [1, 0, 0],
      [0, 1, 0],
    ]);
    expect(rowsOf(h0Of({ permutation: [1, 0], phases: [1, "-i"] }))).toEqual([
      [0, "0-1i"],
      [1, 0],
    ]);
  });

  it("come from a Matrix Market file", () => {
    const loadMatrix = (path: string): string => {
      expect(path).toBe("x.mtx");
      return "%%MatrixMarket matrix coordinate real symmetric\n2 2 1\n2 1 1\n";
    };
    expect(rowsOf(h0Of({ matrixMarket: "x.mtx" }, {}, { loadMatrix }))).toEqual(X);
    expect(errorOf(() => h0Of({ matrixMarket: "x.mtx" }))).toMatch(/loadMatrix/);
    const broken = (): string => "%%MatrixMarket matrix coordinate real general\n2 2 1\n3 1 1\n";
    expect(errorOf(() => h0Of({ matrixMarket: "x.mtx" }, {}, { loadMatrix: broken }))).toMatch(
      /^file: .*x\.mtx, line 3, row: expected/,
    );
  });

  it("carry a stated uncertainty", () => {
    const relative = { relative: 2 ** -10 };
    expect(h0Of({ rows: X, uncertainty: relative }).error).toBeGreaterThanOrEqual(2 ** -10);
    const computed = h0Of(
      { terms: [{ product: ["L.x"] }], uncertainty: { absolute: 2 ** -6 } },
      { space: [{ name: "L", spin: 2 }] },
    );
    const plain = h0Of({ terms: [{ product: ["L.x"] }] }, { space: [{ name: "L", spin: 2 }] });
    const own = plain.radius ?? [];
    expect(computed.radius?.length).toBe(plain.csr.col.length);
    computed.radius?.forEach((radius, e) => {
      expect(radius).toBeGreaterThanOrEqual(2 ** -6 + (own[e] ?? 0));
      expect(radius).toBeLessThan(2 ** -6 * 1.001);
    });
  });

  it("act on one factor or site", () => {
    const space = [
      { name: "s", dimension: 2 },
      { name: "c", dimension: 2, count: 2 },
    ];
    const x = Operator.from(X);
    const one = Operator.identity(2);
    expect(rowsOf(h0Of({ rows: X, on: "s" }, { space }))).toEqual(rowsOf(x.kron(one).kron(one)));
    expect(rowsOf(h0Of({ rows: X, on: "c[1]" }, { space }))).toEqual(rowsOf(one.kron(one).kron(x)));
    expect(rowsOf(h0Of({ diagonal: [1, 2, 3, 4], on: "c" }, { space }))).toEqual(
      rowsOf(one.kron(Operator.diagonal([1, 2, 3, 4]))),
    );
    expect(errorOf(() => h0Of({ rows: X, on: "c" }, { space }))).toMatch(
      /^file: .*h0\.on: expected a matrix of 2 kets.*"c" of 4 kets/,
    );
    expect(errorOf(() => h0Of({ rows: X, on: "c[2]" }, { space }))).toBe(
      'name: p.json, line 15, h0.on: there is no "c[2]"; the sites of c are 0 … 1',
    );
    expect(errorOf(() => h0Of({ rows: X, on: "s" }))).toMatch(/a "space" with factors/);
  });

  it("hop", () => {
    const hopping = [
      [0, 1],
      [1, 2],
    ];
    const n = 3;
    expect(rowsOf(h0Of({ hopping, amplitude: -1 }, { n }))).toEqual([
      [0, -1, 0],
      [-1, 0, -1],
      [0, -1, 0],
    ]);
    expect(rowsOf(h0Of({ hopping, amplitudes: [2, "i"] }, { n }))).toEqual([
      [0, 2, 0],
      [2, 0, "0+1i"],
      [0, "0-1i", 0],
    ]);
    expect(errorOf(() => h0Of({ hopping, amplitudes: [2] }, { n }))).toMatch(/^shape: p.json, line 4, h0: hopping: /);
    expect(errorOf(() => h0Of({ hopping, amplitude: 1, amplitudes: [1, 1] }, { n }))).toMatch(/either "amplitude" or/);
  });

  it("are refused with the place", () => {
    expect(errorOf(() => h0Of([[1, 2], [3]]))).toBe(
      "file: p.json, line 9, h0[1]: expected 2 numbers, as there are 2 rows, got 1",
    );
    expect(
      errorOf(() =>
        h0Of([
          [1, "x"],
          [3, 4],
        ]),
      ),
    ).toMatch(
      /^file: p\.json, line 7, h0\[0\]\[1\]: expected a finite number, .* such as "1\+2i" or "sqrt\(2\/3\)", got "x"; .*"x" is not known/,
    );
    expect(errorOf(() => h0Of({ diagonal: [1, null] }))).toMatch(
      /^file: p.json, line 7, h0.diagonal\[1\]: .*got null$/,
    );
    expect(errorOf(() => h0Of({ diag: [1] }))).toMatch(
      /^file: p.json, line 4, h0: expected a matrix: .*got \{"diag":\[1\]\}/,
    );
    expect(errorOf(() => h0Of({ diagonal: [1], rows: [[1]] }))).toMatch(/one of rows, triplets/);
    expect(errorOf(() => h0Of({ diagonal: [1], n: 1 }))).toMatch(
      /^file: p.json, line 8, h0.n: expected no other fields than diagonal, on, uncertainty, got "n"/,
    );
    expect(errorOf(() => h0Of({ permutation: [0, 0] }))).toMatch(/^shape: p.json, line 4, h0: .*0 occurs twice/);
    expect(errorOf(() => h0Of({ diagonal: [1], uncertainty: { relative: -1 } }))).toMatch(
      /^file: p.json, line 8, h0.uncertainty: expected "exact" or/,
    );
    expect(errorOf(() => h0Of([]))).toMatch(/at least one row/);
    expect(errorOf(() => h0Of(3))).toMatch(/^file: p.json, line 4, h0: expected a matrix: rows, a name/);
  });

  it("see an overflow that JSON hides", () => {
    const text = '{ "format": "goodbasis-problem", "formatVersion": 1,\n "h0": [[0, 1e999], [0, 0]], "v": [[0]] }';
    expect(errorOf(() => readProblem(text))).toBe(
      "not-finite: problem, line 2, h0[0][1]: the number is Infinity; every entry must be finite, below 1.8e308",
    );
  });
});
