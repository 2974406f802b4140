import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { absolute, bitLength, exactSqrt, floorSqrt, gcd, gcdSafe, isSafe } from "../../src/exact/integer.js";

const large = fc.oneof(fc.bigInt(0n, 2n ** 60n), fc.bigInt(0n, 10n ** 120n));

describe("whole numbers", () => {
  it("have a greatest common divisor that divides both and leaves coprime parts", () => {
    fc.assert(
      fc.property(large, large, large, (a, b, c) => {
        const g = gcd(a * c, -b * c);
        if (g === 0n) return a * c === 0n && b * c === 0n;
        return (a * c) % g === 0n && (b * c) % g === 0n && gcd((a * c) / g, (b * c) / g) === 1n && g % (c || 1n) === 0n;
      }),
      { seed: 1 },
    );
    expect([gcdSafe(12, -18), gcdSafe(0, -5), gcdSafe(0, 0)]).toEqual([6, 5, 0]);
    expect(gcd(0n, 0n)).toBe(0n);
  });

  it("have a whole root between its neighbours, at squares and beside them", () => {
    fc.assert(
      fc.property(large, fc.constantFrom(-1n, 0n, 1n), (a, step) => {
        const n = a * a + step;
        if (n < 0n) return exactSqrt(n) === undefined;
        const r = floorSqrt(n);
        return r * r <= n && n < (r + 1n) * (r + 1n) && (exactSqrt(n) !== undefined) === (r * r === n);
      }),
      { seed: 2, numRuns: 300 },
    );
    for (const n of [0n, 1n, 2n, 3n, 4n, 2n ** 52n - 1n, 2n ** 52n, 2n ** 53n, (2n ** 53n - 1n) ** 2n - 1n]) {
      const r = floorSqrt(n);
      expect(r * r <= n && n < (r + 1n) * (r + 1n), `${n}`).toBe(true);
    }
  });

  it("know their binary digits and whether a double holds them", () => {
    fc.assert(
      fc.property(fc.bigInt(-(2n ** 200n), 2n ** 200n), (n) =>
        n === 0n ? bitLength(n) === 0 : bitLength(n) === absolute(n).toString(2).length,
      ),
      { seed: 3 },
    );
    expect([isSafe(2n ** 53n - 1n), isSafe(2n ** 53n), isSafe(-(2n ** 53n))]).toEqual([true, false, false]);
  });
});
