import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { batchedHermitianEigenBy, batchMember } from "../../../src/numerics/eigen/batch.js";
import { plainEigen } from "../../../src/numerics/eigen/plain.js";
import type { EigenEngine } from "../../../src/numerics/eigen/types.js";
import { type HermitianEigen, hermitianEigenBy } from "../../../src/numerics/eigen.js";
import { wasmEigen } from "../../../src/numerics/wasm/eigen.js";
import { randomSample, type Sample, sample } from "./matrices.js";

const ENGINES: readonly [string, EigenEngine][] = [
  ["WebAssembly", wasmEigen],
  ["plain TypeScript", plainEigen],
];

/** Matrices one after the other. */
function joined(parts: readonly Sample[]): { orders: number[]; re: Float64Array; im: Float64Array } {
  const join = (pick: (of: Sample) => Float64Array): Float64Array =>
    Float64Array.from(parts.flatMap((of) => [...pick(of)]));
  return {
    orders: parts.map(({ n }) => n),
    re: join(({ re }) => re),
    im: join(({ n, im }) => im ?? new Float64Array(n * n)),
  };
}

const plainArrays = ({ values, re, im }: HermitianEigen): unknown => [[...values], [...re], im && [...im]];

describe.each(ENGINES)("batchedHermitianEigen by %s", (_, engine) => {
  it("finds what single calls find, bit for bit", () => {
    const shape = fc.record({
      order: fc.integer({ min: 0, max: 9 }),
      repeat: fc.integer({ min: 1, max: 4 }),
      kind: fc.constantFrom("full", "sparse", "zero"),
      seed: fc.integer({ min: 1, max: 1000 }),
    });
    fc.assert(
      fc.property(fc.array(shape, { maxLength: 6 }), fc.boolean(), (shapes, complex) => {
        const parts = shapes.flatMap(({ order, repeat, kind, seed }) =>
          Array.from({ length: repeat }, (_, k) => {
            const of = randomSample(order, complex, seed + k);
            if (kind === "full") return of;
            return sample(order, complex, (i, j) => {
              if (kind === "zero" || (i * 7 + j * 3 + seed) % 4 !== 0) return [0, 0];
              return [of.re[i * order + j] as number, of.im?.[i * order + j] ?? 0];
            });
          }),
        );
        const { orders, re, im } = joined(parts);
        const batch = batchedHermitianEigenBy(engine, orders, re, complex ? im : undefined);
        parts.forEach((of, k) => {
          expect(plainArrays(batchMember(batch, k))).toEqual(
            plainArrays(hermitianEigenBy(engine, of.n, of.re, complex ? of.im : undefined)),
          );
        });
      }),
      { seed: 7, numRuns: 60 },
    );
  });

  it("passes the bound of a chunk without a seam", () => {
    const parts = Array.from({ length: 90 }, (_, k) => randomSample(20, true, k + 1));
    const { orders, re, im } = joined(parts);
    const batch = batchedHermitianEigenBy(engine, orders, re, im);
    for (const k of [0, 39, 40, 41, 81, 89]) {
      const of = parts[k] as Sample;
      expect(plainArrays(batchMember(batch, k))).toEqual(plainArrays(hermitianEigenBy(engine, 20, of.re, of.im)));
    }
  });

  it("says in which matrix something is wrong", () => {
    const parts = [2, 3, 3, 1, 4].map((n) => randomSample(n, true, n));
    const { orders, re, im } = joined(parts);
    const at = [0, 4, 13, 22, 23];
    for (const matrix of [0, 1, 2, 3, 4]) {
      const spoiled = re.map((x, k) => (k === at[matrix] ? Number.NaN : x));
      expect(() => batchedHermitianEigenBy(engine, orders, spoiled, im)).toThrow(
        expect.objectContaining({ code: "not-finite", details: expect.objectContaining({ matrix }) }),
      );
      const huge = re.map((x, k) => (at[matrix] === k ? 1e308 : x));
      expect(batchedHermitianEigenBy(engine, orders, huge, im).values.length).toBe(13);
    }
    const ones = joined([randomSample(3, false, 1), sample(3, false, () => [Number.MAX_VALUE, 0])]);
    expect(() => batchedHermitianEigenBy(engine, ones.orders, ones.re, undefined)).toThrow(
      expect.objectContaining({ code: "not-finite", details: { matrix: 1 } }),
    );
    const crooked = re.map((x, k) => (k === 23 + 1 ? x + 1 : x));
    expect(batchedHermitianEigenBy(engine, orders, crooked, im, { upper: "ignore" }).values.length).toBe(13);
    expect(() => batchedHermitianEigenBy(engine, orders, crooked, im)).toThrow(
      expect.objectContaining({ code: "not-hermitian", details: { row: 1, col: 0, matrix: 4 } }),
    );
  });

  it("refuses orders and lengths that do not fit", () => {
    const run = (orders: number[], re: number, im?: number) => () =>
      batchedHermitianEigenBy(engine, orders, new Float64Array(re), im === undefined ? im : new Float64Array(im));
    for (const wrong of [run([2], 3), run([2], 4, 3), run([1.5], 2), run([-1], 1), run([2, 2], 4)]) {
      expect(wrong).toThrow(expect.objectContaining({ code: "shape" }));
    }
    expect(run([], 0)().values.length).toBe(0);
  });

  it("refuses other arrays, other options, and members that are none", () => {
    const re = Float64Array.of(0, 1, 1, 0);
    const cases: [unknown, unknown, unknown, unknown, string][] = [
      [[2], [0, 1, 1, 0], undefined, {}, "shape"],
      [[2], Float32Array.from(re), undefined, {}, "shape"],
      [[2], re, null, {}, "shape"],
      [undefined, re, undefined, {}, "shape"],
      [["2"], re, undefined, {}, "shape"],
      [[2], re, undefined, null, "option"],
      [[2], re, undefined, { upper: "bogus" }, "option"],
    ];
    for (const [orders, a, b, options, code] of cases) {
      expect(() => batchedHermitianEigenBy(engine, orders as never, a as never, b as never, options as never)).toThrow(
        expect.objectContaining({ code }),
      );
    }
    const batch = batchedHermitianEigenBy(engine, [2, 0], re, undefined);
    expect(batchMember(batch, 1).n).toBe(0);
    for (const k of [-1, 2, 0.5, Number.NaN, "0" as never]) {
      expect(() => batchMember(batch, k)).toThrow(expect.objectContaining({ code: "option" }));
    }
  });
});
