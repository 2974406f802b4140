import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { characteristicPolynomial, minimalPolynomial } from "../../src/exact/characteristic.js";
import { fieldRoots } from "../../src/exact/field-roots.js";
import { normPolynomial } from "../../src/exact/norm-polynomial.js";
import { ExactOperator } from "../../src/exact/operator.js";
import {
  commonDivisor,
  degree,
  derivative,
  divide,
  evaluate,
  fromRoots,
  monic,
  multiply,
  type Polynomial,
  polynomial,
  squareFreePart,
} from "../../src/exact/polynomial.js";
import { isolateRealRoots } from "../../src/exact/real-roots.js";
import { Surd } from "../../src/exact/surd.js";
import { smallSurd } from "./arbitrary.js";
import { denseOf, matrix } from "./matrices.js";

const of = (...coefficients: (string | number)[]): Polynomial => coefficients.map((c) => Surd.from(c));
const texts = (p: Polynomial): string[] => p.map(String);
const equal = (p: Polynomial, q: Polynomial): boolean =>
  p.length === q.length && p.every((c, k) => c.equals(q[k] ?? 0));
const some: fc.Arbitrary<Polynomial> = fc.array(smallSurd, { maxLength: 4 }).map(polynomial);
const nonzero = some.filter((p) => p.length > 0);

describe("polynomials over the field", () => {
  it("divide with a rest of lower degree", () => {
    fc.assert(
      fc.property(some, nonzero, smallSurd, (p, q, x) => {
        const { quotient, rest } = divide(p, q);
        expect(degree(rest)).toBeLessThan(degree(q));
        const back = evaluate(multiply(quotient, q), x).plus(evaluate(rest, x));
        expect(back.equals(evaluate(p, x))).toBe(true);
        expect(equal(divide(multiply(p, q), q).quotient, p)).toBe(true);
      }),
      { seed: 161, numRuns: 100 },
    );
    expect(() => divide(of(1), [])).toThrow(expect.objectContaining({ code: "zero-division" }));
  });

  it("have common divisors and square-free parts", () => {
    fc.assert(
      fc.property(nonzero, nonzero, nonzero, (p, q, r) => {
        const g = commonDivisor(multiply(p, r), multiply(q, r));
        expect(divide(g, monic(r)).rest).toEqual([]);
        expect(divide(multiply(p, r), g).rest).toEqual([]);
        const free = squareFreePart(multiply(multiply(p, p), q));
        expect(degree(commonDivisor(free, derivative(free)))).toBe(0);
        expect(divide(multiply(multiply(p, p), q), free).rest).toEqual([]);
      }),
      { seed: 162, numRuns: 60 },
    );
    expect(texts(squareFreePart(of(0, 0, 4, 4, 1)))).toEqual(["0", "2", "1"]);
    expect(squareFreePart([])).toEqual([]);
  });

  it("have rational norms that vanish where they do", () => {
    expect(texts(normPolynomial(of("-sqrt(2)-sqrt(3)", 1)))).toEqual(["1", "0", "-10", "0", "1"]);
    expect(texts(normPolynomial(of("-i", 1)))).toEqual(["1", "0", "1"]);
    expect(texts(normPolynomial(of("-sqrt(6)", 1)))).toEqual(["-6", "0", "1"]);
    fc.assert(
      fc.property(fc.array(smallSurd, { minLength: 1, maxLength: 2 }), (roots) => {
        const norm = normPolynomial(fromRoots(roots));
        expect(norm.every((c) => c.isRational)).toBe(true);
        for (const x of roots) expect(evaluate(norm, x).isZero).toBe(true);
      }),
      { seed: 163, numRuns: 40 },
    );
  });
});

