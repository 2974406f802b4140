import fc from "fast-check";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { countBelow } from "../../src/certify/recheck-count.js";

/** Eigenvalues of a Hermitian matrix through the real matrix [[A, −B], [B, A]], which has each of them twice. */
function eigenvalues(n: number, re: Float64Array, im: Float64Array): number[] {
  const at = (i: number, j: number): number => i * n + j;
  const matrix = Matrix.zeros(2 * n, 2 * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      matrix.set(i, j, re[at(i, j)] as number);
      matrix.set(i + n, j + n, re[at(i, j)] as number);
      matrix.set(i, j + n, -(im[at(i, j)] as number));
      matrix.set(i + n, j, im[at(i, j)] as number);
    }
  }
  const values = new EigenvalueDecomposition(matrix, { assumeSymmetric: true }).realEigenvalues.sort((a, b) => a - b);
  return values.filter((_, k) => k % 2 === 0);
}

function hermitian(
  n: number,
  entries: readonly number[],
  zeroDiagonal: boolean,
): { re: Float64Array; im: Float64Array } {
  const re = new Float64Array(n * n);
  const im = new Float64Array(n * n);
  let next = 0;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const x = entries[next++ % entries.length] as number;
      const y = entries[next++ % entries.length] as number;
      re[i * n + j] = i === j && zeroDiagonal ? 0 : x;
      re[j * n + i] = re[i * n + j] as number;
      im[i * n + j] = i === j ? 0 : y;
      im[j * n + i] = i === j ? 0 : -y;
    }
  }
  return { re, im };
}

describe("counting eigenvalues by inertia", () => {
  it("agrees with the eigenvalues, however the pivots fall", () => {
    const entry = fc.oneof(
      fc.constantFrom(0, 0, 1, -1, 1e-9),
      fc.double({ min: -1, max: 1, noNaN: true }).map((x) => (Math.abs(x) < 1e-100 ? 0 : x)),
    );
    fc.assert(
      fc.property(
        fc.integer({ min: 1, max: 14 }),
        fc.array(entry, { minLength: 40, maxLength: 40 }),
        fc.boolean(),
        fc.double({ min: -2, max: 2, noNaN: true }),
        (n, entries, zeroDiagonal, sigma) => {
          const { re, im } = hermitian(n, entries, zeroDiagonal);
          const { below, error } = countBelow(n, re, im, sigma);
          expect(error).toBeLessThan(1e-11);
          const values = eigenvalues(n, re, im);
          const slack = error + 1e-12;
          expect(below).toBeGreaterThanOrEqual(values.filter((x) => x < sigma - slack).length);
          expect(below).toBeLessThanOrEqual(values.filter((x) => x <= sigma + slack).length);
        },
      ),
      { seed: 20240229, numRuns: 600 },
    );
  });

  it("needs pivots of two on a ring without diagonal", () => {
    const n = 6;
    const re = new Float64Array(n * n);
    for (let k = 0; k < n; k++) {
      re[k * n + ((k + 1) % n)] = -1;
      re[((k + 1) % n) * n + k] = -1;
    }
    const im = new Float64Array(n * n);
    // −2, −1, −1, 1, 1, 2
    expect([-3, -1.5, 0, 1.5, 3].map((sigma) => countBelow(n, re, im, sigma).below)).toEqual([0, 1, 3, 5, 6]);
  });

  it("counts the zero matrix", () => {
    const zero = new Float64Array(9);
    expect(countBelow(3, zero, zero, 0)).toEqual({ below: 0, error: 0 });
    expect(countBelow(3, zero, zero, 1).below).toBe(3);
  });

  it("says that it knows nothing where pivots underflow", () => {
    const tiny = Float64Array.from([0, 1e-200, 1e-200, 1e-200, 0, 1e-200, 1e-200, 1e-200, 0]);
    expect(countBelow(3, tiny, new Float64Array(9), 0).error).toBe(Number.POSITIVE_INFINITY);
  });
});
