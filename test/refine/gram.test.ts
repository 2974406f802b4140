import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { orthonormalityDefect } from "../../src/refine/gram.js";
import type { Naive } from "../operator/naive.js";
import { double, fixed, frobenius, identity, matrix, minus, product } from "../support/fixed.js";
import { orthonormal, random } from "./support.js";

const parts = (rows: Naive): { re: Float64Array; im: Float64Array } => ({
  re: Float64Array.from(rows.flat(), (x) => x.re),
  im: Float64Array.from(rows.flat(), (x) => x.im),
});

/** ‖Q Q† − 1‖_F to 90 digits. */
function truth(count: number, length: number, re: Float64Array, im: Float64Array | undefined): number {
  const q = (sign: 1n | -1n, turned: boolean): ReturnType<typeof matrix> =>
    matrix(turned ? length : count, turned ? count : length, (i, j) => {
      const at = turned ? j * length + i : i * length + j;
      return [fixed(re[at] ?? 0), sign * fixed(im?.[at] ?? 0)];
    });
  return double(frobenius(minus(product(q(1n, false), q(-1n, true)), identity(count))));
}

describe("orthonormalityDefect", () => {
  for (const complex of [false, true]) {
    it(`is at least the exact defect of ${complex ? "complex" : "real"} orthonormal rows, and no looser than rounding allows`, () => {
      fc.assert(
        fc.property(
          fc.integer({ min: 1, max: 4 }),
          fc.integer({ min: 0, max: 5 }),
          fc.integer(),
          (count, more, seed) => {
            const length = count + more;
            const { re, im } = parts(orthonormal(count, length, random(seed), complex));
            const bound = orthonormalityDefect(count, length, re, complex ? im : undefined);
            const exact = truth(count, length, re, complex ? im : undefined);
            expect(bound).toBeGreaterThanOrEqual(exact);
            expect(bound).toBeLessThanOrEqual(exact + 4 * count * (length + 4) * 2 ** -53);
          },
        ),
        { seed: 31, numRuns: 150 },
      );
    });

    it(`bounds the defect of ${complex ? "complex" : "real"} rows of any length and direction`, () => {
      fc.assert(
        fc.property(
          fc.integer({ min: 1, max: 4 }),
          fc.integer({ min: 1, max: 5 }),
          fc.integer(),
          (count, length, seed) => {
            const next = random(seed);
            const re = Float64Array.from({ length: count * length }, next);
            const im = complex ? Float64Array.from({ length: count * length }, next) : undefined;
            const bound = orthonormalityDefect(count, length, re, im);
            const exact = truth(count, length, re, im);
            expect(bound).toBeGreaterThanOrEqual(exact);
            expect(bound).toBeLessThanOrEqual(exact * (1 + 1e-13) + 1e-13);
          },
        ),
        { seed: 32, numRuns: 100 },
      );
    });
  }

  it("sees what the computed products hide", () => {
    // 1 + 2^−60 rounds to 1, and the two rows' product cancels in floating point but not exactly
    const long = Float64Array.of(1, 2 ** -30);
    expect(orthonormalityDefect(1, 2, long, undefined)).toBeGreaterThanOrEqual(2 ** -60);
    const pair = Float64Array.of(1, 2 ** -53, 2 ** -53, -1 + 2 ** -54);
    expect(orthonormalityDefect(2, 2, pair, undefined)).toBeGreaterThanOrEqual(truth(2, 2, pair, undefined));
  });

  it("counts what small terms lose beside a large one, between rows as well", () => {
    // unit rows whose product is 1/2 and a thousand terms that each round away
    const length = 1003;
    const re = new Float64Array(2 * length);
    for (const row of [0, 1]) {
      re.fill(2 ** -27.1, row * length, (row + 1) * length);
      re[row * length] = Math.SQRT1_2;
      re[row * length + length - 2] = row === 0 ? Math.SQRT1_2 : 0;
      re[row * length + length - 1] = row === 0 ? 0 : Math.SQRT1_2;
    }
    const exact = truth(2, length, re, undefined);
    expect(exact - Math.SQRT1_2).toBeGreaterThan(1e-14);
    expect(orthonormalityDefect(2, length, re, undefined)).toBeGreaterThanOrEqual(exact);
  });

  it("distinguishes a row from its conjugate", () => {
    const re = Float64Array.of(Math.SQRT1_2, 0, Math.SQRT1_2, 0);
    const im = Float64Array.of(0, Math.SQRT1_2, 0, -Math.SQRT1_2);
    expect(orthonormalityDefect(2, 2, re, im)).toBeLessThan(1e-14);
    expect(orthonormalityDefect(2, 2, re, Float64Array.of(0, Math.SQRT1_2, 0, Math.SQRT1_2))).toBeGreaterThan(1);
  });
});
