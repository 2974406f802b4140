import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Complex } from "../../src/numerics/complex.js";
import { hermitianEigen } from "../../src/numerics/eigen.js";
import { type Cycle, cycleThrough, solveCycle } from "../../src/refine/orbits.js";
import { type Naive, naiveAdjoint, naiveSum } from "../operator/naive.js";
import { csr, inner, naive, residual } from "./support.js";

const UNITS: readonly Complex[] = [
  { re: 1, im: 0 },
  { re: 0, im: 1 },
  { re: -1, im: 0 },
  { re: 0, im: -1 },
];

const unitPhases = fc.array(fc.constantFrom(...UNITS), { minLength: 1, maxLength: 13 });
const anyPhases = fc.array(
  fc.double({ min: 0.01, max: 6.2, noNaN: true }).map((a): Complex => ({ re: Math.cos(a), im: Math.sin(a) })),
  { minLength: 1, maxLength: 13 },
);

/** A cycle 0 → 1 → 2 … with the given phases, and its matrix: column t has its entry in row t + 1. */
function ring(phases: readonly Complex[]): { cycle: Cycle; matrix: Naive } {
  const length = phases.length;
  const matrix = naive(Array.from({ length }, () => new Array<number>(length).fill(0)));
  phases.forEach((phase, t) => {
    (matrix[(t + 1) % length] as Complex[])[t] = phase;
  });
  return {
    cycle: {
      indices: Int32Array.from({ length }, (_, t) => t),
      phaseRe: Float64Array.from(phases, (z) => z.re),
      phaseIm: Float64Array.from(phases, (z) => z.im),
    },
    matrix,
  };
}

const rowsOf = (solution: ReturnType<typeof solveCycle>): Naive =>
  solution.vectors.map(({ re, im }) => Array.from(re, (x, k) => ({ re: x, im: im?.[k] ?? 0 })));

const power = (z: Complex, n: number): Complex => {
  let out: Complex = { re: 1, im: 0 };
  for (let k = 0; k < n; k++) out = { re: out.re * z.re - out.im * z.im, im: out.re * z.im + out.im * z.re };
  return out;
};

describe("solveCycle", () => {
  for (const [kind, phases, tolerance] of [
    ["±1 and ±i", unitPhases, 4e-16],
    ["any modulus-one numbers", anyPhases, 3e-15],
  ] as const) {
    it(`solves cycles whose phases are ${kind}`, () => {
      fc.assert(
        fc.property(phases, (list) => {
          const { cycle, matrix } = ring(list);
          const solution = solveCycle(cycle);
          const rows = rowsOf(solution);
          expect(rows).toHaveLength(list.length);
          rows.forEach((row, k) => {
            const value = solution.vectors[k]?.value as Complex;
            expect(residual(matrix, [row], value)).toBeLessThanOrEqual(tolerance);
            rows.forEach((other, l) => {
              const z = inner(row, other);
              expect(Math.hypot(z.re - (k === l ? 1 : 0), z.im)).toBeLessThanOrEqual(4 * tolerance);
            });
          });
        }),
        { seed: 11, numRuns: 60 },
      );
    });

    it(`finds the eigenvalues of the eigensolver where phases are ${kind}`, () => {
      fc.assert(
        fc.property(phases, (list) => {
          const { cycle, matrix } = ring(list);
          const { vectors } = solveCycle(cycle);
          const product = list.reduce<Complex>(
            (a, b) => ({ re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re }),
            {
              re: 1,
              im: 0,
            },
          );
          for (const { value } of vectors) {
            const z = power(value, list.length);
            expect(Math.hypot(z.re - product.re, z.im - product.im)).toBeLessThan(1e-13);
          }
          const twice = naiveSum(matrix, naiveAdjoint(matrix)).flat();
          const n = list.length;
          const real = hermitianEigen(
            n,
            Float64Array.from(twice, (z) => z.re / 2),
            Float64Array.from(twice, (z) => z.im / 2),
          );
          const found = Float64Array.from(vectors, ({ value }) => value.re).sort();
          real.values.forEach((x, k) => {
            expect(Math.abs(x - (found[k] ?? Number.NaN))).toBeLessThan(1e-13);
          });
        }),
        { seed: 12, numRuns: 60 },
      );
    });
  }

  it("gives eigenvalues in the field exactly", () => {
    const values = (list: readonly Complex[]): Complex[] =>
      solveCycle(ring(list).cycle).vectors.map(({ value }) => value);
    const [one, i, minus] = UNITS as [Complex, Complex, Complex];
    expect(values([one, one, one, one])).toEqual([one, i, minus, { re: 0, im: -1 }]);
    expect(values([one, one])).toEqual([one, minus]);
    expect(values([i, i])).toEqual([i, { re: 0, im: -1 }]);
    expect(values([minus])).toEqual([minus]);
    expect(values([one, one, one]).map(({ re }) => re)).toEqual([1, -0.5, -0.5]);
    expect(values([one, one, minus]).map(({ re }) => re)).toEqual([0.5, -1, 0.5]);
  });

  it("counts the quarter turns of plain phases, and only of those", () => {
    for (let turns = 0; turns < 4; turns++) {
      const list = [UNITS[1], UNITS[3], UNITS[turns]] as Complex[];
      expect(solveCycle(ring(list).cycle).turns).toBe(turns);
    }
    const eighth = { re: Math.SQRT1_2, im: Math.SQRT1_2 };
    expect(solveCycle(ring([eighth, { ...eighth, im: -eighth.im }]).cycle).turns).toBeUndefined();
  });

  it("keeps real vectors real", () => {
    const { vectors } = solveCycle(ring([UNITS[0], UNITS[2], UNITS[2], UNITS[0]] as Complex[]).cycle);
    expect(vectors.map(({ im }) => im === undefined)).toEqual([true, false, true, false]);
    const turned = solveCycle(ring([UNITS[1], UNITS[3]] as Complex[]).cycle);
    expect(turned.vectors.map(({ im }) => im === undefined)).toEqual([false, false]);
  });
});

