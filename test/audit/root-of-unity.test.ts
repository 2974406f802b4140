import { describe, expect, it } from "vitest";
import { rootOfUnity } from "../../src/audit/root-of-unity.js";
import { double, fixed, ONE, size, times } from "../support/fixed.js";

/** arctan(1/x) in fixed point, by its power series. */
function arctanInverse(x: bigint): bigint {
  let power = ONE / x;
  let sum = power;
  for (let k = 3n; power !== 0n; k += 2n) {
    power = -power / (x * x);
    sum += power / k;
  }
  return sum;
}

const TWO_PI = 2n * 4n * (4n * arctanInverse(5n) - arctanInverse(239n));

/** cos and sin in fixed point, by their power series. */
function cosineAndSine(angle: bigint): [bigint, bigint] {
  const sums: [bigint, bigint] = [0n, 0n];
  let term = ONE;
  for (let k = 0n; size(term) > 8n || k < 8n; k++) {
    const sign = (k >> 1n) % 2n === 0n ? 1n : -1n;
    sums[Number(k % 2n) as 0 | 1] += sign * term;
    term = times(term, angle) / (k + 1n);
  }
  return sums;
}

const ulp = (x: number): number => (x === 0 ? 1e-80 : 2 ** (Math.floor(Math.log2(Math.abs(x))) - 52));

describe("rootOfUnity", () => {
  it("is exact at twelfths where the coordinates are 0, ±1/2, ±1, whatever the order", () => {
    const cosines = [1, undefined, 0.5, 0, -0.5, undefined, -1, undefined, -0.5, 0, 0.5, undefined];
    for (const factor of [1, 2, 3, 5, 7, 1000, 83_333]) {
      for (let k = -12; k < 24; k++) {
        const { re, im } = rootOfUnity(k * factor, 12 * factor);
        const twelfth = ((k % 12) + 12) % 12;
        const cosine = cosines[twelfth];
        const sine = cosines[(twelfth + 9) % 12];
        if (cosine !== undefined) expect(re).toBe(cosine);
        if (sine !== undefined) expect(im).toBe(sine);
      }
    }
  });

  it("is within two units in the last place of the truth for every root of many orders", () => {
    for (const order of [1, 2, 3, 5, 7, 8, 9, 10, 16, 24, 31, 48, 100, 147, 360]) {
      for (let k = 0; k < order; k++) {
        const { re, im } = rootOfUnity(k, order);
        const [cosine, sine] = cosineAndSine((TWO_PI * BigInt(k)) / BigInt(order));
        expect(double(size(fixed(re) - cosine)), `cos ${k}/${order}`).toBeLessThanOrEqual(2 * ulp(re));
        expect(double(size(fixed(im) - sine)), `sin ${k}/${order}`).toBeLessThanOrEqual(2 * ulp(im));
      }
    }
  });

  it("obeys the symmetries of the circle bit for bit", () => {
    for (const order of [4, 6, 10, 14, 60]) {
      for (let k = 0; k < order; k++) {
        const root = rootOfUnity(k, order);
        const conjugate = rootOfUnity(-k, order);
        const opposite = rootOfUnity(k + order / 2, order);
        expect([conjugate.re, conjugate.im + 0]).toEqual([root.re, 0 - root.im]);
        expect([opposite.re, opposite.im]).toEqual([0 - root.re, 0 - root.im]);
        expect(rootOfUnity(k - 3 * order, order)).toEqual(root);
      }
    }
  });
});
