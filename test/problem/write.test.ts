import { describe, expect, it } from "vitest";
import type { Problem } from "../../src/audit/problem.js";
import { findGoodBasis } from "../../src/certify/find.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { Operator } from "../../src/operator/operator.js";
import { readProblem } from "../../src/problem/read.js";
import { writeProblem } from "../../src/problem/write.js";
import { errorOf } from "./files.js";

const s = angularMomentum(3 / 2);
const problem: Problem = {
  h0: s.z.times(s.z),
  v: { field: s.z.scale(0.1), across: s.y.times(s.x).plus(s.x.times(s.y)) },
  candidates: {
    Sz: { operator: s.z, label: "m", ladder: s.plus },
    turn: { operator: { diagonal: [0, 1, 0, -1], imaginary: [1, 0, -1, 0] }, label: { root: 4 } },
    plain: [
      [0, 0, 0, 1],
      [0, 0, 1, 0],
      [0, 1, 0, 0],
      [1, 0, 0, 0],
    ],
  },
  kets: s.kets,
  unit: "cm⁻¹",
};

describe("writeProblem", () => {
  it("refuses what no problem file could hold", () => {
    const one = [[1]];
    const bad = (problem: unknown, extra: unknown = {}): string =>
      errorOf(() => Reflect.apply(writeProblem, undefined, [problem, extra]));
    expect(bad({ h0: one, v: one, candidate: {} })).toMatch(/^option: writeProblem: .*did you mean "candidates"/);
    expect(bad({ h0: one, v: { exchange: one } })).toMatch(/^name: writeProblem: .*"exchange".*rename it/);
    expect(bad({ h0: one, v: null })).toMatch(/^option: writeProblem: expected operators by name as v, got null/);
    expect(bad({ h0: one, v: one, candidates: { A: 7 } })).toMatch(/^shape: writeProblem: a candidate is 7/);
    expect(bad({ h0: one, v: one }, { title: 7 })).toMatch(/^file: writeProblem, title: expected text, got 7/);
    expect(bad({ h0: one, v: one }, { options: { lambda: Number.NaN } })).toMatch(
      /^file: writeProblem, options\.lambda/,
    );
    expect(bad({ h0: one, v: one }, { titel: "t" })).toMatch(/^option: writeProblem: .*did you mean "title"/);
  });

  it("keeps every bit: the certificates name the same hashes", () => {
    const read = readProblem(
      writeProblem(problem, { title: "t", note: "n", invented: true, options: { levels: { lowest: 1 } } }),
    );
    expect(read).toMatchObject({ title: "t", note: "n", invented: true, options: { levels: { lowest: 1 } } });
    expect(findGoodBasis(read.problem).certificate()).toEqual(findGoodBasis(problem).certificate());
    expect(read.problem.kets).toEqual(problem.kets);
    expect(read.problem.unit).toBe("cm⁻¹");
    expect(read.problem.candidates).toMatchObject({ Sz: { label: "m" }, turn: { label: { root: 4 } } });
  });

  it("writes the ladder too", () => {
    const candidate = readProblem(writeProblem(problem)).problem.candidates?.["Sz"];
    if (candidate === undefined || !("ladder" in candidate) || candidate.ladder === undefined)
      throw new Error("no ladder");
    expect(Operator.from(candidate.ladder).hash).toBe(s.plus.hash);
  });

  it("writes the least there can be", () => {
    const least = {
      h0: { diagonal: [0, 0] },
      v: [
        [0, 1],
        [1, 0],
      ],
    };
    const read = readProblem(writeProblem(least));
    expect(findGoodBasis(read.problem).certificate()).toEqual(findGoodBasis(least).certificate());
    expect(Object.keys(readProblem(writeProblem({ ...least, candidates: {} })).problem.candidates ?? {})).toEqual([]);
  });
});
