import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { maximalCommutingSets, SET_BUDGET } from "../../src/audit/commuting-sets.js";

/** Every subset tried. */
function bruteForce(n: number, commutes: (a: number, b: number) => boolean): number[][] {
  const members = (mask: number): number[] =>
    Array.from({ length: n }, (_, i) => i).filter((i) => (mask >> i) % 2 === 1);
  const good = Array.from({ length: 2 ** n }, (_, mask) => mask).filter((mask) => {
    const list = members(mask);
    return list.length > 0 && list.every((a, k) => list.slice(0, k).every((b) => commutes(a, b)));
  });
  return good.filter((mask) => !good.some((other) => other !== mask && (other & mask) === mask)).map(members);
}

const ascending = (a: readonly number[], b: readonly number[]): number => {
  const at = a.findIndex((x, k) => x !== b[k]);
  return (a[at] ?? 0) - (b[at] ?? 0);
};

describe("maximalCommutingSets", () => {
  it("finds exactly the maximal sets of every random relation, in lexicographic order", () => {
    const relations = fc
      .integer({ min: 0, max: 8 })
      .chain((n) =>
        fc.record({ n: fc.constant(n), bits: fc.array(fc.boolean(), { minLength: n * n, maxLength: n * n }) }),
      );
    fc.assert(
      fc.property(relations, ({ n, bits }) => {
        const commutes = (a: number, b: number): boolean => bits[Math.min(a, b) * n + Math.max(a, b)] === true;
        const { sets, complete } = maximalCommutingSets(n, commutes);
        expect(complete).toBe(true);
        expect(sets).toEqual(bruteForce(n, commutes).sort(ascending));
      }),
      { seed: 81, numRuns: 200 },
    );
  });

  it("never asks whether a member commutes with itself", () => {
    const { sets } = maximalCommutingSets(4, (a, b) => {
      if (a === b) throw new Error("asked about itself");
      return (a + b) % 2 === 1;
    });
    expect(sets).toEqual([
      [0, 1],
      [0, 3],
      [1, 2],
      [2, 3],
    ]);
  });

  it("none, one, and the two extremes", () => {
    expect(maximalCommutingSets(0, () => true)).toEqual({ sets: [], complete: true });
    expect(maximalCommutingSets(1, () => false)).toEqual({ sets: [[0]], complete: true });
    expect(maximalCommutingSets(30, () => true).sets).toEqual([Array.from({ length: 30 }, (_, i) => i)]);
    expect(maximalCommutingSets(30, () => false).sets).toEqual(Array.from({ length: 30 }, (_, i) => [i]));
  });

  it("stops at its budget, says so, and reports only true maximal sets", () => {
    // Moon and Moser's relation: 3^k maximal sets of 3k members
    const commutes = (a: number, b: number): boolean => Math.floor(a / 3) !== Math.floor(b / 3);
    expect(maximalCommutingSets(12, commutes)).toMatchObject({ complete: true });
    expect(maximalCommutingSets(12, commutes).sets).toHaveLength(81);
    const cut = maximalCommutingSets(12, commutes, 50);
    expect(cut.complete).toBe(false);
    expect(cut.sets.length).toBeGreaterThan(0);
    expect(cut.sets.length).toBeLessThan(81);
    for (const set of cut.sets) expect(set.map((x) => Math.floor(x / 3))).toEqual([0, 1, 2, 3]);
    const large = maximalCommutingSets(45, commutes);
    expect(large.complete).toBe(false);
    expect(large.sets.length).toBeLessThanOrEqual(SET_BUDGET);
    expect(maximalCommutingSets(2, () => true, 0)).toEqual({ sets: [], complete: false });
    expect(maximalCommutingSets(1, () => true, 1)).toEqual({ sets: [], complete: false });
    expect(maximalCommutingSets(1, () => true, 2)).toEqual({ sets: [[0]], complete: true });
  });

  it("a budget that is just enough is complete", () => {
    const steps =
      Array.from({ length: 200 }, (_, k) => k).find(
        (k) => maximalCommutingSets(5, (a, b) => (a * b) % 3 !== 1, k).complete,
      ) ?? -1;
    expect(steps).toBeGreaterThan(2);
    expect(maximalCommutingSets(5, (a, b) => (a * b) % 3 !== 1, steps).sets).toEqual(
      bruteForce(5, (a, b) => (a * b) % 3 !== 1).sort(ascending),
    );
  });
});
