import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { components } from "../../../src/numerics/eigen/components.js";

/** Components by repeated relabelling: slow, and written differently. */
function relabelled(n: number, joined: (i: number, j: number) => boolean): number[][] {
  const label = Array.from({ length: n }, (_, i) => i);
  for (let round = 0; round < n; round++) {
    for (let i = 0; i < n; i++) {
      for (let j = 0; j < i; j++) {
        if (joined(i, j)) label[i] = label[j] = Math.min(label[i] as number, label[j] as number);
      }
    }
  }
  return [...new Set(label)].map((l) => label.flatMap((m, i) => (m === l ? [i] : [])));
}

describe("components", () => {
  it("finds the pieces of any pattern, from real or imaginary entries of the lower triangle, at an offset", () => {
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 9 }),
        fc.array(fc.nat(80), { maxLength: 14 }),
        fc.nat(5),
        (n, picks, at) => {
          const re = new Float64Array(at + n * n).fill(Number.NaN, 0, at);
          const im = new Float64Array(at + n * n);
          for (let i = 0; i < n; i++) for (let j = i + 1; j < n; j++) re[at + i * n + j] = 9;
          for (const p of picks) {
            const [i, j] = [Math.max(p % n, Math.floor(p / 9) % n), Math.min(p % n, Math.floor(p / 9) % n)];
            (p % 2 === 0 ? re : im)[at + i * n + j] = 1;
          }
          const found = components(n, re, im, at);
          const known = relabelled(n, (i, j) => re[at + i * n + j] !== 0 || im[at + i * n + j] !== 0);
          expect(found?.map((part) => [...part])).toEqual(known.length === 1 ? undefined : known);
        },
      ),
      { seed: 3, numRuns: 300 },
    );
  });
});
