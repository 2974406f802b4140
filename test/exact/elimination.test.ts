import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { exactKernel, exactRank } from "../../src/exact/elimination.js";
import { orthogonalise } from "../../src/exact/gram-schmidt.js";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { coupled, matrix, vector } from "./matrices.js";

const matrixOf = (vectors: readonly ExactVector[]): ExactOperator => {
  const n = vectors[0]?.n ?? 1;
  return ExactOperator.fromTriplets(
    Math.max(n, vectors.length),
    vectors.flatMap((v, row) => v.values.map((x, k) => [row, v.index[k] as number, x] as const)),
  );
};

describe("the kernel", () => {
  it("is annihilated, independent, and as large as the rank says", () => {
    fc.assert(
      fc.property(matrix(6), (a) => {
        const vectors = exactKernel(a);
        for (const v of vectors) expect(a.apply(v).isZero && !v.isZero).toBe(true);
        expect(vectors.length + exactRank(a)).toBe(6);
        if (vectors.length > 0) expect(exactRank(matrixOf(vectors))).toBe(vectors.length);
        expect(exactRank(a)).toBe(exactRank(a.adjoint()));
      }),
      { seed: 141, numRuns: 120 },
    );
  });

  it("sees rank deficits that rounding would hide or invent", () => {
    const dependent = ExactOperator.from([
      ["sqrt(2)", "sqrt(6)"],
      ["1", "sqrt(3)"],
    ]);
    expect(exactRank(dependent)).toBe(1);
    expect(exactKernel(dependent).map((v) => v.component(0).over(v.component(1)).text())).toEqual(["-sqrt(3)"]);
    const almost = dependent.plus(ExactOperator.fromTriplets(2, [[1, 1, "10^-40"]]));
    expect([exactRank(almost), exactKernel(almost).length]).toEqual([2, 0]);
    expect([exactRank(ExactOperator.zero(3)), exactKernel(ExactOperator.zero(3)).length]).toEqual([0, 3]);
    const hilbert = ExactOperator.from(
      Array.from({ length: 12 }, (_, j) => Array.from({ length: 12 }, (__, k) => Surd.ratio(1n, BigInt(j + k + 1)))),
    );
    expect(exactRank(hilbert)).toBe(12);
  });

  it("of J² − j(j + 1) at fixed m holds the coupling coefficients", () => {
    const { square, z } = coupled(2, 1);
    const kets = Array.from({ length: z.n }, (_, k) => k).filter((k) => z.entry(k, k).equals("1/2"));
    const found = exactKernel(square.principal(kets).minus(ExactOperator.identity(kets.length).scale("15/4")));
    // ⟨1 0 ½ ½|3/2 ½⟩ = √(2/3), ⟨1 1 ½ −½|3/2 ½⟩ = √(1/3): Condon and Shortley's values, from memory
    const unit = found[0]?.normalised();
    const [spin1, spin0] = kets.map((ket) => Math.floor(ket / 2));
    expect([spin1, spin0]).toEqual([0, 1]);
    expect([unit?.component(0).text(), unit?.component(1).text()]).toEqual(["1/sqrt(3)", "sqrt(2/3)"]);
    expect(found).toHaveLength(1);
  });

  it("is common to several operators where asked", () => {
    const { square, z } = coupled(3, 2);
    const one = ExactOperator.identity(z.n);
    const conditions = [square.minus(one.scale("3/4")), z.minus(one.scale("1/2"))];
    const [state, ...others] = exactKernel(conditions);
    expect(others).toEqual([]);
    for (const condition of conditions) expect(condition.apply(state as ExactVector).isZero).toBe(true);
    expect(() => exactKernel([])).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => exactKernel([z, ExactOperator.identity(2)])).toThrow(expect.objectContaining({ code: "shape" }));
  });

  it("does not depend on anything but the matrix", () => {
    fc.assert(
      fc.property(matrix(5), (a) => {
        const again = ExactOperator.fromTriplets(
          5,
          [...a.elements()].reverse().map(({ row, col, value }) => [row, col, value] as const),
        );
        expect(exactKernel(again).map((v) => v.values.map(String))).toEqual(
          exactKernel(a).map((v) => v.values.map(String)),
        );
      }),
      { seed: 142, numRuns: 40 },
    );
  });

  it("stops within a budget", () => {
    const a = ExactOperator.from(
      Array.from({ length: 8 }, (_, j) => Array.from({ length: 8 }, (__, k) => ((7 * j + 3 * k * k + j * k) % 11) - 5)),
    );
    expect(exactRank(a)).toBeGreaterThan(4);
    expect(() => exactRank(a, { steps: 20 })).toThrow(expect.objectContaining({ code: "budget" }));
    const hard = a.plus(ExactOperator.identity(8).scale("12345678901234567/3"));
    expect(() => exactKernel(hard, { digits: 20 })).toThrow(expect.objectContaining({ code: "budget" }));
  });
});

describe("Gram–Schmidt without roots", () => {
  it("makes vectors orthogonal, keeps every span, and names dependent ones", () => {
    fc.assert(
      fc.property(fc.array(vector(4), { minLength: 1, maxLength: 5 }), (given) => {
        const { vectors, dependent } = orthogonalise(given);
        expect(vectors.length + dependent.length).toBe(given.length);
        vectors.forEach((a, j) => {
          expect(a.isZero).toBe(false);
          for (const b of vectors.slice(0, j)) expect(a.inner(b).isZero).toBe(true);
        });
        expect(exactRank(matrixOf(given))).toBe(vectors.length);
        expect(exactRank(matrixOf([...given, ...vectors]))).toBe(vectors.length);
      }),
      { seed: 143, numRuns: 60 },
    );
  });

  it("keeps orthogonal vectors, up to a positive fraction", () => {
    const given = [ExactVector.from([1, 1, 0]), ExactVector.from([2, -2, 0]), ExactVector.from([3, 1, 0])];
    const { vectors, dependent } = orthogonalise(given);
    expect(vectors.map((v) => v.values.map(String))).toEqual([
      ["1", "1"],
      ["1", "-1"],
    ]);
    expect(dependent).toEqual([2]);
    expect(() => orthogonalise(given, { steps: 3 })).toThrow(expect.objectContaining({ code: "budget" }));
  });
});
