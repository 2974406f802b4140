import { describe, expect, it } from "vitest";
import { Operator } from "../../src/index.js";
import { hopping } from "../../src/models/lattice.js";
import { ketPermutation } from "../../src/models/permutations.js";
import {
  bruteForce,
  expectAllOrders,
  expectEnclosed,
  expectNear,
  expectValues,
  goodBasis,
  pick,
  shift,
  symmetric,
} from "./support.js";

// Rayleigh, The Theory of Sound, vol. I, on the effect of a small change of mass and on a ring with a small load; from memory.
describe("ring of six equal masses with one changed", () => {
  const n = 6;
  const ring = hopping(
    n,
    Array.from({ length: n }, (_, i) => [i, (i + 1) % n] as const),
  );
  const K = Operator.identity(n).scale(2).minus(ring);
  const P = symmetric(n, [[0, 0, 1]]);
  // M^{-1/2} K M^{-1/2} with M = 1 + ε P, to first order in ε.
  const v = P.anticommutator(K).scale(-0.5);
  const reflection = { operator: ketPermutation([0, 5, 4, 3, 2, 1]), label: "parity" } as const;
  const basis = goodBasis({ h0: K, v, candidates: { reflection } }, { depth: "labels" });

  it("has the frequencies 4 sin²(πk/N), the pairs told apart by reflection", () => {
    expectValues(
      bruteForce(K),
      [
        [0, 1],
        [1, 2],
        [3, 2],
        [4, 1],
      ],
      1e-10,
    );
    expectAllOrders(basis.study);
  });

  it.each([
    { square: 0, sign: 1, slope: 0 },
    { square: 1, sign: 1, slope: -1 / 3 },
    { square: 1, sign: -1, slope: 0 },
    { square: 3, sign: 1, slope: -1 },
    { square: 3, sign: -1, slope: 0 },
    { square: 4, sign: 1, slope: -2 / 3 },
  ])("d(ω²)/dε = $slope for ω² = $square, reflection $sign", ({ square, sign, slope }) => {
    expectEnclosed(shift(pick(basis, square, { reflection: sign })), slope, 1e-10);
  });

  it("agrees with the generalised eigenvalues at ε = 1e-5", () => {
    const epsilon = 1e-5;
    const root = Operator.diagonal([1 / Math.sqrt(1 + epsilon), 1, 1, 1, 1, 1]);
    const found = bruteForce(root.times(K).times(root)).sort((a, b) => a - b);
    const slopes = [0, 1, 1, 3, 3, 4].map((square, k) => ((found[k] ?? Number.NaN) - square) / epsilon);
    expect(slopes).toHaveLength(n);
    expectValues(
      slopes,
      [
        [0, 3],
        [-1 / 3, 1],
        [-1, 1],
        [-2 / 3, 1],
      ],
      2e-5,
    );
    expectNear(slopes[0] ?? Number.NaN, 0, 2e-5);
  });
});
