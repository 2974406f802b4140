import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { type RecogniseOptions, recognise } from "../../src/exact/recognise.js";
import { recogniseMatrix } from "../../src/exact/recognise-matrix.js";
import { Surd } from "../../src/exact/surd.js";
import { coupled, matrix } from "./matrices.js";

const text = (x: number, options?: RecogniseOptions): string | undefined => recognise(x, options)?.value.text();

describe("recognising a number", () => {
  it.each([
    [0, "0"],
    [-0, "0"],
    [0.5, "1/2"],
    [1 / 3, "1/3"],
    [-2 / 7, "-2/7"],
    [Math.sqrt(2 / 3), "sqrt(2/3)"],
    [0.816496580927726, "sqrt(2/3)"],
    [-Math.sqrt(3) / 2, "-1/2*sqrt(3)"],
    [Math.sqrt(110), "sqrt(110)"],
    [Math.sqrt(35) / 8, "1/8*sqrt(35)"],
    [Math.sqrt(7 / 128), "1/8*sqrt(7/2)"],
    [12345.678, "6172839/500"],
    [1e6 + 0.5, "2000001/2"],
  ])("%d is proposed as %s", (x, expected) => {
    const proposal = recognise(x);
    expect(proposal?.value.text()).toBe(expected);
    expect(proposal?.kind).toBe("proposal");
  });

  it.each([Math.PI, Math.E, 0.123456789, 1e-17, 1 / 1001, Math.cbrt(2), Math.sqrt(2) + Math.sqrt(3), 1e15 + 1 / 3])(
    "%d is not proposed",
    (x) => {
      expect(recognise(x)).toBeUndefined();
    },
  );

  it("says how far off the double is, rounded up", () => {
    const proposal = recognise(1 / 3);
    const off = Surd.from(1 / 3).minus("1/3");
    expect(Surd.from(proposal?.distance ?? 0).compare(off.negate())).toBeGreaterThanOrEqual(0);
    expect(proposal?.distance).toBeLessThan(2e-17);
    expect(recognise(0.75)?.distance).toBe(0);
  });

  it("keeps to the tolerance and leaves what is ambiguous alone", () => {
    const off = 1 / 3 + 1e-10;
    expect(text(off)).toBeUndefined();
    expect(text(off, { tolerance: 1e-9, maxDenominator: 30, maxSquare: 100 })).toBe("1/3");
    // at this tolerance 1/3 has neighbours with denominators up to 1000
    expect(text(1 / 3, { tolerance: 1e-6 })).toBeUndefined();
    // √(1/9999) and others crowd here
    expect(text(0.01, { tolerance: 1e-7, maxSquare: 10_000 })).toBeUndefined();
    expect(text(0.01, { tolerance: 1e-7, maxSquare: 0, maxDenominator: 100 })).toBe("1/100");
  });

  it("leaves a number alone whose neighbour on one side is near", () => {
    const sevenths = { maxDenominator: 7, maxSquare: 0 };
    // 4/7 below 3/5 and 3/7 above 2/5 are nearer than the neighbours on the other side
    expect(text(0.6, { ...sevenths, tolerance: 4e-5 })).toBe("3/5");
    expect(text(0.6, { ...sevenths, tolerance: 6e-5 })).toBeUndefined();
    expect(text(0.4, { ...sevenths, tolerance: 6e-5 })).toBe("2/5");
    expect(text(0.4, { ...sevenths, tolerance: 8e-5 })).toBeUndefined();
  });

  it("takes rounding noise for zero only on a stated scale", () => {
    expect(text(1e-17)).toBeUndefined();
    expect(text(1e-17, { scale: 1 })).toBe("0");
    expect(text(1e-9, { scale: 1 })).toBeUndefined();
  });

  it("finds every fraction and root within its bounds again", () => {
    fc.assert(
      fc.property(fc.integer({ min: -3000, max: 3000 }), fc.integer({ min: 1, max: 1000 }), (p, q) => {
        return recognise(p / q)?.value.equals(Surd.ratio(BigInt(p), BigInt(q))) === true;
      }),
      { seed: 131, numRuns: 300 },
    );
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 9999 }), fc.integer({ min: 1, max: 9999 }), (p, q) => {
        const root = Surd.sqrt(Surd.ratio(BigInt(p), BigInt(q))) as Surd;
        const found = recognise(-root.toNumber());
        // a fraction with a denominator above 1000 is not in the family
        return found?.value.equals(root.negate()) === true;
      }),
      { seed: 132, numRuns: 300 },
    );
  });

  it("proposes nothing for numbers without a pattern", () => {
    // fractional parts of multiples of π, none of them near a simple fraction or root
    const numbers = Array.from({ length: 2000 }, (_, k) => 10 * ((Math.PI * (k + 1)) % 1));
    expect(numbers.filter((x) => recognise(x) !== undefined)).toEqual([]);
  });

  it.each<[RecogniseOptions]>([
    [{ tolerance: -1 }],
    [{ tolerance: 1 }],
    [{ tolerance: Number.NaN }],
    [{ scale: -1 }],
    [{ scale: Number.POSITIVE_INFINITY }],
    [{ maxDenominator: 0 }],
    [{ maxDenominator: 1.5 }],
    [{ maxSquare: -1 }],
  ])("refuses %o", (options) => {
    expect(() => recognise(1, options)).toThrow(expect.objectContaining({ code: "option" }));
  });

  it("refuses NaN", () => {
    expect(() => recognise(Number.NaN)).toThrow(expect.objectContaining({ code: "not-finite" }));
  });
});

describe("recognising a matrix", () => {
  it("proposes the exact operator behind a floating one", () => {
    for (const operator of [
      coupled(3, 2).square,
      coupled(2, 1).plus,
      ExactOperator.from([
        ["i", "(1+i)/sqrt(2)"],
        [0, "-2/3"],
      ]),
    ]) {
      const proposal = recogniseMatrix(operator.toFloating().csr);
      if (proposal.kind !== "proposal") throw new Error("nothing proposed");
      expect(proposal.operator.equals(operator)).toBe(true);
      expect(proposal.distance).toBeLessThan(1e-14);
    }
    fc.assert(
      fc.property(matrix(4), (a) => {
        const proposal = recogniseMatrix(a.toFloating().csr);
        // parts such as 1/2 + √2/2 come together only in sums of duplicates
        if (proposal.kind === "proposal") expect(proposal.operator.equals(a)).toBe(true);
        else expect(proposal.entries.length).toBeGreaterThan(0);
      }),
      { seed: 134, numRuns: 100 },
    );
  });

  it("takes noise for zero, and lists what it does not know", () => {
    const csr = ExactOperator.from([
      [1, 2],
      [3, 4],
    ]).toFloating().csr;
    const noisy = { ...csr, re: Float64Array.from([1, 1e-17, 1e-17, Math.sqrt(2)]) };
    const proposal = recogniseMatrix(noisy);
    if (proposal.kind !== "proposal") throw new Error("nothing proposed");
    expect(proposal.operator.equals(ExactOperator.diagonal([1, "sqrt(2)"]))).toBe(true);
    const odd = { ...csr, re: Float64Array.from([1, Math.PI, 0.5, 2]) };
    expect(recogniseMatrix(odd)).toEqual({ kind: "none", entries: [{ row: 0, col: 1, re: Math.PI, im: 0 }] });
  });
});
