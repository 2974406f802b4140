import { describe, expect, it } from "vitest";
import { commutatorDenseBy, type DenseEngine, productDenseBy } from "../../../src/numerics/bounded/dense.js";
import type { Square } from "../../../src/numerics/bounded/types.js";
import { multiplyDense } from "../../../src/numerics/dense.js";
import { wasmMultiplyDense } from "../../../src/numerics/wasm/dense.js";
import { generator, randomSample } from "../eigen/matrices.js";
import { distance, isWithin } from "./exact.js";

const ENGINES: readonly [string, DenseEngine][] = [
  ["WebAssembly", wasmMultiplyDense],
  ["plain TypeScript", multiplyDense],
];

function random(n: number, complex: boolean, seed: number, scale = 1): Square {
  const next = generator(seed);
  const numbers = (): Float64Array => Float64Array.from({ length: n * n }, () => scale * next());
  return { n, re: numbers(), im: complex ? numbers() : undefined };
}

const hermitian = (n: number, complex: boolean, seed: number): Square => randomSample(n, complex, seed);

/** Requires that the bound holds, and that it is of use: at most `slack` times the error. */
function requireBound(error: number, distance: number, slack: number): void {
  expect(distance).toBeLessThanOrEqual(error);
  expect(error).toBeLessThanOrEqual(slack * distance);
}

