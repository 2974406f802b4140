import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { degree, evaluate, fromRoots, multiply, type Polynomial } from "../../src/exact/polynomial.js";
import { Surd, type SurdInput } from "../../src/exact/surd.js";
import {
  comparePoints,
  coprimePolynomials,
  holdsRoot,
  isolate,
  middleOf,
  samePolynomial,
  squareFreeFactors,
} from "../../src/prove/roots.js";

const polynomial = (...coefficients: readonly SurdInput[]): Polynomial => coefficients.map((c) => Surd.from(c));
const wholes = (length: number): fc.Arbitrary<number[]> =>
  fc.array(fc.integer({ min: -9, max: 9 }), { minLength: 1, maxLength: length });
const rooted = (roots: readonly number[]): Polynomial => fromRoots(roots.map((root) => Surd.from(root)));

describe("isolate", () => {
  it("encloses 2 cos(2πk/7), each alone, to 80 binary places", () => {
    const p = polynomial(-1, -2, 1, 1);
    const bounds = isolate(p);
    expect(bounds.map(middleOf)).toEqual([3, 2, 1].map((k) => expect.closeTo(2 * Math.cos((2 * Math.PI * k) / 7), 15)));
    for (const own of bounds) {
      expect(holdsRoot(p, own)).toBe(true);
      expect(own.high.minus(own.low).compare(Surd.ratio(1n, 1n << 80n))).toBeLessThanOrEqual(0);
    }
  });

  it("keeps the roots of the polynomial itself where coefficients are roots, not those of its conjugates", () => {
    // x² − (1 + √2/2): the conjugate has ±√(1 − √2/2)
    expect(isolate(polynomial("-1-sqrt(2)/2", 0, 1)).map(middleOf)).toEqual([
      expect.closeTo(-Math.sqrt(1 + Math.SQRT1_2), 14),
      expect.closeTo(Math.sqrt(1 + Math.SQRT1_2), 14),
    ]);
  });
});

describe("squareFreeFactors", () => {
  it("gives each power once, and multiplies back", () => {
    fc.assert(
      fc.property(wholes(6), (roots) => {
        const factors = squareFreeFactors(rooted(roots));
        const back = factors.reduce<Polynomial>(
          (p, { polynomial: f, multiplicity }) => Array.from({ length: multiplicity }, () => f).reduce(multiply, p),
          [Surd.one],
        );
        expect(samePolynomial(back, rooted(roots))).toBe(true);
        for (const { polynomial: f, multiplicity } of factors) {
          for (const root of new Set(roots)) {
            const isRoot = evaluate(f, Surd.from(root)).isZero;
            expect(isRoot).toBe(roots.filter((other) => other === root).length === multiplicity);
          }
        }
      }),
      { seed: 41, numRuns: 100 },
    );
  });
});

describe("coprimePolynomials", () => {
  it("leaves no common roots, and every given polynomial is a product of the base", () => {
    fc.assert(
      fc.property(fc.array(wholes(4), { minLength: 1, maxLength: 4 }), (lists) => {
        const sets = lists.map((list) => [...new Set(list)]);
        const base = coprimePolynomials(sets.map(rooted));
        const rootsOf = (p: Polynomial): number[] =>
          [...new Set(sets.flat())].filter((root) => evaluate(p, Surd.from(root)).isZero);
        const all = base.flatMap(rootsOf);
        expect(new Set(all).size).toBe(all.length);
        for (const set of sets) {
          const inside = base.filter((p) => rootsOf(p).every((root) => set.includes(root)));
          expect(inside.reduce((sum, p) => sum + degree(p), 0)).toBe(set.length);
        }
      }),
      { seed: 42, numRuns: 100 },
    );
  });
});

describe("comparePoints", () => {
  it("orders roots and numbers that are closer than the intervals are wide", () => {
    const p = polynomial(-1, -2, 1, 1);
    const [, , top] = isolate(p);
    if (top === undefined) throw new Error("three roots");
    const root = { kind: "root", polynomial: p, bounds: top } as const;
    for (const value of [top.low, top.low.plus(top.high).over(2), top.high]) {
      const below = evaluate(p, value).sign() < 0;
      expect(comparePoints({ kind: "value", value }, root)).toBe(below ? -1 : 1);
      expect(comparePoints(root, { kind: "value", value })).toBe(below ? 1 : -1);
    }
  });
});