describe("cycleThrough", () => {
  const TOLERANCE = 2 ** -43;
  const swap = (entry: Complex | number): ReturnType<typeof csr> =>
    csr([
      [0, 0, 1],
      [entry, 0, 0],
      [0, { re: 0, im: -1 }, 0],
    ]);
  const image = Int32Array.of(1, 2, 0);
  const position = Int32Array.of(1, 2, 0);

  it("walks from column to row and picks up the phase of each step", () => {
    const cycle = cycleThrough(swap({ re: -1, im: 0 }), image, position, 1, 3, TOLERANCE);
    expect([...(cycle?.indices ?? [])]).toEqual([1, 2, 0]);
    expect([...(cycle?.phaseRe ?? [])]).toEqual([0, 1, -1]);
    expect([...(cycle?.phaseIm ?? [])]).toEqual([-1, 0, 0]);
  });

  it("takes noise off plain phases and normalises others", () => {
    const noisy = cycleThrough(swap({ re: -1 - 1e-14, im: 1e-14 }), image, position, 0, 3, TOLERANCE);
    expect([noisy?.phaseRe[0], noisy?.phaseIm[0]]).toEqual([-1, 0]);
    const turned = cycleThrough(swap({ re: 1e-14, im: 1 }), image, position, 0, 3, TOLERANCE);
    expect([turned?.phaseRe[0], turned?.phaseIm[0]]).toEqual([0, 1]);
    const general = cycleThrough(swap({ re: 0.6 + 1e-14, im: 0.8 + 1e-14 }), image, position, 0, 3, TOLERANCE);
    expect(Math.hypot(general?.phaseRe[0] ?? 0, general?.phaseIm[0] ?? 0)).toBeCloseTo(1, 15);
  });

  it("refuses moduli other than 1, missing columns and walks of another length", () => {
    expect(cycleThrough(swap(1.001), image, position, 0, 3, TOLERANCE)).toBeUndefined();
    expect(cycleThrough(swap(1 + 1e-12), image, position, 0, 3, TOLERANCE)).toBeUndefined();
    expect(cycleThrough(swap(1), image, Int32Array.of(1, -1, 0), 0, 3, TOLERANCE)).toBeUndefined();
    expect(cycleThrough(swap(1), image, position, 0, 2, TOLERANCE)).toBeUndefined();
  });
});
