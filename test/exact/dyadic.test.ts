import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { dyadic } from "../../src/exact/dyadic.js";

describe("the dyadic value of a double", () => {
  it("is the value of its bits", () => {
    expect(dyadic("test", 0.1)).toEqual({ numerator: 3602879701896397n, exponent: -55 });
    expect(dyadic("test", -6)).toEqual({ numerator: -3n, exponent: 1 });
    expect(dyadic("test", 5e-324)).toEqual({ numerator: 1n, exponent: -1074 });
    expect(dyadic("test", Number.MAX_VALUE)).toEqual({ numerator: 2n ** 53n - 1n, exponent: 971 });
    expect(dyadic("test", -0)).toEqual({ numerator: 0n, exponent: 0 });
  });

  it("gives every double back", () => {
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (x) => {
        const { numerator, exponent } = dyadic("test", x);
        const half = Math.trunc(exponent / 2);
        return Number(numerator) * 2 ** half * 2 ** (exponent - half) === x;
      }),
      { seed: 6, numRuns: 500 },
    );
  });

  it("does not exist for NaN and infinities", () => {
    for (const x of [Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]) {
      expect(() => dyadic("test", x)).toThrow(expect.objectContaining({ code: "not-finite" }));
      expect(() => dyadic("test", x)).toThrow(GoodBasisError);
    }
  });
});
