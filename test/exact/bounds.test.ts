import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { scaledBounds, signOfReal } from "../../src/exact/bounds.js";
import { Surd } from "../../src/exact/surd.js";
import { realSurd } from "./arbitrary.js";
import { inFixed, PLACES } from "./oracle.js";

describe("bounds in fixed point", () => {
  it("hold the number, strictly where it is irrational, and are as close as the number of roots says", () => {
    fc.assert(
      fc.property(realSurd, fc.integer({ min: 0, max: 60 }), (x, bits) => {
        const { terms } = x;
        const { lower, upper } = scaledBounds(terms, bits);
        const irrational = terms.roots.filter((r) => r !== 1n).length;
        expect(upper - lower).toBe(BigInt(irrational));
        // den · x · 2^400, to within a tiny part of one unit
        const value = inFixed(x).re * terms.den;
        const slack = irrational === 0 ? terms.den : 0n;
        const shift = PLACES - BigInt(bits);
        expect(lower << shift <= value + slack && value - slack <= upper << shift).toBe(true);
      }),
      { seed: 221, numRuns: 300 },
    );
    const of = (text: string): unknown => scaledBounds(Surd.from(text).terms, 0);
    expect(of("sqrt(2)")).toEqual({ lower: 1n, upper: 2n });
    expect(of("-sqrt(2)")).toEqual({ lower: -2n, upper: -1n });
    expect(of("-7")).toEqual({ lower: -7n, upper: -7n });
    expect(of("sqrt(3)-sqrt(2)")).toEqual({ lower: -1n, upper: 1n });
  });

  it("give the sign of numbers of all kinds", () => {
    const sign = (text: string): number => signOfReal(Surd.from(text).terms);
    expect(["0", "sqrt(2)-1", "1-sqrt(2)", "-3", "10^-50-sqrt(2)/10^60", "sqrt(2)/10^60-10^-50"].map(sign)).toEqual([
      0, 1, -1, -1, 1, -1,
    ]);
  });
});
