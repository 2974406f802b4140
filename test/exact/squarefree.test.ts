import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { splitSafe, splitSquare } from "../../src/exact/squarefree.js";

function isSquareFree(n: bigint): boolean {
  for (let k = 2n; k * k <= n; k++) if (n % (k * k) === 0n) return false;
  return true;
}

describe("square factors", () => {
  it("are all found in every number up to 5000", () => {
    for (let n = 1n; n <= 5000n; n++) {
      const { square, free, certified } = splitSquare(n);
      expect([square * square * free, certified, isSquareFree(free)]).toEqual([n, true, true]);
    }
  });

  it("are all found up to 2^53, primes near the cube root and large squares included", () => {
    // 208063 is the last prime below the cube root of 2^53, 94906249 one below its square root
    for (const [p, q] of [
      [208063n, 208067n],
      [94906249n, 1n],
      [1009n, 1013n],
      [65537n, 3n],
      [2n, 3n],
    ] as const) {
      const split = splitSquare(p * p * q);
      expect([split.square, split.free, split.certified]).toEqual([p, q, true]);
    }
    fc.assert(
      fc.property(fc.bigInt(1n, 100_000n), fc.bigInt(1n, 300n), (s, f) => {
        const { square, free } = splitSafe(Number(s * s * f));
        return BigInt(square) ** 2n * BigInt(free) === s * s * f && isSquareFree(BigInt(free));
      }),
      { seed: 4 },
    );
  });

  it("beyond 2^53 are found among small divisors and as a whole square; what is left says so", () => {
    const p = 10n ** 18n + 9n;
    expect(splitSquare(p * p)).toEqual({ square: p, free: 1n, certified: true });
    expect(splitSquare(12n * p * p)).toEqual({ square: 2n * p, free: 3n, certified: true });
    expect(splitSquare(2n ** 101n * 3n ** 40n)).toEqual({ square: 2n ** 50n * 3n ** 20n, free: 2n, certified: true });
    expect(splitSquare(18n * p)).toEqual({ square: 3n, free: 2n * p, certified: false });
    expect(splitSquare(997n ** 2n * 1009n * 10n ** 14n)).toEqual({
      square: 997n * 10n ** 7n,
      free: 1009n,
      certified: true,
    });
  });
});
