import { describe, expect, it } from "vitest";
import { angularMomentum } from "../../src/index.js";
import { commutator, product } from "../../src/numerics/kernels.js";
import { fromDense } from "../../src/numerics/sparse.js";
import { badMatrices } from "./sparse/bad-matrices.js";

describe.each([
  ["product", product],
  ["commutator", commutator],
])("%s of goodbasis/kernels", (name, run) => {
  const call = (a: unknown, b: unknown) => () => run(a as never, b as never);
  const one = { n: 1, re: Float64Array.of(2), im: undefined };

  it("refuses dense matrices that are none", () => {
    const flaws: [object, string][] = [
      [{ n: -2, re: new Float64Array(4) }, "shape"],
      [{ n: 1.5, re: new Float64Array(2) }, "shape"],
      [{ n: "1", re: Float64Array.of(1) }, "shape"],
      [{ n: 1, re: [1] }, "shape"],
      [{ n: 1, re: Float32Array.of(1) }, "shape"],
      [{ n: 1, re: Float64Array.of(1), im: null }, "shape"],
      [{ n: 1, re: Float64Array.of(1), im: [0] }, "shape"],
      [{ n: 2, re: Float64Array.of(1) }, "shape"],
      [{ n: 1, re: Float64Array.of(Number.NaN) }, "not-finite"],
      [{ n: 1, re: Float64Array.of(1), im: Float64Array.of(Number.POSITIVE_INFINITY) }, "not-finite"],
    ];
    for (const [flaw, code] of flaws) {
      expect(call(flaw, one)).toThrow(expect.objectContaining({ code, message: expect.stringContaining(`${name}: `) }));
      expect(call(one, flaw)).toThrow(expect.objectContaining({ code }));
    }
  });

  it("refuses pairs of two kinds, operators, and other values", () => {
    const { x } = angularMomentum(1 / 2);
    const sparse = fromDense(1, 1, [2]);
    for (const [a, b] of [
      [one, sparse],
      [sparse, one],
      [x, x],
      [one, x],
      [undefined, undefined],
      [null, one],
      [7, "x"],
      [{}, []],
    ]) {
      expect(call(a, b)).toThrow(expect.objectContaining({ code: "shape" }));
    }
  });

  it("refuses sparse matrices that are none, and none of them spoils the next call", () => {
    const n = 20;
    const first = {
      rows: 1,
      cols: n,
      ptr: Int32Array.of(0, n),
      col: Int32Array.from({ length: n }, (_, k) => k),
      re: new Float64Array(n).fill(1),
      im: undefined,
    };
    const second = {
      rows: n,
      cols: 64,
      ptr: Int32Array.from({ length: n + 1 }, (_, k) => k),
      col: Int32Array.from({ length: n }, (_, k) => 63 - 3 * k),
      re: new Float64Array(n).fill(1),
      im: undefined,
    };
    const known = product(first, second);
    for (const [flaw, code] of badMatrices()) {
      expect(call(flaw, fromDense(2, 2, [1, 2, 3, 4]))).toThrow(expect.objectContaining({ code }));
      expect(call(fromDense(2, 2, [1, 2, 3, 4]), flaw)).toThrow(expect.objectContaining({ code }));
    }
    const outside = { ...second, cols: 20, col: Int32Array.from({ length: n }, (_, k) => (k === 5 ? 40 : n - 1 - k)) };
    expect(call(first, outside)).toThrow(expect.objectContaining({ code: "shape" }));
    expect(product(first, second)).toEqual(known);
  });
});
