import { describe, expect, it } from "vitest";
import type { Dense } from "../../../src/numerics/dense.js";
import { applyReflectorBlocks, applyReflectors } from "../../../src/numerics/eigen/back-transform.js";
import { PRODUCT_SCRATCH } from "../../../src/numerics/eigen/packed-product.js";
import { tridiagonaliseComplex } from "../../../src/numerics/eigen/tridiagonalise-complex.js";
import { tridiagonaliseReal } from "../../../src/numerics/eigen/tridiagonalise-real.js";
import { randomSample, type Sample, sample, U } from "./matrices.js";

function reduced(of: Sample) {
  const { n } = of;
  const t = { diagonal: new Float64Array(n), off: new Float64Array(n), tau: new Float64Array(n) };
  const reflectors: Dense = { re: of.re.slice(), im: of.im?.slice() };
  const phases = new Float64Array(2 * n).fill(1, 0, n);
  const work = new Float64Array(6 * n).fill(Number.NaN);
  if (reflectors.im === undefined) tridiagonaliseReal(n, reflectors.re, t, work);
  else tridiagonaliseComplex(n, reflectors.re, reflectors.im, t, phases, work);
  return { ...t, reflectors, phases };
}

function identity(of: Sample, phases: Float64Array): Dense {
  const { n } = of;
  const rows = { re: new Float64Array(n * n), im: of.im && new Float64Array(n * n) };
  for (let i = 0; i < n; i++) {
    rows.re[i * n + i] = phases[i] as number;
    if (rows.im) rows.im[i * n + i] = phases[n + i] as number;
  }
  return rows;
}

const largest = (m: Float64Array): number => m.reduce((most, x) => Math.max(most, Math.abs(x)), 0);

describe("tridiagonal reduction and its reflectors", () => {
  it.each([false, true])("rebuild the matrix, A = Q T Q† (complex: %s)", (complex) => {
    for (const n of [1, 2, 3, 4, 5, 10, 23]) {
      const of = randomSample(n, complex, n);
      const { diagonal, off, tau, reflectors, phases } = reduced(of);
      const rows = identity(of, phases);
      applyReflectors(n, reflectors, tau, rows);
      // Row k is column k of Q D; A[i][j] = Σ T[k][l] q_k[i] conj(q_l[j]).
      const zero = new Float64Array(n * n);
      for (let i = 0; i < n; i++) {
        for (let j = 0; j < n; j++) {
          let re = 0;
          let im = 0;
          for (let k = 0; k < n; k++) {
            for (let l = Math.max(0, k - 1); l < Math.min(n, k + 2); l++) {
              const x = (k === l ? diagonal[k] : off[Math.min(k, l)]) as number;
              const [a, b] = [rows.re[k * n + i] as number, (rows.im ?? zero)[k * n + i] as number];
              const [c, d] = [rows.re[l * n + j] as number, (rows.im ?? zero)[l * n + j] as number];
              re += x * (a * c + b * d);
              im += x * (b * c - a * d);
            }
          }
          expect(Math.abs(re - (of.re[i * n + j] as number))).toBeLessThanOrEqual(40 * n * U);
          expect(Math.abs(im - ((of.im ?? zero)[i * n + j] as number))).toBeLessThanOrEqual(40 * n * U);
        }
      }
    }
  });

  it.each([false, true])("apply in blocks of any width as they do one by one (complex: %s)", (complex) => {
    const scratch = new Float64Array(PRODUCT_SCRATCH);
    for (const n of [2, 3, 9, 20]) {
      const of = sample(n, complex, (i, j) => (i % 4 === 2 && j < i ? [0, 0] : [1 / (i + j + 1), i - 2 * j]));
      for (const width of [1, 2, 5, 19, 64]) {
        const { tau, reflectors, phases } = reduced(of);
        const single = identity(of, phases);
        const blocked = identity(of, phases);
        applyReflectors(n, reflectors, tau, single);
        applyReflectorBlocks(n, reflectors, tau, blocked, width, scratch);
        expect(largest(single.re.map((x, k) => x - (blocked.re[k] as number)))).toBeLessThanOrEqual(20 * n * U);
        if (single.im === undefined) continue;
        expect(largest(single.im.map((x, k) => x - (blocked.im?.[k] as number)))).toBeLessThanOrEqual(20 * n * U);
      }
    }
  });

  it.each([false, true])("skip rows that are reduced already (complex: %s)", (complex) => {
    const of = sample(9, complex, (i, j) => [i - j < 2 ? i + 1 : 0, i - j < 2 ? j : 0]);
    const { tau, diagonal } = reduced(of);
    expect([...tau]).toEqual(new Array(9).fill(0));
    expect([...diagonal]).toEqual([1, 2, 3, 4, 5, 6, 7, 8, 9]);
  });
});
