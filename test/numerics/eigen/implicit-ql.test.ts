import { describe, expect, it } from "vitest";
import { implicitQl } from "../../../src/numerics/eigen/implicit-ql.js";
import { U } from "./matrices.js";

describe("implicitQl", () => {
  it("solves a block inside longer arrays and leaves the rest alone", () => {
    const diagonal = Float64Array.of(9, 0, 0, 0, 9);
    const off = Float64Array.of(9, 1, 1, 9, 9);
    const v = new Float64Array(25).fill(9);
    for (let i = 1; i < 4; i++) for (let j = 1; j < 4; j++) v[5 * i + j] = i === j ? 1 : 0;
    implicitQl(3, 1, diagonal, off, v, 5, 0, new Float64Array(8));
    expect([diagonal[0], diagonal[4], off[0], off[4]]).toEqual([9, 9, 9, 9]);
    expect(v.filter((x) => x === 9).length).toBe(16);
    const values = [...diagonal.subarray(1, 4)].sort((a, b) => a - b);
    [-Math.SQRT2, 0, Math.SQRT2].forEach((x, k) => {
      expect(Math.abs((values[k] as number) - x)).toBeLessThanOrEqual(16 * U);
    });
    for (let i = 1; i < 4; i++) {
      const [x = 0, y = 0, z = 0] = v.subarray(5 * i + 1, 5 * i + 4);
      const value = diagonal[i] as number;
      for (const r of [y - value * x, x + z - value * y, y - value * z, x * x + y * y + z * z - 1]) {
        expect(Math.abs(r)).toBeLessThanOrEqual(32 * U);
      }
    }
  });

  it("stays orthogonal where squares underflow", () => {
    const v = Float64Array.of(1, 0, 0, 0, 1, 0, 0, 0, 1);
    const diagonal = Float64Array.of(1e-160, 2e-160, 4e-160);
    implicitQl(3, 0, diagonal, Float64Array.of(1e-160, 1e-160, 0), v, 3, 0, new Float64Array(6));
    for (let i = 0; i < 9; i += 3) {
      const [x = 0, y = 0, z = 0] = v.subarray(i, i + 3);
      expect(Math.abs(x * x + y * y + z * z - 1)).toBeLessThanOrEqual(32 * U);
    }
  });

  it("drops off-diagonal entries below the floor at once", () => {
    const diagonal = Float64Array.of(0, 0);
    const v = Float64Array.of(1, 0, 0, 1);
    implicitQl(2, 0, diagonal, Float64Array.of(1e-40, 0), v, 2, 1e-32, new Float64Array(4));
    expect([...v]).toEqual([1, 0, 0, 1]);
  });

  it("ends with an error where nothing can converge", () => {
    const nan = new Float64Array(3).fill(Number.NaN);
    expect(() => implicitQl(3, 0, nan, nan.slice(), new Float64Array(9), 3, 0, new Float64Array(6))).toThrow(
      expect.objectContaining({ code: "no-convergence" }),
    );
  });
});