describe("real roots", () => {
  it("are isolated, all of them, also close together and at dyadic points", () => {
    // (x² − 2)(x − 1)(x + 3)(1000 x − 1414)(x² + 1), and a pair 10^−12 apart
    const rational = (roots: readonly (readonly [bigint, bigint])[]): bigint[] =>
      roots.reduce<bigint[]>((p, [n, d]) => p.concat(0n).map((_, k) => d * (p[k - 1] ?? 0n) - n * (p[k] ?? 0n)), [1n]);
    const given: (readonly [bigint, bigint])[] = [
      [1n, 1n],
      [-3n, 1n],
      [1414n, 1000n],
      [1n, 8n],
      [0n, 1n],
      [10n ** 12n, 3n * 10n ** 12n],
      [10n ** 12n + 3n, 3n * 10n ** 12n],
    ];
    const p = rational(given);
    const intervals = isolateRealRoots(p, 60);
    expect(intervals).toHaveLength(7);
    const sorted = given.map(([n, d]) => Surd.ratio(n, d)).sort((a, b) => a.compare(b));
    intervals.forEach(({ low, high }, k) => {
      const at = (point: { place: bigint; bits: number }): Surd => Surd.from(2).power(-point.bits).times(point.place);
      const root = sorted[k] as Surd;
      expect(root.compare(at(low)) >= 0 && root.compare(at(high)) <= 0).toBe(true);
      expect(at(high).minus(at(low)).compare(Surd.from(2).power(-60))).toBeLessThanOrEqual(0);
    });
    expect(isolateRealRoots([1n, 0n, 1n], 10)).toEqual([]);
    expect(isolateRealRoots([-2n, 0n, 0n, 1n], 10)).toHaveLength(1);
    expect(isolateRealRoots([5n], 10)).toEqual([]);
  });
});

describe("roots in the field", () => {
  it.each([
    [["1/2", "-3/2", "7"]],
    [["sqrt(2)", "-sqrt(2)"]],
    [["(1+sqrt(5))/2", "(1-sqrt(5))/2", "0"]],
    [
      [
        "sqrt(2)+sqrt(3)",
        "sqrt(2)-sqrt(3)",
        "-sqrt(2)+sqrt(3)",
        "-sqrt(2)-sqrt(3)",
        "1/3",
        "1",
        "(1+sqrt(5))/6",
        "(1-sqrt(5))/6",
      ],
    ],
    [["1/2+sqrt(2)/3", "1/2-sqrt(2)/3", "10^-20", "-10^20"]],
    [["2", "2+10^-25", "2-10^-25"]],
    [["1000", "sqrt(999999)", "-sqrt(999999)", "-7"]],
    [
      [
        "1+sqrt(2)+sqrt(5)+sqrt(10)",
        "1-sqrt(2)+sqrt(5)-sqrt(10)",
        "1+sqrt(2)-sqrt(5)-sqrt(10)",
        "1-sqrt(2)-sqrt(5)+sqrt(10)",
      ],
    ],
  ])("%j are found again", (roots) => {
    const values = roots.map((x) => Surd.from(x)).sort((a, b) => a.compare(b));
    const found = fieldRoots(multiply(fromRoots(values), fromRoots(values.slice(0, 1))));
    expect(found.roots.map(String)).toEqual(values.map(String));
    expect(texts(found.rest)).toEqual(["1"]);
  });

  it("with coefficients in the field", () => {
    expect(fieldRoots(of("-sqrt(2)", 1)).roots.map(String)).toEqual(["sqrt(2)"]);
    const found = fieldRoots(fromRoots(["1+sqrt(2)", "sqrt(3)", "-1/2"].map((x) => Surd.from(x))));
    expect(found.roots.map(String)).toEqual(["-1/2", "sqrt(3)", "1+sqrt(2)"]);
    expect(texts(found.rest)).toEqual(["1"]);
    // x² − √2: a nested root, not in the field
    expect(fieldRoots(of("-sqrt(2)", 0, 1))).toEqual({ roots: [], rest: of("-sqrt(2)", 0, 1) });
    expect(fieldRoots(of("-i", 1)).roots).toEqual([]);
  });

  it("leave cubic and complex roots in the rest", () => {
    const p = multiply(of(-2, 0, 0, 1), multiply(of(1, 0, 1), of("-5/2", 1)));
    const { roots, rest } = fieldRoots(p);
    expect(roots.map(String)).toEqual(["5/2"]);
    expect(equal(rest, multiply(of(-2, 0, 0, 1), of(1, 0, 1)))).toBe(true);
    // the cyclic quartic x⁴ − 4x² + 2 has the nested roots ±√(2 ± √2)
    expect(fieldRoots(of(2, 0, -4, 0, 1)).roots).toEqual([]);
    expect(fieldRoots(of(3)).roots).toEqual([]);
    expect(() => fieldRoots(p, { steps: 100 })).toThrow(expect.objectContaining({ code: "budget" }));
  });
});

