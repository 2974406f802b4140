import { describe, expect, it } from "vitest";
import { oscillator } from "../../src/models/oscillator.js";
import { reflection, sitePermutation, translation } from "../../src/models/permutations.js";
import { spinChain } from "../../src/models/spin-chain.js";
import { Operator } from "../../src/operator/operator.js";
import { errorOf, h0Of, readFields, rowsOf } from "./files.js";

const ring = [{ name: "r", spin: "1/2", count: 3 }];
const chain = spinChain(3);

function same(a: Operator, b: Operator): void {
  expect(a.minus(b).frobenius).toBe(0);
}

describe("the space of a problem file", () => {
  it("names its kets", () => {
    const kets = (space: unknown): readonly string[] =>
      readFields({ space, h0: { terms: [] }, v: { terms: [] } }).problem.kets ?? [];
    expect(
      kets([
        { name: "L", spin: 1 },
        { name: "S", spin: 0.5 },
      ]).slice(0, 3),
    ).toEqual(["1,1/2", "1,-1/2", "0,1/2"]);
    expect(kets(ring)).toEqual(chain.kets());
    expect(
      kets([
        { name: "a", dimension: 2, count: 2, kets: ["g", "e"] },
        { name: "n", oscillator: 2 },
      ]),
    ).toEqual(["gg,0", "gg,1", "ge,0", "ge,1", "eg,0", "eg,1", "ee,0", "ee,1"]);
    expect(kets([{ name: "a", dimension: 2, count: 2, kets: ["g1", "e1"] }])[1]).toBe("g1,e1");
  });

  it("leaves the names to the file where it gives them", () => {
    expect(readFields({ space: [{ name: "a", dimension: 1 }], kets: ["only"] }).problem.kets).toEqual(["only"]);
  });

  it("has sites with operators", () => {
    same(h0Of("r[1].z", { space: ring }), chain.sz(1));
    same(h0Of("r[2].plus", { space: ring }), chain.plus(2));
    same(h0Of("r.total.z", { space: ring }), chain.totalSz);
    same(h0Of("r[0].x^2", { space: ring }), chain.sx(0).times(chain.sx(0)));
  });

  it("has permutations of sites", () => {
    same(h0Of("r.translation", { space: ring }), translation(3, 2));
    same(h0Of({ translation: "r" }, { space: ring }), translation(3, 2));
    same(h0Of("r.reflection", { space: ring }), reflection(3, 2));
    same(h0Of({ reflection: "r", centre: 0 }, { space: ring }), reflection(3, 2, 0));
    same(h0Of({ sitePermutation: [2, 0, 1], on: "r" }, { space: ring }), sitePermutation(2, [2, 0, 1]));
    same(h0Of({ exchange: ["r[0]", "r[2]"] }, { space: ring }), sitePermutation(2, [2, 1, 0]));
    const beside = [{ name: "a", dimension: 3 }, ...ring];
    same(h0Of("r.translation", { space: beside }), Operator.identity(3).kron(translation(3, 2)));
  });

  it("exchanges factors that stand apart", () => {
    const space = [
      { name: "a", dimension: 2 },
      { name: "m", dimension: 3 },
      { name: "b", dimension: 2 },
    ];
    const swap = h0Of({ exchange: ["a", "b"] }, { space });
    // |a m b⟩ = |0 2 1⟩ is ket 5, |1 2 0⟩ is ket 10.
    expect(swap.entry(10, 5).re).toBe(1);
    same(swap.times(swap), Operator.identity(12));
    expect(errorOf(() => h0Of({ exchange: ["a", "m"] }, { space }))).toMatch(
      /two factors or sites with the same number/,
    );
  });

  it("has oscillators whose powers of x are those of the whole oscillator", () => {
    const space = [{ name: "q", oscillator: 4 }];
    const own = oscillator(4);
    for (const name of ["a", "adagger", "number", "x", "p"] as const) same(h0Of(`q.${name}`, { space }), own[name]);
    same(h0Of("q.x^4", { space }), own.xPower(4));
    expect(h0Of("q.x^2", { space }).entry(3, 3).re).toBe(3.5);
    same(h0Of("q.parity", { space }), Operator.diagonal([1, -1, 1, -1]));
  });

  it("has transfers between kets of any factor", () => {
    const space = [
      { name: "atom", dimension: 2, kets: ["g", "e"] },
      { name: "S", spin: 0.5 },
    ];
    expect(rowsOf(h0Of("atom.|e><g|", { space }))).toEqual([
      [0, 0, 0, 0],
      [0, 0, 0, 0],
      [1, 0, 0, 0],
      [0, 1, 0, 0],
    ]);
    same(h0Of("S.|1/2><-1/2|", { space }), h0Of("S.plus", { space }));
    expect(errorOf(() => h0Of("atom.|e><f|", { space }))).toMatch(/the kets are g, e/);
  });

  it("refuses what it cannot be made of", () => {
    const bad = (...space: unknown[]): string => errorOf(() => readFields({ space }));
    expect(bad()).toMatch(/^file: p.json, line 14, space: expected at least one factor/);
    expect(bad({ name: "L" })).toMatch(/space\[0\]: expected a factor with one of the fields "spin"/);
    expect(bad({ name: "L", spin: 1, dimension: 3 })).toMatch(/one of the fields "spin"/);
    expect(bad({ name: "L", spin: 0.3 })).toMatch(
      /^option: p.json, line 17, space\[0\]\.spin: angularMomentum: j must be/,
    );
    expect(bad({ name: "L", spin: "1/3" })).toMatch(/^file: .*space\[0\]\.spin: expected an angular momentum/);
    expect(bad({ name: "L.x", spin: 1 })).toMatch(/space\[0\]\.name: expected a name without spaces/);
    expect(bad({ name: "L", spin: 1 }, { name: "L", spin: 1 })).toMatch(/space\[1\]\.name: expected a name of its own/);
    expect(bad({ name: "L", spin: 1, kets: ["a", "b"] })).toMatch(/space\[0\]\.kets: expected 3 different names/);
    expect(bad({ name: "L", spin: 1, kets: ["a", "b", "a"] })).toMatch(/3 different names/);
    expect(bad({ name: "L", spin: 1, count: 0 })).toMatch(
      /space\[0\]\.count: expected a whole number from 1 on, got 0/,
    );
    expect(bad({ name: "q", oscillator: 2 ** 20, count: 2 })).toMatch(/^option: .*space: productSpace/);
  });

  it("explains names that fall short", () => {
    expect(errorOf(() => h0Of("r.z", { space: ring }))).toMatch(
      /r has 3 sites: write "r\[0\]\.…" for one, "r\.total\.…"/,
    );
    expect(errorOf(() => h0Of("L[0].x", { space: [{ name: "L", spin: 1 }] }))).toMatch(/"L" has no sites/);
    expect(errorOf(() => h0Of({ translation: "L" }, { space: [{ name: "L", spin: 1 }] }))).toMatch(
      /there is no "L\.translation"/,
    );
    expect(errorOf(() => h0Of({ reflection: "L" }, { space: [{ name: "L", spin: 1 }] }))).toMatch(
      /a factor with a count/,
    );
    expect(errorOf(() => h0Of({ sitePermutation: [0, 0, 1], on: "r" }, { space: ring }))).toMatch(
      /^shape: .*occurs twice/,
    );
    expect(errorOf(() => h0Of({ terms: [{ dot: ["q", "q"] }] }, { space: [{ name: "q", oscillator: 2 }] }))).toMatch(
      /"q" is no angular momentum|there is no "q.x"/,
    );
  });
});