describe.each(ENGINES)("productDense and commutatorDense by %s", (_, engine) => {
  const kinds: [boolean, boolean][] = [
    [false, false],
    [true, false],
    [false, true],
    [true, true],
  ];

  it.each(kinds)("bound the rounding of a product (complex: %s and %s)", (left, right) => {
    for (const n of [2, 3, 5, 8, 17]) {
      const a = random(n, left, n);
      const b = random(n, right, n + 50);
      const { value, error } = productDenseBy(engine, a, b);
      expect(value.im !== undefined).toBe(left || right);
      requireBound(error, distance(n, [[1, a, b]], value), 40 * n);
    }
  });

  it.each(kinds)("bound the rounding of a commutator (complex: %s and %s)", (left, right) => {
    for (const n of [2, 5, 12]) {
      for (const make of [random, hermitian]) {
        const a = make(n, left, n);
        const b = make(n, right, n + 50);
        const { value, error } = commutatorDenseBy(engine, a, b);
        requireBound(
          error,
          distance(
            n,
            [
              [1, a, b],
              [-1, b, a],
            ],
            value,
          ),
          80 * n,
        );
      }
    }
  });

  it("come close to the error in the worst of many small products: constants half as large would be caught for real ones", () => {
    // For complex ones those of a twelfth to a quarter: random entries are far from the worst of three multiplications.
    const closest = (n: number, complex: boolean, run: typeof productDenseBy, signs: readonly number[]): number => {
      let most = 0;
      for (let seed = 1; seed <= 400; seed++) {
        const [a, b] = [random(n, complex, seed), random(n, complex, seed + 1000)];
        const { value, error } = run(engine, a, b);
        const terms = signs.map((sign, k): [number, Square, Square] => (k === 0 ? [sign, a, b] : [sign, b, a]));
        const ratio = distance(n, terms, value) / error;
        expect(ratio).toBeLessThanOrEqual(1);
        most = Math.max(most, ratio);
      }
      return most;
    };
    expect(closest(1, false, productDenseBy, [1])).toBeGreaterThan(0.9);
    expect(closest(2, false, productDenseBy, [1])).toBeGreaterThan(0.5);
    expect(closest(1, true, productDenseBy, [1])).toBeGreaterThan(0.08);
    expect(closest(2, true, productDenseBy, [1])).toBeGreaterThan(0.04);
    expect(closest(2, false, commutatorDenseBy, [1, -1])).toBeGreaterThan(0.3);
    expect(closest(2, true, commutatorDenseBy, [1, -1])).toBeGreaterThan(0.04);
  });

  it("hold where a product, its square, or the square of an entry is below the range", () => {
    const odd = 1 + 2 ** -27;
    const one = (x: number): Square => ({ n: 1, re: Float64Array.of(x), im: undefined });
    const cases: readonly [number, number][] = [
      // The product is zero, and so is every norm: what is lost to underflow alone.
      [2 ** -540, 2 ** -540],
      // The square of the product is lost, its rounding is not.
      [odd * 2 ** -100, odd * 2 ** -440],
      // The square of an entry of the right factor is lost, the product is an ordinary number.
      [odd * 2 ** 500, odd * 2 ** -540],
    ];
    for (const [x, y] of cases) {
      const [a, b] = [one(x), one(y)];
      const { value, error } = productDenseBy(engine, a, b);
      expect(isWithin(1, [[1, a, b]], value, error)).toBe(true);
      expect(isWithin(1, [[1, a, b]], value, 0)).toBe(false);
    }
  });

  it("hold for a difference that takes all the roundings there can be, the last one included", () => {
    const a: Square = {
      n: 2,
      re: Float64Array.of(9.536745425294067e-7, 0, 1.0000001340520157, 1.000000172570708),
      im: undefined,
    };
    const b: Square = { n: 2, re: Float64Array.of(1.000000012426426, 0, 1.000000008407369, 0), im: undefined };
    const { value, error } = commutatorDenseBy(engine, a, b);
    const terms = [
      [1, a, b],
      [-1, b, a],
    ] as const;
    expect(isWithin(2, terms, value, error)).toBe(true);
    // The rounding of the difference is at most u times its norm, 2; without it the bound would be false.
    expect(isWithin(2, terms, value, error - 2 ** -52)).toBe(false);
  });

  it("hold where one factor is huge and its partner tiny, where products cancel, and where they underflow", () => {
    const n = 6;
    for (const [big, small] of [
      [1e120, 1e-120],
      [1e-150, 1e-160],
      [1e-170, 1e-170],
      [1e-300, 1e-20],
    ] as const) {
      const a = random(n, true, 1, big);
      const b = random(n, true, 2, small);
      const { value, error } = productDenseBy(engine, a, b);
      expect(distance(n, [[1, a, b]], value)).toBeLessThanOrEqual(error);
      const again = commutatorDenseBy(engine, a, b);
      expect(
        distance(
          n,
          [
            [1, a, b],
            [-1, b, a],
          ],
          again.value,
        ),
      ).toBeLessThanOrEqual(again.error);
      // Squares below the range cost the bound its sharpness below 1e-161, no more.
      expect(error).toBeLessThanOrEqual(1e-13 * (big + 1e-161) * (small + 1e-161) + 1e-175);
    }
    const cancelling: Square = { n: 2, re: Float64Array.of(1, -1, 1, 1), im: Float64Array.of(1e8, 1e8, 1, 1e-8) };
    const { value, error } = productDenseBy(engine, cancelling, cancelling);
    expect(distance(2, [[1, cancelling, cancelling]], value)).toBeLessThanOrEqual(error);
  });

  it("give an infinite bound where the norms overflow, never NaN", () => {
    const a = random(3, true, 1, 1e200);
    const zero: Square = { n: 3, re: new Float64Array(9), im: undefined };
    const part: Square = { n: 3, re: Float64Array.of(1e200, 0, 0, 1, 2, 3, 1, 1, 1), im: undefined };
    for (const run of [productDenseBy, commutatorDenseBy]) {
      expect(run(engine, a, a).error).toBe(Number.POSITIVE_INFINITY);
      expect(run(engine, zero, a).error).toBe(Number.POSITIVE_INFINITY);
      expect(run(engine, { ...zero, re: Float64Array.of(0, 1, 1, 1, 1, 1, 1, 1, 1) }, part).error).toBe(
        Number.POSITIVE_INFINITY,
      );
    }
  });

  it("multiply integers exactly, at every order next to a bound of the blocking", () => {
    for (const n of [1, 2, 3, 4, 5, 63, 64, 65, 97, 130, 193]) {
      for (const [left, right] of kinds) {
        const a = integers(n, left, n);
        const b = integers(n, right, n + 1);
        const { value } = productDenseBy(engine, a, b);
        for (let t = 0; t < 200; t++) {
          const i = (t * 37) % n;
          const j = (t * 53 + 7 * i) % n;
          let re = 0;
          let im = 0;
          for (let k = 0; k < n; k++) {
            const [x, y] = [a.re[i * n + k] as number, a.im?.[i * n + k] ?? 0];
            const [u, v] = [b.re[k * n + j] as number, b.im?.[k * n + j] ?? 0];
            re += x * u - y * v;
            im += x * v + y * u;
          }
          expect([value.re[i * n + j], value.im?.[i * n + j] ?? 0]).toEqual([re + 0, im + 0]);
        }
      }
    }
  });

  it("form one product for Hermitian matrices, and an exactly anti-Hermitian commutator", () => {
    let calls = 0;
    const counting: DenseEngine = (...of) => {
      calls++;
      return engine(...of);
    };
    for (const complex of [false, true]) {
      const n = 9;
      const [a, b] = [hermitian(n, complex, 1), hermitian(n, complex, 2)];
      calls = 0;
      const { re, im } = commutatorDenseBy(counting, a, b).value;
      expect(calls).toBe(1);
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < n; j++) {
          expect(re[i * n + j]).toBe(0 - (re[j * n + i] as number) + 0);
          expect(im?.[i * n + j]).toBe(im?.[j * n + i]);
        }
      }
      const bent = { ...a, re: a.re.map((x, k) => (k === 1 ? x * (1 + 2 ** -50) : x)) };
      calls = 0;
      commutatorDenseBy(counting, bent, b);
      expect(calls).toBe(2);
    }
  });

  it("refuse matrices that do not fit", () => {
    const a = random(3, false, 1);
    for (const b of [random(2, false, 1), { ...a, re: new Float64Array(8) }, { ...a, im: new Float64Array(4) }]) {
      for (const run of [productDenseBy, commutatorDenseBy]) {
        expect(() => run(engine, a, b)).toThrow(expect.objectContaining({ code: "shape" }));
      }
    }
  });
});

function integers(n: number, complex: boolean, seed: number): Square {
  const next = generator(seed);
  const numbers = (): Float64Array => Float64Array.from({ length: n * n }, () => Math.round(40 * next()) + 0);
  return { n, re: numbers(), im: complex ? numbers() : undefined };
}

describe("the exact distance of these tests", () => {
  it("sees one unit in the last place, and subnormal numbers", () => {
    const one = { re: Float64Array.of(1), im: undefined };
    expect(distance(1, [[1, one, one]], { re: Float64Array.of(1 + 2 ** -52), im: undefined })).toBe(2 ** -52);
    const tiny = { re: Float64Array.of(2 ** -1074), im: Float64Array.of(-(2 ** -1074)) };
    expect(distance(1, [[1, one, tiny]], { re: Float64Array.of(0), im: tiny.im })).toBe(2 ** -1074);
    expect(distance(1, [[1, tiny, one]], tiny)).toBe(0);
  });
});
