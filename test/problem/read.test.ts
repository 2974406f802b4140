import { describe, expect, it } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import { readProblem } from "../../src/problem/read.js";
import { candidateOf, errorOf, file, readFields, rowsOf } from "./files.js";

describe("readProblem", () => {
  it("reads text and parsed JSON alike", () => {
    const fields = file({ title: "t", note: "n", invented: true, unit: "eV", options: { depth: "labels" } });
    const fromText = readProblem(JSON.stringify(fields));
    const fromValue = readProblem(fields);
    for (const read of [fromText, fromValue]) {
      expect(read).toMatchObject({ title: "t", note: "n", invented: true, n: 1, options: { depth: "labels" } });
      expect(read.problem.unit).toBe("eV");
    }
    expect(readProblem(`\uFEFF${JSON.stringify(fields)}`).title).toBe("t");
  });

  it("says nothing of what the file leaves out", () => {
    const { title, note, invented, options, problem } = readFields({});
    expect({ title, note, invented, options }).toEqual({
      title: undefined,
      note: undefined,
      invented: false,
      options: {},
    });
    expect(problem).not.toHaveProperty("kets");
    expect(problem).not.toHaveProperty("unit");
  });

  it("reads several perturbations, and tells them from one matrix", () => {
    const { problem } = readFields({ v: { a: [[1]], b: { diagonal: [2] } } });
    expect(Object.keys(problem.v)).toEqual(["a", "b"]);
    expect(rowsOf(readFieldsV({ diagonal: [2] }))).toEqual([[2]]);
    expect(errorOf(() => readFields({ v: {} }))).toMatch(
      /^file: p.json, line 9, v: expected a matrix, or at least one named/,
    );
    expect(errorOf(() => readFields({ v: { a: [[1]], b: { digonal: [2] } } }))).toMatch(
      /line 15, v\.b: expected a matrix/,
    );
  });

  it("reads candidates with labels and ladders", () => {
    const space = [{ name: "S", spin: 1 }];
    const read = readFields({
      space,
      h0: { terms: [] },
      v: "S.z",
      candidates: {
        Sz: { operator: "S.z", label: "m", ladder: "S.plus" },
        plain: { diagonal: [1, 2, 3] },
        third: { operator: { permutation: [1, 2, 0] }, label: { root: 3 } },
      },
    });
    expect(read.problem.candidates).toMatchObject({ Sz: { label: "m" }, third: { label: { root: 3 } } });
    expect(candidateOf(read, "plain").entry(2, 2).re).toBe(3);
    expect(findGoodBasis(read.problem).verdict).toBe("good");
  });

  it("keeps names that are dangerous as keys", () => {
    const text =
      '{ "format": "goodbasis-problem", "formatVersion": 1, "h0": [[0]], "v": [[0]], "candidates": { "__proto__": [[1]], "constructor": [[2]] } }';
    expect(Object.keys(readProblem(text).problem.candidates ?? {})).toEqual(["__proto__", "constructor"]);
  });

  it("reads options", () => {
    const options = {
      levels: { nearest: 2, count: 3 },
      depth: "second order",
      resolution: 1e-8,
      lambda: 0.5,
      levelWidth: 0,
    };
    expect(readFields({ options }).options).toEqual(options);
    const bad = (value: unknown): string => errorOf(() => readFields({ options: value }));
    expect(bad({ levels: "some" })).toMatch(
      /^file: p.json, line 15, options.levels: expected "all", \{ "lowest": k \}/,
    );
    expect(bad({ levels: { lowest: 0 } })).toMatch(/options\.levels/);
    expect(bad({ depth: "deep" })).toMatch(/options.depth: expected "labels", "first order", .*got "deep"/);
    expect(bad({ resolution: 0 })).toMatch(/options.resolution: expected a number above 0, got 0/);
    expect(bad({ depths: 1 })).toMatch(/options.depths: expected no other fields than levels, depth/);
  });

  it("names line, field, what was expected and the next step", () => {
    expect(
      errorOf(() => readProblem('{ "format": "goodbasis-problem",\n "formatVersion": 2 }', { name: "x.json" })),
    ).toBe(
      "file: x.json, line 2, formatVersion: expected 1, the only version there is, got 2; goodbasis/problem-schema.json describes the format",
    );
    expect(errorOf(() => readProblem("{ }"))).toMatch(
      /^file: problem, line 1, format: expected the field "format", got nothing/,
    );
    expect(errorOf(() => readProblem("[]"))).toMatch(/^file: problem, line 1, format: expected the field "format"/);
    expect(errorOf(() => readProblem("3"))).toMatch(
      /^file: problem, line 1: expected an object with the fields .*, got 3;/,
    );
    expect(errorOf(() => readProblem(null))).toMatch(/^file: problem: expected an object/);
    expect(errorOf(() => readProblem('{\n "format": goodbasis }', { name: "x.json" }))).toBe(
      'file: x.json, line 2, column 12: expected a JSON value, got "goodbasis"; correct the JSON there',
    );
    expect(errorOf(() => readFields({ extra: 1 }))).toMatch(
      /line 14, extra: expected no other fields than .*h0, v, candidates/,
    );
    expect(errorOf(() => readFields({ kets: ["a", ""] }))).toMatch(
      /kets\[1\]: expected text that is not empty, got ""/,
    );
    expect(errorOf(() => readFields({ candidates: [] }))).toMatch(
      /candidates: expected an object of named entries, got \[\]/,
    );
    expect(errorOf(() => readFields({ candidates: { A: { operator: [[1]], label: "M" } } }))).toMatch(
      /candidates\.A\.label: expected "j", "m", "parity", "number", \{ "root": N \} or \{ "rational": Q \}, got "M"/,
    );
    expect(errorOf(() => readFields({ candidates: { "a b": { label: "m" } } }))).toMatch(
      /candidates\["a b"\]\.operator: expected the field "operator", got nothing/,
    );
    expect(errorOf(() => readFields({ n: 3, space: [{ name: "a", dimension: 2 }] }))).toMatch(
      /n: expected 2, the number of kets/,
    );
  });

  it("says where kets and levels are wrong", () => {
    const two = { h0: { diagonal: [0, 1] }, v: { diagonal: [1, 0] } };
    const bad = (fields: Readonly<Record<string, unknown>>): string => errorOf(() => readFields({ ...two, ...fields }));
    expect(bad({ kets: ["a", "a"] })).toMatch(
      /^name: p\.json, line \d+, kets\[1\]: kets 0 and 1 are both called "a"; names must differ/,
    );
    expect(bad({ kets: ["a", " "] })).toMatch(/^name: p\.json, line \d+, kets\[1\]: the name of the ket is empty/);
    expect(bad({ kets: ["a", "b", "c"] })).toMatch(
      /^shape: p\.json, line \d+, kets: 3 kets are named, but h0 is 2 × 2; name every ket once/,
    );
    expect(bad({ kets: ["a", 7] })).toMatch(
      /^file: p\.json, line \d+, kets\[1\]: expected text in double quotes, got 7/,
    );
    expect(bad({ options: { levels: { from: 2, to: 1 } } })).toMatch(
      /^option: p\.json, line \d+, options\.levels: the window runs from 2 down to 1; give from ≤ to/,
    );
    expect(bad({ options: { levels: null } })).toMatch(/^file: p\.json, line \d+, options\.levels: expected "all"/);
    expect(bad({ kets: ["a", "b"], options: { levels: { from: 1, to: 1 } } })).toBe("no error");
  });

  it("says which field was probably meant", () => {
    expect(errorOf(() => readFields({ candidate: {} }))).toMatch(
      /candidate: expected no other fields than .*; did you mean "candidates"\? goodbasis\/problem-schema/,
    );
    expect(errorOf(() => readFields({ options: { lamda: 1 } }))).toContain('did you mean "lambda"?');
  });

  it("tells a perturbation by name from a field of one matrix, or says to rename it", () => {
    const named = [[1]];
    for (const name of ["re", "im", "entries", "rows", "exchange", "hopping", "terms", "triplets", "translation"]) {
      const message = errorOf(() => readFields({ v: { [name]: [["x"]], zeeman: named } }));
      expect(message, name).toMatch(/^(name|file): p\.json, line \d+, v.*rename it/);
      expect(message, name).toContain(`"${name}"`);
    }
    const energies = errorOf(() => readFields({ h0: { diagonal: [0, 1] }, v: { diagonal: [[0, 1], 1] } }));
    expect(energies).toMatch(/^not-hermitian: .*line \d+, v: V is not Hermitian.*"diagonal".*rename it/);
    expect(Object.keys(readFields({ v: { real: named, zeeman: named } }).problem.v)).toEqual(["real", "zeeman"]);
  });

  it("refuses two candidates of one name, of which JSON.parse would lose one", () => {
    const text =
      '{ "format": "goodbasis-problem", "formatVersion": 1, "h0": [[0]], "v": [[0]],\n "candidates": { "A": [[1]], "A": [[2]] } }';
    expect(errorOf(() => readProblem(text))).toBe(
      'file: problem, line 2, column 30: expected every key once, got "A" again; correct the JSON there',
    );
  });
});

function readFieldsV(v: unknown): Parameters<typeof rowsOf>[0] {
  const read = readFields({ v: { only: v } });
  const named: unknown = Reflect.get(read.problem.v, "only");
  return named as Parameters<typeof rowsOf>[0];
}
