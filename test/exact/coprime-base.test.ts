import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { coprimeBase, overBase } from "../../src/exact/coprime-base.js";
import { exactSqrt, gcd } from "../../src/exact/integer.js";

describe("the coprime base", () => {
  it("splits 6, 10 and 15 into 2, 3 and 5, and leaves 210 whole", () => {
    expect(coprimeBase([6n, 10n, 15n])).toEqual([2n, 3n, 5n]);
    expect(coprimeBase([210n])).toEqual([210n]);
    expect(coprimeBase([210n, 210n, 1n])).toEqual([210n]);
    expect(coprimeBase([])).toEqual([]);
  });

  it("replaces squares by their roots", () => {
    expect(coprimeBase([16n, 81n])).toEqual([2n, 3n]);
    expect(overBase(72n, [2n, 3n])).toEqual({ square: 6n, free: 2n });
  });

  it("is pairwise coprime, without squares, and every number is a product of its powers, in any order", () => {
    fc.assert(
      fc.property(fc.array(fc.bigInt(1n, 100_000n), { maxLength: 8 }), (numbers) => {
        const base = coprimeBase(numbers);
        base.forEach((a, j) => {
          expect(exactSqrt(a)).toBeUndefined();
          for (const b of base.slice(j + 1)) expect(gcd(a, b)).toBe(1n);
        });
        for (const n of numbers) {
          const { square, free } = overBase(n, base);
          expect(square * square * free).toBe(n);
        }
        expect(coprimeBase([...numbers].reverse())).toEqual(base);
      }),
      { seed: 5, numRuns: 200 },
    );
  });

  it("tells large numbers apart that share an unknown factor", () => {
    const [p, q, r] = [10n ** 18n + 9n, 10n ** 18n + 3n, 10n ** 17n + 3n];
    const base = coprimeBase([p * q, q * r]);
    expect(base).toEqual([p, q, r].sort((a, b) => (a < b ? -1 : 1)));
  });
});
