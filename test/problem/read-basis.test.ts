import { describe, expect, it } from "vitest";
import { validateBasis } from "../../src/certify/validate.js";
import { readBasis } from "../../src/problem/read-basis.js";
import { errorOf } from "./files.js";

const kets = ["up", "down"];

describe("readBasis", () => {
  it("reads states as lists and by the names of kets", () => {
    expect(readBasis("[[1, 0], [0, 1]]").columns).toEqual([
      [1, 0],
      [0, 1],
    ]);
    expect(readBasis('[{ "up": 0.6, "down": 0.8 }]', { kets }).columns).toEqual([[0.6], [0.8]]);
    expect(readBasis('[{ "up": "sqrt(1/3)", "down": "-√(2/3)" }]', { kets }).columns).toEqual([
      [Math.sqrt(1 / 3)],
      [-0.816496580927726],
    ]);
    expect(readBasis([[1, "i"], { down: [0, -1] }], { kets }).columns).toEqual({
      re: [
        [1, 0],
        [0, 0],
      ],
      im: [
        [0, 0],
        [1, -1],
      ],
    });
  });

  it("reads claimed labels", () => {
    const { labels } = readBasis({
      states: [
        [1, 0],
        [0, 1],
      ],
      labels: { m: ["1/2", -0.5], t: ["i", [0, -1]] },
    });
    expect(labels).toEqual({
      m: ["1/2", -0.5],
      t: [
        { re: 0, im: 1 },
        { re: 0, im: -1 },
      ],
    });
  });

  it("reads a Matrix Market file, one state a column", () => {
    const { columns } = readBasis("%%MatrixMarket matrix array real general\n2 2\n0.6\n0.8\n-0.8\n0.6\n");
    const problem = { h0: { diagonal: [0, 0] }, v: { diagonal: [1, 1] } };
    expect(validateBasis(problem, columns).verdict).toBe("good");
  });

  it("says what is wrong, and where", () => {
    const bad = (source: unknown): string => errorOf(() => readBasis(source, { name: "b.json", kets }));
    expect(bad("[[1, 0], [1]]")).toBe("file: b.json, line 1, [1]: expected 2 numbers, one a ket, got 1");
    expect(bad('[{ "up": 1,\n "left": 1 }]')).toBe(
      'file: b.json, line 2, [0].left: expected the name of a ket of the problem, got "left"',
    );
    expect(bad('{ "states": [[1, 0]], "labels": { "m": [1, 2] } }')).toMatch(/labels\.m: expected a list of 1 labels/);
    expect(bad('{ "states": [[1, 0]], "label": {} }')).toMatch(/label: expected no other fields than states, labels/);
    expect(bad('{ "states": [[1, 0]], "labels": { "m": [null] } }')).toMatch(/labels\.m\[0\]: expected an eigenvalue/);
    expect(bad("[]")).toMatch(/at least one state/);
    expect(bad("[1]")).toMatch(/\[0\]: expected a list of numbers, or an object/);
    expect(bad('[[1, "x"]]')).toMatch(/\[0\]\[1\]: expected a finite number/);
    expect(bad('[{ "up": "x" }]')).toMatch(/\[0\]\.up: expected a finite number/);
    expect(bad("{")).toMatch(/^file: b.json, line 1, column 2: expected a key/);
    expect(bad("3")).toMatch(/a list of states, or an object/);
    expect(bad("%%MatrixMarket matrix array real general\n2 1\n1\n0\n")).toMatch(/^file: .*b\.json, line 2, size/);
  });
});
