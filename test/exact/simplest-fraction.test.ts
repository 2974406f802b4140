import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { fareyNeighbours, type Ratio, simplestBetween } from "../../src/exact/simplest-fraction.js";

const compare = ([a, b]: Ratio, [c, d]: Ratio): number => Math.sign(Number(a * d - c * b));

/** All fractions with small denominators between 0 and 5, ascending, in lowest terms. */
function fractions(most: bigint): Ratio[] {
  const list: Ratio[] = [];
  for (let q = 1n; q <= most; q++) {
    for (let p = 0n; p <= 5n * q; p++) {
      if (!list.some((f) => compare(f, [p, q]) === 0)) list.push([p, q]);
    }
  }
  return list.sort(compare);
}

describe("simple fractions", () => {
  const all = fractions(9n);
  const place = fc.tuple(fc.bigInt(0n, 400n), fc.bigInt(1n, 100n)).filter(([p, q]) => p <= 4n * q);

  it("are the simplest of an interval", () => {
    fc.assert(
      fc.property(place, place, (a, b) => {
        const [low, high] = compare(a, b) <= 0 ? [a, b] : [b, a];
        const [p, q] = simplestBetween(low, high);
        expect(compare(low, [p, q]) <= 0 && compare([p, q], high) <= 0).toBe(true);
        const inside = all.filter((f) => compare(low, f) <= 0 && compare(f, high) <= 0);
        const least = BigInt(Math.min(100, ...inside.map((f) => Number(f[1]))));
        expect(q <= 9n ? q : 100n).toBe(least);
      }),
      { seed: 121, numRuns: 500 },
    );
    expect(simplestBetween([314159n, 100000n], [314160n, 100000n])).toEqual([355n, 113n]);
  });

  it("know their neighbours", () => {
    for (const [k, f] of all.entries()) {
      const { below, above } = fareyNeighbours(f, 9n);
      const [before, after] = [all[k - 1], all[k + 1]];
      if (before !== undefined) expect(below).toEqual(before);
      if (after !== undefined) expect(above).toEqual(after);
    }
  });
});
