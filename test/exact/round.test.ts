import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { roundQuotient, roundRoot } from "../../src/exact/round.js";
import { Surd } from "../../src/exact/surd.js";
import { realSurd, rootOf } from "./arbitrary.js";
import { inFixed, ofDouble, PLACES, root } from "./oracle.js";

/** The double above, by its bits. */
function next(x: number): number {
  const view = new DataView(new ArrayBuffer(8));
  view.setFloat64(0, x);
  const bits = view.getBigInt64(0);
  view.setBigInt64(0, x === 0 ? 1n : x > 0 ? bits + 1n : bits - 1n);
  return view.getFloat64(0);
}
const previous = (x: number): number => -next(-x);

describe("rounding to a double", () => {
  it("is to nearest: the value lies between the midpoints to both neighbours", () => {
    const slack = 1n << 60n;
    fc.assert(
      fc.property(realSurd, (x) => {
        const y = x.toNumber();
        if (y === 0) return x.isZero;
        const value = 2n * inFixed(x).re;
        const [low, at, high] = [previous(y), y, next(y)].map(ofDouble) as [bigint, bigint, bigint];
        return low + at <= value + slack && value - slack <= at + high;
      }),
      { seed: 51, numRuns: 500 },
    );
  });

  it("sees a difference of 2^−390 beside a midpoint", () => {
    // √(m² ± tiny) around the midpoint m = 1 + 2^−53
    const middle = Surd.ratio(2n ** 53n + 1n, 2n ** 53n);
    const tiny = Surd.ratio(1n, 2n ** 390n);
    const square = middle.times(middle);
    const above = Surd.sqrt(square.plus(tiny)) as Surd;
    const below = Surd.sqrt(square.minus(tiny)) as Surd;
    expect([above.toNumber(), below.toNumber(), middle.toNumber()]).toEqual([1 + 2 ** -52, 1, 1]);
    expect(middle.times(rootOf(4n)).toNumber()).toBe(2);
  });

  it("breaks ties to even, at every size, and rounds subnormal numbers once", () => {
    const of = (n: bigint, e: number): number =>
      e >= 0 ? roundQuotient(n << BigInt(e), 1n, "nearest") : roundQuotient(n, 1n << BigInt(-e), "nearest");
    for (const e of [-1074, -1000, -60, 0, 60, 900]) {
      const unit = 2 ** Math.max(e, -1074);
      expect(of(2n ** 53n + 1n, e)).toBe(2 ** 53 * unit);
      expect(of(2n ** 53n + 3n, e)).toBe((2 ** 53 + 4) * unit);
      expect(of(-(2n ** 53n) - 3n, e)).toBe(-(2 ** 53 + 4) * unit);
    }
    expect([of(1n, -1075), of(3n, -1075), of(5n, -1075)]).toEqual([0, 1e-323, 1e-323]);
    expect(of((1n << 40n) + 1n, -1115)).toBe(5e-324);
    expect(of(2n ** 53n - 1n, -1075)).toBe(2 ** -1022);
  });

  it("overflows at half a unit above the largest double", () => {
    const edge = (2n ** 54n - 1n) << 970n;
    expect(roundQuotient(edge, 1n, "nearest")).toBe(Number.POSITIVE_INFINITY);
    expect(roundQuotient(edge - 1n, 1n, "nearest")).toBe(Number.MAX_VALUE);
    expect(roundQuotient(-edge, 1n, "nearest")).toBe(Number.NEGATIVE_INFINITY);
    expect(roundQuotient(edge * edge, 1n, "down")).toBe(Number.MAX_VALUE);
    expect(roundQuotient(edge * edge, 1n, "up")).toBe(Number.POSITIVE_INFINITY);
    expect(roundQuotient(-edge * edge, 1n, "up")).toBe(-Number.MAX_VALUE);
    expect(Surd.from(`sqrt(10^620+1)`).toNumber()).toBe(Number.POSITIVE_INFINITY);
    expect(Surd.from(`sqrt(10^620+1)`).enclosure()).toEqual([Number.MAX_VALUE, Number.POSITIVE_INFINITY]);
  });

  it("is that of the machine for quotients of doubles", () => {
    fc.assert(
      fc.property(fc.maxSafeInteger(), fc.integer({ min: 1, max: 2 ** 31 }), (n, d) => {
        return roundQuotient(BigInt(n), BigInt(d), "nearest") === n / d + 0;
      }),
      { seed: 52, numRuns: 500 },
    );
  });

  it("is that of the machine for square roots of doubles", () => {
    fc.assert(
      fc.property(fc.double({ min: 0, noNaN: true, noDefaultInfinity: true }), (x) => {
        return roundRoot(Surd.from(x).terms) === Math.sqrt(x);
      }),
      { seed: 53, numRuns: 300 },
    );
  });

  it("gives every power of two", () => {
    for (let e = -1074; e <= 1023; e++) {
      const value = e >= 0 ? Surd.from(2n ** BigInt(e)) : Surd.ratio(1n, 2n ** BigInt(-e));
      const [low, high] = value.enclosure();
      expect(low === high && low === value.toNumber() && Math.log2(low) === e, `2^${e}`).toBe(true);
    }
  });
});

describe("the enclosure", () => {
  it("is the value itself where a double holds it, else two neighbours around it", () => {
    fc.assert(
      fc.property(realSurd, (x) => {
        const [low, high] = x.enclosure();
        expect(Surd.from(low).compare(x)).toBeLessThanOrEqual(0);
        expect(Surd.from(high).compare(x)).toBeGreaterThanOrEqual(0);
        expect(low === high || next(low) === high).toBe(true);
        expect(low === high).toBe(Surd.from(low).equals(x));
        expect([low, high]).toContain(x.toNumber());
      }),
      { seed: 54, numRuns: 200 },
    );
  });

  it("reaches down to the smallest double", () => {
    const tiny = Surd.from("sqrt(2)/10^400");
    expect(tiny.enclosure()).toEqual([0, 5e-324]);
    expect(
      tiny
        .negate()
        .enclosure()
        .map((x) => x + 0),
    ).toEqual([-5e-324, 0]);
    expect(tiny.toNumber()).toBe(0);
  });
});

describe("nested roots", () => {
  it("are rounded correctly without being in the field", () => {
    // 5e-41 less 1.25e-121, found after cancellation
    expect(roundRoot(Surd.from("sqrt(10^80+1)-10^40").terms)).toBe(7.071067811865475e-21);
    expect(roundRoot(Surd.from("4/9").terms)).toBe(2 / 3);
    fc.assert(
      fc.property(realSurd, (x) => {
        const y = x.times(x).plus("1/7+sqrt(2)");
        const value = root(inFixed(y).re, 1n << PLACES).re;
        const found = roundRoot(y.terms);
        const slack = 1n << 100n;
        const [low, at, high] = [previous(found), found, next(found)].map(ofDouble) as [bigint, bigint, bigint];
        return low + at <= 2n * value + slack && 2n * value - slack <= at + high;
      }),
      { seed: 55, numRuns: 200 },
    );
  });
});
