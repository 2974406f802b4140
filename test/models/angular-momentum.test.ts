import { describe, expect, test } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";

describe.each([0, 0.5, 1, 1.5, 2, 4.5, 7])("j = %d", (j) => {
  const { x, y, z, plus, minus, squared, n, kets } = angularMomentum(j);

  test("commutation relations within the radii", () => {
    const i = { re: 0, im: 1 };
    for (const [a, b, c] of [
      [x, y, z],
      [y, z, x],
      [z, x, y],
    ] as const) {
      const defect = a.commutator(b).minus(c.scale(i));
      expect(defect.norm).toBeLessThanOrEqual(defect.error);
      expect(defect.error).toBeLessThan(1e-12);
    }
    const casimir = x.times(x).plus(y.times(y)).plus(z.times(z)).minus(squared);
    expect(casimir.norm).toBeLessThanOrEqual(casimir.error);
    for (const operator of [x, y, z, squared]) expect(operator.isHermitian).toBe(true);
  });

  test("order, phases and exactness", () => {
    expect(n).toBe(2 * j + 1);
    expect(kets).toHaveLength(n);
    expect(z.entry(0, 0).re).toBe(j);
    expect(z.entry(n - 1, n - 1).re).toBe(0 - j);
    expect(z.isExact && squared.isExact).toBe(true);
    expect(squared.entry(0, 0).re).toBe(j * (j + 1));
    for (let k = 1; k < n; k++) {
      const m = j - k;
      expect(plus.entry(k - 1, k).re).toBeCloseTo(Math.sqrt(j * (j + 1) - m * (m + 1)), 14);
      expect(minus.entry(k, k - 1)).toEqual(plus.entry(k - 1, k));
    }
    expect(x.isReal).toBe(true);
  });
});

test("spin 1/2 is the Pauli matrices halved, exact", () => {
  const { x, y, z, kets } = angularMomentum(0.5);
  expect(x.entry(0, 1)).toEqual({ re: 0.5, im: 0 });
  expect(y.entry(0, 1)).toEqual({ re: 0, im: -0.5 });
  expect(y.entry(1, 0)).toEqual({ re: 0, im: 0.5 });
  expect(x.isExact && y.isExact && z.isExact).toBe(true);
  expect(kets).toEqual(["1/2", "-1/2"]);
  expect(angularMomentum(1).kets).toEqual(["1", "0", "-1"]);
});

test("whole roots are exact, others carry half a unit in the last place", () => {
  const { plus } = angularMomentum(1.5); // √3, 2, √3
  expect([...(plus.radius ?? [])].map((r) => r > 0)).toEqual([true, false, true]);
});

test.each([-1, 0.3, Number.NaN, Number.POSITIVE_INFINITY])("j = %d is refused", (j) => {
  expect(() => angularMomentum(j)).toThrow(GoodBasisError);
  expect(() => angularMomentum(j)).toThrow(/j must be/);
});
