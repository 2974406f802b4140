import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { Operator } from "../../src/operator/operator.js";
import { filled, naiveAdjoint, naiveOf, naiveProduct, naiveSum, sparse } from "./naive.js";

const SEED = { seed: 5, numRuns: 60 };
const norm = (a: { re: number; im: number }[][]): number =>
  Math.sqrt(a.flat().reduce((sum, { re, im }) => sum + re * re + im * im, 0));

/** The unitary Fourier matrix. */
function fourier(n: number): Operator {
  const entry = (part: (x: number) => number): number[] =>
    Array.from({ length: n * n }, (_, k) => part((2 * Math.PI * Math.floor(k / n) * (k % n)) / n) / Math.sqrt(n));
  return Operator.from({ re: entry(Math.cos), im: entry(Math.sin) });
}

describe("defects against the obvious arithmetic", () => {
  test("Hermitian, unitary, normal", () => {
    fc.assert(
      fc.property(sparse(4), (a) => {
        const x = naiveOf(a);
        const dagger = naiveAdjoint(x);
        const product = naiveProduct(x, dagger);
        expect(a.hermitianDefect.size).toBeCloseTo(norm(naiveSum(x, dagger, -1)), 13);
        expect(a.unitaryDefect).toBeCloseTo(norm(naiveSum(product, naiveOf(Operator.identity(4)), -1)), 13);
        expect(a.normalDefect).toBeCloseTo(norm(naiveSum(product, naiveProduct(dagger, x), -1)), 13);
        const h = a.plus(a.adjoint());
        expect(h.isHermitian).toBe(true);
        expect(h.kind).toBe("hermitian");
        expect(h.isNormal).toBe(true);
      }),
      SEED,
    );
  });

  test("the worst element is named", () => {
    const a = Operator.from([
      [1, 2, 0],
      [2, 1, 5],
      [0.5, 3, 1],
    ]);
    expect(a.hermitianDefect).toEqual({ size: Math.sqrt(2 * (0.25 + 4)), row: 1, col: 2, value: 2 });
    expect(a.isHermitian).toBe(false);
    expect(a.kind).toBe("general");
    expect(Operator.identity(2).hermitianDefect).toEqual({ size: 0, row: 0, col: 0, value: 0 });
  });
});

describe("kinds", () => {
  test("unitary, normal and neither", () => {
    expect(fourier(5).kind).toBe("unitary");
    expect(fourier(30).kind).toBe("unitary");
    const u = fourier(6);
    const normal = u
      .times(Operator.from({ diagonal: [1, 2, 3, 4, 5, 6], imaginary: [0, 1, 0, -2, 0, 3] }))
      .times(u.adjoint());
    expect(normal.kind).toBe("normal");
    expect(Operator.permutation([1, 2, 0]).kind).toBe("unitary");
    expect(
      Operator.from([
        [0, 1],
        [0, 0],
      ]).kind,
    ).toBe("general");
    expect(filled(30, 3, true).kind).toBe("general");
    expect(Operator.zero(3).kind).toBe("hermitian");
  });

  test("rows of unit length are not enough", () => {
    const a = Operator.from([
      [1, 0],
      [1, 0],
    ]);
    expect(a.isUnitary).toBe(false);
    const s = Math.SQRT1_2;
    expect(
      Operator.from([
        [s, s],
        [s, s],
      ]).isUnitary,
    ).toBe(false);
    // Rows and columns of the same length, yet not normal.
    const b = Operator.from([
      [0, 1, 1],
      [1, 0, 1],
      [1, 1, 0],
    ]).plus(
      Operator.from([
        [0, 1, -1],
        [-1, 0, 1],
        [1, -1, 0],
      ]),
    );
    const c = b.times(Operator.diagonal([1, 1, 1])).plus(Operator.diagonal([1, 2, 4]));
    expect(c.isNormal).toBe(false);
  });

  test("a stated uncertainty covers an asymmetry, a smaller one does not", () => {
    const rows = [
      [0, 1],
      [1.001, 0],
    ];
    expect(Operator.from(rows, { uncertainty: { absolute: 1e-3 } }).isHermitian).toBe(true);
    expect(Operator.from(rows, { uncertainty: { absolute: 1e-4 } }).isHermitian).toBe(false);
    expect(
      Operator.from([
        [0, 1],
        [1 + 4e-16, 0],
      ]).isHermitian,
    ).toBe(true);
  });

  test("the Hermitian part holds the original within its radius", () => {
    const a = Operator.from({
      re: [
        [0, 1, 0],
        [1.25, 0, 0],
        [0, 0, 0],
      ],
      im: [
        [0.5, 0, 0],
        [0, 0, 0],
        [0, 0, 0],
      ],
    });
    const h = a.hermitianPart();
    expect(h.hermitianDefect.value).toBe(0);
    expect(h.entry(0, 1).re).toBe(1.125);
    expect(h.entry(0, 0)).toEqual({ re: 0, im: 0 });
    expect(h.error).toBeGreaterThanOrEqual(0.5);
    for (const r of h.radius ?? []) expect(r).toBeGreaterThanOrEqual(0.125);
    const symmetric = Operator.from([
      [1, 2],
      [2, 1],
    ]);
    expect(symmetric.hermitianPart()).toBe(symmetric);
    // Only one of a pair stored, and a row without entries.
    const half = Operator.from([
      [0, 0, 4],
      [0, 0, 0],
      [0, 0, 0],
    ]).hermitianPart();
    expect(half.toMatrix().to2DArray()).toEqual([
      [0, 0, 2],
      [0, 0, 0],
      [2, 0, 0],
    ]);
  });
});

describe("patterns", () => {
  test("diagonal, monomial, real", () => {
    expect(Operator.diagonal([1, 0, 2]).isDiagonal).toBe(true);
    expect(
      Operator.from([
        [1, 0],
        [1e-300, 1],
      ]).isDiagonal,
    ).toBe(false);
    expect(
      Operator.from(
        [
          [1, 1e-9],
          [0, 1],
        ],
        { uncertainty: { absolute: 1e-8 } },
      ).isDiagonal,
    ).toBe(true);
    expect(Operator.permutation([2, 0, 1], [1, -1, { re: 0, im: 1 }]).isMonomial).toBe(true);
    expect(
      Operator.from([
        [1, 1],
        [0, 0],
      ]).isMonomial,
    ).toBe(false);
    expect(
      Operator.from([
        [1, 0],
        [1, 0],
      ]).isMonomial,
    ).toBe(false);
    expect(Operator.from({ re: [[1]], im: [[0]] }).isReal).toBe(true);
    expect(Operator.from({ re: [[1]], im: [[1e-9]] }).isReal).toBe(false);
  });

  test("connected parts are numbered by their first ket", () => {
    const a = Operator.fromTriplets(6, [
      [0, 4, 1],
      [5, 1, 1],
      [3, 5, 1],
      [2, 2, 7],
    ]);
    expect([...a.components]).toEqual([0, 1, 2, 1, 0, 1]);
    expect(a.componentCount).toBe(3);
    expect(Operator.zero(4).componentCount).toBe(4);
  });

  test("entries within their radius do not connect", () => {
    const s = Math.SQRT1_2;
    const j = Operator.from([
      [0, s, 0],
      [s, 0, s],
      [0, s, 0],
    ]);
    const rotated = j.times(j).commutator(j);
    expect(rotated.csr.col.length).toBeGreaterThan(0);
    expect(rotated.componentCount).toBe(3);
  });
});
