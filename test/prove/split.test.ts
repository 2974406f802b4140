import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { hermitianEigen } from "../../src/numerics/eigen.js";
import { proofBudget } from "../../src/prove/budget.js";
import { isolate, middleOf } from "../../src/prove/roots.js";
import { type Part, polynomialOf, splitMatrix } from "../../src/prove/split.js";
import { smallSurd } from "../exact/arbitrary.js";
import { matrix } from "../exact/matrices.js";

const ones = (n: number): Surd[] => new Array<Surd>(n).fill(Surd.one);

/** The values of the parts with their multiplicities, as doubles, ascending. */
function valuesOf(parts: readonly Part[]): number[] {
  return parts
    .flatMap(({ value, coordinates }) => {
      if (value.kind === "unknown") throw new Error("unknown");
      if (value.kind === "value") return coordinates.map(() => value.value.toNumber());
      const { polynomial, multiplicity } = value.factor;
      return isolate(polynomial).flatMap((bounds) => new Array<number>(multiplicity).fill(middleOf(bounds)));
    })
    .sort((a, b) => a - b);
}

/** The dimensions of exact parts, but for the one at 5. */
function exactOnes(parts: readonly Part[]): number {
  return parts.reduce((sum, { value, coordinates }) => sum + (value.kind === "value" ? coordinates.length : 0), 0) - 1;
}

describe("splitMatrix", () => {
  const hermitian = (n: number): fc.Arbitrary<ExactOperator> => matrix(n, smallSurd).map((a) => a.plus(a.adjoint()));

  it("has the eigenvalues of the floating solver, and proves each part, for random surd matrices", () => {
    fc.assert(
      fc.property(fc.integer({ min: 2, max: 5 }).chain(hermitian), (a) => {
        const parts = splitMatrix(a, ones(a.n), proofBudget());
        expect(parts.reduce((sum, { coordinates }) => sum + coordinates.length, 0)).toBe(a.n);
        for (const { value, coordinates } of parts) {
          for (const x of coordinates) {
            if (value.kind === "value") expect(a.apply(x).equals(x.scale(value.value))).toBe(true);
            if (value.kind === "roots")
              expect(polynomialOf(value.factor.polynomial, a, proofBudget()).apply(x).isZero).toBe(true);
          }
        }
        const re = new Float64Array(a.n ** 2);
        const im = new Float64Array(a.n ** 2);
        for (const { row, col, value } of a.elements()) {
          const double = value.toComplex();
          re[row * a.n + col] = double.re;
          im[row * a.n + col] = double.im;
        }
        const { values } = hermitianEigen(a.n, re, im, { upper: "ignore" });
        const scale = Math.max(1, ...values.map(Math.abs));
        const found = valuesOf(parts);
        values.forEach((value, k) => {
          expect(Math.abs((found[k] ?? Number.NaN) - value)).toBeLessThan(1e-13 * scale);
        });
      }),
      { seed: 43, numRuns: 60 },
    );
  });

  it("works over vectors of different lengths", () => {
    // H = [[0, 6], [6, 0]] over vectors of squared norm 2 and 18: M = N⁻¹ H
    const m = ExactOperator.from([
      [0, 3],
      ["1/3", 0],
    ]);
    const parts = splitMatrix(m, [Surd.from(2), Surd.from(18)], proofBudget());
    expect(parts.map(({ value }) => (value.kind === "value" ? value.value.text() : value.kind))).toEqual(["-1", "1"]);
  });

  it("leaves a part unknown where the characteristic polynomial is beyond the work", () => {
    const a = ExactOperator.fromTriplets(
      9,
      Array.from({ length: 9 }, (_, k) => [[k, (k + 1) % 9, k + 1] as const, [(k + 1) % 9, k, k + 1] as const]).flat(),
    );
    const parts = splitMatrix(a, ones(9), proofBudget({}, 3_000));
    expect(parts.map(({ value, coordinates }) => [value.kind, coordinates.length])).toEqual([["unknown", 9]]);
    expect(() => splitMatrix(a, ones(9), proofBudget({ digits: 1 }))).not.toThrow();
  });

  it("leaves a part unknown whose polynomial has a very high degree, apart from the exact rest", () => {
    const n = 34;
    const chain = ExactOperator.fromTriplets(
      n + 1,
      Array.from({ length: n - 1 }, (_, k) => [[k, k + 1, 1] as const, [k + 1, k, 1] as const]).flat(),
    ).plus(
      ExactOperator.fromTriplets(n + 1, [
        [0, 0, 1],
        [n, n, 5],
      ]),
    );
    const parts = splitMatrix(chain, ones(n + 1), proofBudget());
    const unknown = parts.filter(({ value }) => value.kind === "unknown");
    expect(unknown.map(({ coordinates }) => coordinates.length)).toEqual([n - exactOnes(parts)]);
    expect(parts.some(({ value }) => value.kind === "value" && value.value.equals(5))).toBe(true);
  });

  it("takes one ket as it is", () => {
    const [only] = splitMatrix(ExactOperator.from([["sqrt(3)"]]), ones(1), proofBudget());
    expect(only?.coordinates[0]?.equals(ExactVector.unit(1, 0))).toBe(true);
    expect(only?.value).toMatchObject({ kind: "value" });
  });
});
