import { describe, expect, it } from "vitest";
import type { Square } from "../../src/numerics/bounded/types.js";
import { type Dense, multiplyDense } from "../../src/numerics/dense.js";
import { multiplyParts, partsRounding } from "../../src/numerics/dense-parts.js";
import { wasmMultiplyParts } from "../../src/numerics/wasm/dense.js";
import { distance } from "./bounded/exact.js";
import { generator } from "./eigen/matrices.js";

const ENGINES: readonly [string, (n: number, a: Dense, b: Dense) => Dense | undefined][] = [
  ["WebAssembly", wasmMultiplyParts],
  ["plain TypeScript", multiplyDense],
  ["the faster of both", multiplyParts],
];

function random(n: number, complex: boolean, seed: number, entry = (x: number): number => x): Square {
  const next = generator(seed);
  const numbers = (): Float64Array => Float64Array.from({ length: n * n }, () => entry(next()));
  return { n, re: numbers(), im: complex ? numbers() : undefined };
}

/** Σ_k |a_ik| |b_kj| as one number for matrices of order one, and the Frobenius norm of the sums for others. */
function moduli(a: Square, b: Square): number {
  const { n } = a;
  const size = ({ re, im }: Square, k: number): number => Math.hypot(re[k] as number, im?.[k] ?? 0);
  let squares = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      let sum = 0;
      for (let k = 0; k < n; k++) sum += size(a, i * n + k) * size(b, k * n + j);
      squares += sum * sum;
    }
  }
  return Math.sqrt(squares);
}

describe.each(ENGINES)("products by parts, %s", (_, engine) => {
  const times = (a: Square, b: Square): Dense => engine(a.n, a, b) ?? { re: new Float64Array(0), im: undefined };

  it("stay inside the constant of every entry, and come close to it", () => {
    const closest = (n: number, left: boolean, right: boolean): number => {
      let most = 0;
      for (let seed = 1; seed <= 400; seed++) {
        const [a, b] = [random(n, left, seed), random(n, right, seed + 1000)];
        const bound = partsRounding(n, left || right) * moduli(a, b) * (1 + 1e-13);
        const ratio = distance(n, [[1, a, b]], times(a, b)) / bound;
        expect(ratio).toBeLessThanOrEqual(1);
        most = Math.max(most, ratio);
      }
      return most;
    };
    expect(closest(1, false, false)).toBeGreaterThan(0.9);
    expect(closest(2, false, false)).toBeGreaterThan(0.5);
    expect(closest(1, true, true)).toBeGreaterThan(0.4);
    expect(closest(2, true, true)).toBeGreaterThan(0.2);
    expect(closest(7, true, true)).toBeLessThanOrEqual(1);
    expect(closest(7, true, false)).toBeLessThanOrEqual(1);
  });

  it("keep whole numbers exact and imaginary parts that cancel zero", () => {
    for (const n of [1, 5, 6, 7, 40, 97]) {
      for (const [left, right] of [
        [false, true],
        [true, false],
        [true, true],
      ] as const) {
        const [a, b] = [n, n + 1].map((seed, k) =>
          random(n, k === 0 ? left : right, seed, (x) => Math.round(2 ** 20 * x)),
        );
        if (a === undefined || b === undefined) throw new Error("two matrices");
        if (n < 8) expect(distance(n, [[1, a, b]], times(a, b))).toBe(0);
        // Each part of the one holds either a row or nothing: no entry has a part that is not one real product.
        const real = { ...a, im: new Float64Array(n * n) };
        const found = times(real, { ...b, im: new Float64Array(n * n) });
        expect(found.im?.every((y) => y === 0)).toBe(true);
      }
    }
  });
});

describe("partsRounding", () => {
  it("counts the rounding of a difference", () => {
    expect(partsRounding(3, false, 1)).toBe(partsRounding(4, false));
    expect(partsRounding(3, true, 1)).toBe(partsRounding(4, true));
    expect(partsRounding(3, true)).toBeGreaterThan(Math.SQRT2 * 4 * 2 ** -53);
  });
});
