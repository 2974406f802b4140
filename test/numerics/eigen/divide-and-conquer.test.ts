import { describe, expect, it } from "vitest";
import { divideAndConquer } from "../../../src/numerics/eigen/divide-and-conquer.js";
import { PRODUCT_SCRATCH } from "../../../src/numerics/eigen/packed-product.js";
import { quality, sample } from "./matrices.js";

function tridiagonal(n: number, leaf: number, entry: (i: number) => [diagonal: number, off: number]) {
  const of = sample(n, false, (i, j) => [i === j ? entry(i)[0] : i - j === 1 ? entry(j)[1] : 0, 0]);
  const diagonal = Float64Array.from({ length: n }, (_, i) => entry(i)[0]);
  const off = Float64Array.from({ length: n }, (_, i) => entry(i)[1]);
  const norm = Math.max(...diagonal.map(Math.abs), ...off.map(Math.abs));
  const v = new Float64Array(n * n);
  const order = new Int32Array(n);
  const work = new Float64Array(2 * n);
  divideAndConquer(n, diagonal, off, v, order, norm, leaf, 1e-32 * norm, work, new Float64Array(PRODUCT_SCRATCH));
  expect([...order].sort((a, b) => a - b)).toEqual(Array.from(order, (_, k) => k));
  const re = new Float64Array(n * n);
  order.forEach((row, k) => {
    re.set(v.subarray(row * n, (row + 1) * n), k * n);
  });
  const values = Float64Array.from(order, (row) => diagonal[row] as number);
  return { values, ...quality(of, { n, first: 0, values, re, im: undefined }) };
}

describe("divideAndConquer", () => {
  const kinds: [string, (i: number) => [number, number]][] = [
    ["second difference", () => [2, -1]],
    ["couplings of both signs", (i) => [i % 5, i % 3 === 0 ? -0.7 : 0.4]],
    ["couplings that vanish", (i) => [i % 4, i % 3 === 0 ? 0 : 1]],
    ["equal diagonal, tiny couplings", () => [1, 1e-14]],
    ["mirror symmetric", (i) => [Math.abs(i - 19.5), 1]],
    ["couplings only at the cuts", (i) => [i % 2, i % 5 === 4 ? 1 : 0]],
  ];

  it.each(kinds)("solves with leaves of any order: %s", (_, entry) => {
    for (const n of [2, 3, 5, 8, 17, 40]) {
      for (const leaf of [1, 2, 3, 10, 40]) {
        const { residual, orthogonality, values } = tridiagonal(n, leaf, entry);
        expect(residual).toBeLessThanOrEqual(20);
        expect(orthogonality).toBeLessThanOrEqual(20);
        expect(values).toEqual(values.slice().sort());
      }
    }
  });

  it("gives the eigenvalues 4 sin²(k π / (2 n + 2)) of the second difference", () => {
    const { values } = tridiagonal(60, 4, () => [2, -1]);
    values.forEach((value, k) => {
      expect(Math.abs(value - 4 * Math.sin(((k + 1) * Math.PI) / 122) ** 2)).toBeLessThanOrEqual(1e-13);
    });
  });
});
