import { describe, expect, it } from "vitest";
import { recomputeWeights, secularRoot } from "../../../src/numerics/eigen/secular.js";
import { generator, U } from "./matrices.js";

function solveAll(poles: Float64Array, z: Float64Array) {
  const count = poles.length;
  const weights = z.map((x) => x * x);
  const total = weights.reduce((sum, w) => sum + w, 0);
  const gaps = new Float64Array(count * count);
  const roots = Float64Array.from(poles, (_, j) => secularRoot(count, j, poles, weights, total, gaps, j * count));
  return { count, weights, total, gaps, roots };
}

/** Poles and z of different kinds, with gaps down to a few units in the last place. */
const CASES: [string, (k: number, random: () => number) => [number, number]][] = [
  ["spread", (k, random) => [k, random() + 0.6]],
  ["tiny weights", (k, random) => [k, 1e-15 * (random() + 0.6)]],
  ["close poles", (k, random) => [1 + k * 2 ** -48, random() - 0.6]],
  ["close poles at zero", (k, random) => [k * 2 ** -48, random() + 0.6]],
  ["mixed", (k, random) => [(k >> 1) + (k % 2) * 1e-13, k % 3 === 0 ? 1e-14 : random() + 0.6]],
];

describe("secularRoot and recomputeWeights", () => {
  it.each(CASES)("give interlacing roots, the trace, and orthonormal vectors: %s", (_, make) => {
    for (const count of [1, 2, 3, 8, 30]) {
      const random = generator(count);
      const pairs = Array.from({ length: count }, (_, k) => make(k, random));
      const poles = Float64Array.from(pairs, ([d]) => d);
      const z = Float64Array.from(pairs, ([, x]) => x);
      const { weights, gaps, roots, total } = solveAll(poles, z);
      for (let j = 0; j < count; j++) {
        expect(gaps[j * count + j]).toBeLessThan(0);
        if (j + 1 < count) expect(gaps[j * count + j + 1]).toBeGreaterThan(0);
      }
      const norm = Math.max(...poles.map(Math.abs), total);
      const trace = (m: Float64Array): number => m.reduce((sum, x) => sum + x, 0);
      expect(Math.abs(trace(roots) - trace(poles) - trace(weights))).toBeLessThanOrEqual(4 * count * count * U * norm);

      const again = z.slice();
      recomputeWeights(count, poles, gaps, again);
      expect(again.map(Math.sign)).toEqual(z.map(Math.sign));
      const vectors = Array.from({ length: count }, (_, j) => {
        const v = again.map((x, i) => x / (gaps[j * count + i] as number));
        const length = Math.sqrt(v.reduce((sum, x) => sum + x * x, 0));
        return v.map((x) => x / length);
      });
      vectors.forEach((v, j) => {
        for (const w of vectors.slice(0, j)) {
          const overlap = v.reduce((sum, x, i) => sum + x * (w[i] as number), 0);
          expect(Math.abs(overlap)).toBeLessThanOrEqual(10 * count * U);
        }
      });
    }
  });

  it("finds the roots of a problem known in closed form", () => {
    // diag(0, 3) + (1, 1)(1, 1)ᵀ has trace 5 and determinant 3.
    const { roots } = solveAll(Float64Array.of(0, 3), Float64Array.of(1, 1));
    expect(Math.abs((roots[0] as number) - (5 - Math.sqrt(13)) / 2)).toBeLessThanOrEqual(4 * U);
    expect(Math.abs((roots[1] as number) - (5 + Math.sqrt(13)) / 2)).toBeLessThanOrEqual(16 * U);
  });

  it("ends with an error where no root can be found", () => {
    const poles = Float64Array.of(0, Number.NaN, 2);
    const ones = Float64Array.of(1, 1, 1);
    expect(() => secularRoot(3, 0, poles, ones, 3, new Float64Array(3), 0)).toThrow(
      expect.objectContaining({ code: "no-convergence" }),
    );
  });
});
