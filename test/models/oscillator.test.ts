import { expect, test } from "vitest";
import { oscillator } from "../../src/models/oscillator.js";

test("ladder, number, position and momentum", () => {
  const { a, adagger, number, x, p, n, kets } = oscillator(6);
  expect(n).toBe(6);
  expect(kets[5]).toBe("5");
  expect(a.entry(3, 4).re).toBe(2);
  expect(adagger.entry(4, 3).re).toBe(2);
  const count = adagger.times(a).minus(number);
  expect(count.norm).toBeLessThanOrEqual(count.error);
  const position = a.plus(adagger).scale(Math.SQRT1_2).minus(x);
  expect(position.norm).toBeLessThan(1e-15);
  const momentum = adagger.minus(a).scale({ re: 0, im: Math.SQRT1_2 }).minus(p);
  expect(momentum.norm).toBeLessThan(1e-15);
  const commutator = x.commutator(p);
  for (let k = 0; k < 5; k++) expect(commutator.entry(k, k).im).toBeCloseTo(1, 14);
  expect(commutator.entry(5, 5).im).toBeCloseTo(-5, 14); // the edge of the truncated space
});

test("powers of x are those of the whole oscillator, up to the last ket", () => {
  const small = oscillator(5);
  const large = oscillator(20);
  for (let power = 0; power <= 6; power++) {
    const product = large.x.power(power);
    for (let k = 0; k < 5; k++) {
      for (let l = 0; l < 5; l++) {
        const expected = product.entry(k, l).re;
        expect(Math.abs(small.xPower(power).entry(k, l).re - expected)).toBeLessThan(1e-13 * (1 + expected));
      }
    }
  }
  // ⟨k|x²|k⟩ = k + 1/2 and ⟨k|x⁴|k⟩ = (6k² + 6k + 3)/4.
  for (let k = 0; k < 5; k++) {
    expect(small.xPower(2).entry(k, k).re).toBe(k + 0.5);
    expect(small.xPower(4).entry(k, k).re).toBe((6 * k * k + 6 * k + 3) / 4);
  }
  expect(small.xPower(0).isExact).toBe(true);
});

test("radii cover the rounding, exact elements have none", () => {
  const { x, xPower } = oscillator(8);
  const difference = xPower(1).minus(x);
  expect(difference.norm).toBeLessThanOrEqual(difference.error);
  const diagonal = xPower(4);
  const { ptr, col } = diagonal.csr;
  for (let row = 0; row < 8; row++) {
    for (let e = ptr[row] ?? 0; e < (ptr[row + 1] ?? 0); e++) {
      if (col[e] === row) expect(diagonal.radius?.[e]).toBe(0);
    }
  }
});

test("misuse is refused", () => {
  const code = expect.objectContaining({ code: "option" });
  expect(() => oscillator(0)).toThrow(code);
  expect(() => oscillator(2.5)).toThrow(code);
  expect(() => oscillator(3).xPower(-1)).toThrow(code);
  expect(() => oscillator(3).xPower(65)).toThrow(code);
});