describe("polynomials of matrices", () => {
  /** det(x − A) by Laplace's expansion, on purpose the slow way. */
  function laplace(rows: readonly (readonly Polynomial[])[]): Polynomial {
    const [first, ...others] = rows;
    if (first === undefined) return [Surd.one];
    return first.reduce<Polynomial>((sum, entry, k) => {
      const minor = laplace(others.map((row) => row.filter((_, j) => j !== k)));
      const term = multiply(entry, k % 2 === 0 ? minor : minor.map((c) => c.negate()));
      const length = Math.max(sum.length, term.length);
      return polynomial(Array.from({ length }, (_, j) => (sum[j] ?? Surd.zero).plus(term[j] ?? Surd.zero)));
    }, []);
  }

  it("characteristic: the determinant, and the matrix satisfies it", () => {
    fc.assert(
      fc.property(matrix(4), (a) => {
        const p = characteristicPolynomial(a);
        const rows = denseOf(a).map((row, j) =>
          row.map((x, k) => polynomial(j === k ? [x.negate(), Surd.one] : [x.negate()])),
        );
        expect(equal(p, laplace(rows))).toBe(true);
        const value = p.reduceRight(
          (sum, c) => sum.times(a).plus(ExactOperator.identity(4).scale(c)),
          ExactOperator.zero(4),
        );
        expect(value.isZero).toBe(true);
      }),
      { seed: 171, numRuns: 40 },
    );
  });

  it("minimal: divides it, annihilates the matrix, and nothing shorter does", () => {
    fc.assert(
      fc.property(matrix(4), (a) => {
        const [p, m] = [characteristicPolynomial(a), minimalPolynomial(a)];
        expect(divide(p, m).rest).toEqual([]);
        const value = (q: Polynomial): ExactOperator =>
          q.reduceRight((sum, c) => sum.times(a).plus(ExactOperator.identity(4).scale(c)), ExactOperator.zero(4));
        expect(value(m).isZero).toBe(true);
        expect(equal(squareFreePart(m), squareFreePart(p))).toBe(true);
        const hermitian = a.plus(a.adjoint());
        expect(equal(minimalPolynomial(hermitian), squareFreePart(characteristicPolynomial(hermitian)))).toBe(true);
      }),
      { seed: 172, numRuns: 40 },
    );
    expect(
      texts(
        minimalPolynomial(
          ExactOperator.from([
            [2, 1, 0],
            [0, 2, 0],
            [0, 0, 2],
          ]),
        ),
      ),
    ).toEqual(["4", "-4", "1"]);
    expect(texts(minimalPolynomial(ExactOperator.identity(5)))).toEqual(["-1", "1"]);
    expect(texts(minimalPolynomial(ExactOperator.zero(2)))).toEqual(["0", "1"]);
  });

  it("give the eigenvalues of a chain of four and of a ring of six", () => {
    const hopping = (n: number, ring: boolean): ExactOperator =>
      ExactOperator.fromTriplets(
        n,
        Array.from({ length: ring ? n : n - 1 }, (_, k) => [
          [k, (k + 1) % n, 1] as const,
          [(k + 1) % n, k, 1] as const,
        ]).flat(),
      );
    expect(fieldRoots(characteristicPolynomial(hopping(4, false))).roots.map(String)).toEqual([
      "-1/2-1/2*sqrt(5)",
      "1/2-1/2*sqrt(5)",
      "-1/2+1/2*sqrt(5)",
      "1/2+1/2*sqrt(5)",
    ]);
    expect(fieldRoots(characteristicPolynomial(hopping(6, true))).roots.map(String)).toEqual(["-2", "-1", "1", "2"]);
    expect(() => characteristicPolynomial(hopping(6, true), { steps: 10 })).toThrow(
      expect.objectContaining({ code: "budget" }),
    );
  });
});
