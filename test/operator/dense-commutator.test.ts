import { describe, expect, it } from "vitest";
import { Operator } from "../../src/operator/operator.js";

/** A filled matrix of small Gaussian integers, the same every time. */
function gaussian(n: number, seed: number, real: boolean): { re: number[][]; im: number[][] } {
  const entry = (i: number, j: number, k: number): number => ((i * 7 + j * 13 + k * 5 + seed * 3) % 7) - 3;
  const rows = (k: number): number[][] =>
    Array.from({ length: n }, (_, i) =>
      Array.from({ length: n }, (_, j) => (k === 1 && real ? 0 : entry(i, j, k) || 1)),
    );
  return { re: rows(0), im: rows(1) };
}

/** The commutator by its definition, in integers. */
function definition(a: ReturnType<typeof gaussian>, b: ReturnType<typeof gaussian>, i: number, j: number): number[] {
  let [re, im] = [0, 0];
  for (let k = 0; k < a.re.length; k++) {
    const at = (m: typeof a, r: number, c: number): [number, number] => [m.re[r]?.[c] ?? 0, m.im[r]?.[c] ?? 0];
    const [ar, ai] = at(a, i, k);
    const [br, bi] = at(b, k, j);
    const [cr, ci] = at(b, i, k);
    const [dr, di] = at(a, k, j);
    re += ar * br - ai * bi - (cr * dr - ci * di);
    im += ar * bi + ai * br - (cr * di + ci * dr);
  }
  return [re, im];
}

describe("the commutator of small filled matrices", () => {
  for (const real of [true, false]) {
    it(`of ${real ? "real" : "complex"} integers is exact, and keeps purely imaginary elements`, () => {
      const [a, b] = [gaussian(9, 1, real), gaussian(9, 2, real)];
      const exact = { uncertainty: "exact" } as const;
      const c = Operator.from(a, exact).commutator(Operator.from(b, exact));
      expect(c.isExact).toBe(true);
      for (let i = 0; i < 9; i++) {
        for (let j = 0; j < 9; j++) {
          const [re, im] = definition(a, b, i, j);
          expect(c.entry(i, j)).toEqual({ re, im });
        }
      }
    });
  }

  it("agrees with the sparse form just above its size, radii included", () => {
    for (const n of [47, 48, 49, 50]) {
      const [a, b] = [gaussian(n, 3, false), gaussian(n, 4, false)];
      const scale = { re: 0.1, im: 0.3 };
      const left = Operator.from(a).scale(scale);
      const right = Operator.from(b).scale(scale);
      const c = left.commutator(right);
      const plain = left.times(right).minus(right.times(left));
      expect(c.minus(plain).norm).toBeLessThanOrEqual(c.error + plain.error);
      expect(c.error).toBeGreaterThan(plain.error / 16);
      expect(c.error).toBeLessThan(16 * plain.error);
    }
  });
});
