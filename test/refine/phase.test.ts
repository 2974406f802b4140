import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Complex } from "../../src/numerics/complex.js";
import { fixPhases, turnRow } from "../../src/refine/phase.js";
import { distance, type Naive } from "../operator/naive.js";
import { csr, inner, naiveOfCsr, orthonormal, random } from "./support.js";

const times = (a: Complex, b: Complex): Complex => ({ re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re });
const turned = (rows: Naive, phase: Complex): Naive => rows.map((row) => row.map((x) => times(x, phase)));

describe("fixPhases", () => {
  it("makes the first of the largest components real and positive, and changes nothing but the phase", () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 6 }), fc.integer(), fc.boolean(), (n, seed, complex) => {
        const rows = orthonormal(n, n, random(seed), complex);
        const fixed = naiveOfCsr(fixPhases(csr(rows)));
        fixed.forEach((row, r) => {
          const moduli = row.map((x) => Math.hypot(x.re, x.im));
          const pivot = moduli.findIndex((x) => x >= 0.987 * Math.max(...moduli));
          expect(row[pivot]?.im).toBe(0);
          expect(row[pivot]?.re).toBeGreaterThan(0);
          const overlap = inner(rows[r] ?? [], row);
          expect(Math.hypot(overlap.re, overlap.im)).toBeCloseTo(1, 14);
        });
      }),
      { seed: 71, numRuns: 80 },
    );
  });

  it("gives the same vector whatever phase it came with, and under rounding-sized changes", () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 6 }), fc.integer(), (n, seed) => {
        const next = random(seed);
        const rows = orthonormal(n, n, next, true);
        const noise = rows.map((row) => row.map((x) => ({ re: x.re + 4e-16 * next(), im: x.im + 4e-16 * next() })));
        const angle = 3 * next();
        const reference = naiveOfCsr(fixPhases(csr(rows)));
        const other = naiveOfCsr(fixPhases(csr(turned(noise, { re: Math.cos(angle), im: Math.sin(angle) }))));
        expect(distance(reference, other)).toBeLessThan(1e-14);
      }),
      { seed: 72, numRuns: 80 },
    );
  });

  it("rounding does not choose between components of equal size", () => {
    const h = Math.SQRT1_2;
    for (const nudge of [-2e-16, 0, 2e-16]) {
      for (const sign of [1, -1]) {
        const row = naiveOfCsr(fixPhases(csr([[sign * (h + nudge), sign * -(h - nudge)]])))[0] ?? [];
        expect([row[0]?.re, row[1]?.re].map((x) => Math.sign(x ?? 0))).toEqual([1, -1]);
      }
      const root = { re: Math.cos(2) * (0.5 - nudge), im: Math.sin(2) * (0.5 - nudge) };
      const complex =
        naiveOfCsr(fixPhases(csr([[root, { re: -0.5 - nudge, im: 0 }, { re: 0, im: 0.5 }, 0.5]])))[0] ?? [];
      expect(complex[0]?.re).toBeCloseTo(0.5, 14);
    }
  });

  it("a component a few percent smaller than the largest does not count, one within a percent does", () => {
    const first = (small: number): number => {
      const size = Math.hypot(small, 1);
      return Math.sign(naiveOfCsr(fixPhases(csr([[-small / size, 1 / size]])))[0]?.[0]?.re ?? 0);
    };
    expect(first(0.97)).toBe(-1);
    expect(first(0.99)).toBe(1);
    expect(first(1)).toBe(1);
  });

  it("treats each row by itself, keeps zero and empty rows, and forgets imaginary parts that are gone", () => {
    const rows = csr(
      [
        [0, { re: 0, im: -1 }],
        [-1, 0],
        [0, 0],
      ],
      2,
    );
    const fixed = fixPhases(rows);
    expect(fixed.im).toBeUndefined();
    expect([...fixed.re]).toEqual([1, 1]);
    expect([...fixed.ptr]).toEqual([0, 1, 2, 2]);
    expect([...rows.re]).toEqual([0, -1]);
    const stored = {
      rows: 1,
      cols: 1,
      ptr: Int32Array.of(0, 1),
      col: Int32Array.of(0),
      re: Float64Array.of(0),
      im: undefined,
    };
    expect([...fixPhases(stored).re]).toEqual([0]);
    const kept = fixPhases(
      csr([
        [
          { re: 0, im: 1 },
          { re: 0.5, im: 0 },
        ],
      ]),
    );
    expect(naiveOfCsr(kept)).toEqual([
      [
        { re: 1, im: 0 },
        { re: 0, im: -0.5 },
      ],
    ]);
  });
});

describe("turnRow", () => {
  it("multiplies the range by the unit phase of a number, whatever its size", () => {
    const re = Float64Array.of(1, 2, 3);
    const im = Float64Array.of(0, 1, 5);
    turnRow(re, im, 1, 2, 0, -1e-30);
    expect([[...re], [...im]]).toEqual([
      [1, 1, 3],
      [0, -2, 5],
    ]);
    turnRow(re, im, 0, 3, 0, 0);
    turnRow(re, im, 0, 3, 7, 0);
    expect([...re]).toEqual([1, 1, 3]);
    turnRow(re, undefined, 0, 2, -2, 0);
    expect([...re]).toEqual([-1, -1, 3]);
  });
});
