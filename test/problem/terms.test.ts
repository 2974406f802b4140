import { describe, expect, it } from "vitest";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { Operator } from "../../src/operator/operator.js";
import { candidateOf, errorOf, h0Of, readFields, rowsOf } from "./files.js";

const space = [
  { name: "L", spin: 1 },
  { name: "S", spin: "1/2" },
];
const l = angularMomentum(1);
const s = angularMomentum(1 / 2);
const L = { x: l.x.kron(Operator.identity(2)), y: l.y.kron(Operator.identity(2)), z: l.z.kron(Operator.identity(2)) };
const S = { x: Operator.identity(3).kron(s.x), y: Operator.identity(3).kron(s.y), z: Operator.identity(3).kron(s.z) };

function difference(a: Operator, b: Operator): number {
  return a.minus(b).frobenius;
}

describe("terms", () => {
  it("are coefficients times products", () => {
    const terms = [
      { coefficient: 1.5, product: ["L.x", "S.x"] },
      { coefficient: "-2i", product: ["L.plus"] },
      { product: [] },
    ];
    const lPlus = l.plus.kron(Operator.identity(2));
    const expected = Operator.sum(L.x.times(S.x).scale(1.5), lPlus.scale({ re: 0, im: -2 }), Operator.identity(6));
    expect(difference(h0Of({ terms }, { space }), expected)).toBe(0);
  });

  it("multiply from the left to the right, as written", () => {
    const xy = h0Of({ terms: [{ product: ["L.x", "L.y"] }] }, { space });
    expect(difference(xy, L.x.times(L.y))).toBe(0);
    expect(difference(xy, L.y.times(L.x))).toBeGreaterThan(1);
  });

  it("know scalar products, also of sums and of a vector with itself", () => {
    const ls = h0Of({ terms: [{ dot: ["L", "S"] }] }, { space });
    const expected = Operator.sum(L.x.times(S.x), L.y.times(S.y), L.z.times(S.z));
    expect(difference(ls, expected)).toBeLessThan(1e-15);
    expect(ls.isReal).toBe(true);
    const j2 = h0Of({ terms: [{ dot: ["L + S", "L + S"] }] }, { space });
    const j = [L.x.plus(S.x), L.y.plus(S.y), L.z.plus(S.z)].map((a) => a.times(a));
    expect(difference(j2, Operator.sum(...j))).toBeLessThan(1e-14);
    const l2 = h0Of({ terms: [{ dot: ["L", "L"] }] }, { space });
    expect(difference(l2, Operator.identity(6).scale(2))).toBeLessThan(1e-15);
  });

  it("repeat for bonds", () => {
    const ring = [{ name: "r", spin: "1/2", count: 3 }];
    const bonds = [
      [0, 1],
      [2, 0],
    ];
    const terms = [{ coefficient: 4, product: ["r[i].z", "r[j].z"], bonds }];
    const sz = (k: number): string => `r[${k}].z`;
    const one = [
      { coefficient: 4, product: [sz(0), sz(1)] },
      { coefficient: 4, product: [sz(2), sz(0)] },
    ];
    expect(difference(h0Of({ terms }, { space: ring }), h0Of({ terms: one }, { space: ring }))).toBe(0);
    const dots = h0Of({ terms: [{ dot: ["r[i]", "r[j]"], bonds: [[0, 1]] }] }, { space: ring });
    expect(dots.entry(2, 4).re).toBe(0.5);
    expect(errorOf(() => h0Of({ terms: [{ product: ["r[0].z"], bonds }] }, { space: ring }))).toMatch(
      /names with "\[i\]"/,
    );
  });

  it("carry the uncertainty of a coefficient that no short binary number is", () => {
    const exact = h0Of({ terms: [{ coefficient: 0.75, product: ["L.z"] }] }, { space });
    expect(exact.isExact).toBe(true);
    const rounded = h0Of({ terms: [{ coefficient: 0.1, product: ["L.z"] }] }, { space });
    // The decimal 0.1 is not the double 0.1: the distance, 5.6e-18, must lie within the radius.
    expect(rounded.isExact).toBe(false);
    expect(rounded.error).toBeGreaterThan(5.6e-18);
    expect(rounded.error).toBeLessThan(1e-16);
  });

  it("use what is defined before them", () => {
    const read = readFields({
      space,
      define: { Jz: "L.z + S.z", "Jz-squared": { terms: [{ product: ["Jz^2"] }] } },
      h0: "Jz-squared",
      v: "Jz",
      candidates: { Jz: "Jz", twice: { operator: { terms: [{ product: ["Jz", "Jz"] }] }, label: "number" } },
    });
    const jz = L.z.plus(S.z);
    expect(difference(Operator.from(read.problem.h0), jz.times(jz))).toBe(0);
    expect(difference(candidateOf(read, "twice"), jz.times(jz))).toBe(0);
    expect(errorOf(() => readFields({ space, define: { a: "b", b: "L.z" } }))).toBe(
      'name: p.json, line 25, define.a: there is no "b"; defined before it: nothing; the factors are L, S, with operators such as "L.x"',
    );
    expect(errorOf(() => readFields({ space, define: { "a.b": "L.z" } }))).toMatch(/a name without spaces/);
  });

  it("are zero where there are none", () => {
    expect(rowsOf(h0Of({ terms: [] }, { n: 2 }))).toEqual([
      [0, 0],
      [0, 0],
    ]);
    expect(errorOf(() => h0Of({ terms: [] }))).toMatch(/at least one term/);
  });

  it("name what they do not know", () => {
    const bad = (term: unknown): string => errorOf(() => h0Of({ terms: [term] }, { space }));
    expect(bad({ product: ["L.w"] })).toMatch(
      /h0\.terms\[0\]\.product\[0\]: there is no "L\.w"; the operators of this factor are x, y, z/,
    );
    expect(bad({ product: ["M.x"] })).toMatch(/there is no "M"; the factors are L, S/);
    expect(bad({ product: ["Jz"] })).toMatch(/there is no "Jz"; defined before it: nothing/);
    expect(bad({ dot: ["L", "T"] })).toMatch(/h0\.terms\[0\]\.dot\[1\]: there is no "T"/);
    expect(bad({})).toMatch(/either "product" or "dot"/);
    expect(bad({ product: ["L.x"], dot: ["L", "S"] })).toMatch(/either "product" or "dot"/);
    expect(bad({ product: "L.x" })).toMatch(/h0\.terms\[0\]\.product: expected/);
    expect(bad({ coefficient: "1+", product: [] })).toMatch(
      /h0\.terms\[0\]\.coefficient: expected a finite number, .*got "1\+"; .*a number is missing, at character 3/,
    );
    expect(bad({ coefficent: 1, product: [] })).toMatch(
      /h0\.terms\[0\]\.coefficent: expected no other fields than coefficient, product, dot, bonds/,
    );
  });
});
