import { describe, expect, it } from "vitest";
import { addProduct, type Panel, PRODUCT_SCRATCH } from "../../../src/numerics/eigen/packed-product.js";
import { generator } from "./matrices.js";

const at = (p: Panel, i: number, j: number): number => p.data[p.at + i * p.rowStep + j * p.colStep] as number;

describe("addProduct", () => {
  const scratch = new Float64Array(PRODUCT_SCRATCH);
  const sizes: [number, number, number][] = [
    ...[1, 2, 3, 4, 5, 8, 9].map((s): [number, number, number] => [s, 10 - s, (3 * s) % 7]),
    [1, 1, 1],
    [66, 259, 195],
    [64, 256, 192],
    [3, 5, 400],
  ];

  // Small integers: every sum is exact, so the order of summation does not matter.
  it.each(sizes)("adds an exact integer product %i × %i × %i into a larger array", (m, n, k) => {
    const random = generator(m + n + k);
    const integers = (length: number): Float64Array => Float64Array.from({ length }, () => Math.floor(20 * random()));
    const a: Panel = { data: integers((m + 2) * (k + 3) + 1), at: 1, rowStep: k + 3, colStep: 1 };
    const b: Panel = { data: integers((k + 1) * (n + 2)), at: 2, rowStep: 1, colStep: k + 1 };
    const c: Panel = { data: integers((m + 1) * (n + 4) + 5), at: 3, rowStep: n + 4, colStep: 1 };
    const expected = c.data.slice();
    for (let i = 0; i < m; i++) {
      for (let j = 0; j < n; j++) {
        let sum = 0;
        for (let q = 0; q < k; q++) sum += at(a, i, q) * at(b, q, j);
        expected[c.at + i * c.rowStep + j] = at(c, i, j) - 2 * sum;
      }
    }
    addProduct(m, n, k, -2, a, b, c, scratch.fill(Number.NaN));
    expect(c.data).toEqual(expected);
  });
});
