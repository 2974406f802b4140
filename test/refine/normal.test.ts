import { describe, expect, it } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import type { Complex } from "../../src/numerics/complex.js";
import { splitIntoEigenspaces } from "../../src/refine/eigenspaces.js";
import { normalEigen } from "../../src/refine/normal.js";
import type { Naive } from "../operator/naive.js";
import { csr, inner, naiveOfCsr, operatorOf, orthonormal, random, withEigenvalues } from "./support.js";

const U = 2 ** -53;

const size = (z: Complex): number => Math.hypot(z.re, z.im);

/** ‖A q − a q‖. */
function residualNorm(a: Naive, q: readonly Complex[], value: Complex): number {
  const parts = a.map((row, k) => {
    const image = inner(
      row.map((x) => ({ re: x.re, im: -x.im })),
      q,
    );
    const x = q[k] as Complex;
    return Math.hypot(image.re - value.re * x.re + value.im * x.im, image.im - value.re * x.im - value.im * x.re);
  });
  return Math.hypot(...parts);
}

/** Values on the unit circle whose cosines nearly agree in pairs, distance δ apart, and their likes off it. */
function colliding(delta: number, kind: "circle" | "plane" | "ladder", next: () => number): Complex[] {
  const values: Complex[] = [];
  for (let k = 0; k < 4; k++) {
    const c = 0.8 * next();
    if (kind === "circle") {
      values.push({ re: c, im: Math.sqrt(1 - c * c) }, { re: c + delta, im: -Math.sqrt(1 - (c + delta) ** 2) });
    } else if (kind === "plane") {
      values.push({ re: c, im: 2 * next() }, { re: c + delta, im: 2 * next() }, { re: next(), im: 0.25 * k });
      values.push({ re: next(), im: 0.25 * k + delta });
    } else {
      // one after the other, so that only a chain links the ends
      values.push({ re: 0.5 + k * delta, im: next() }, { re: 2 * next(), im: 0.5 + k * delta });
    }
  }
  return values;
}

const distances = [0, 1e-15, 1e-12, 1e-9, 1e-6];
const kinds = ["circle", "plane", "ladder"] as const;

describe("a normal matrix whose values nearly share a real or imaginary part", () => {
  for (const kind of kinds) {
    for (const delta of distances) {
      it(`${kind}, ${delta} apart: vectors and values to rounding, every value told apart`, () => {
        for (const [seed, copies] of [
          [1, 1],
          [2, 2],
          [3, 1],
          [4, 3],
        ] as const) {
          const next = random(1000 * seed + 7);
          const distinct = colliding(delta, kind, next);
          const list = distinct.flatMap((z, k) => new Array<Complex>(k % 3 === 0 ? copies : 1).fill(z));
          const n = list.length;
          const a = withEigenvalues(orthonormal(n, n, next, true), list);
          const norm = Math.max(...list.map(size));
          const { spaces, defect } = splitIntoEigenspaces(csr(a), {
            hermitian: false,
            noise: 2 ** -43 * norm,
            cluster: 2 ** -36 * norm,
          });
          expect(spaces).toHaveLength(distinct.length);
          for (const { value, spread, rows } of spaces) {
            const planted = list.filter((z) => Math.hypot(z.re - value.re, z.im - value.im) <= 20 * n * U * norm);
            expect(planted, `${value.re} + ${value.im}i`).toHaveLength(rows.rows);
            expect(spread).toBeLessThanOrEqual(20 * n * U * norm);
            for (const q of naiveOfCsr(rows)) {
              expect(residualNorm(a, q, value)).toBeLessThanOrEqual(100 * n * U * norm);
            }
          }
          expect(defect).toBeLessThanOrEqual(20 * n * n * U);
        }
      });
    }
  }

  it("is a good label: a unitary candidate with such values leaves nothing undecided", () => {
    for (const delta of [1e-12, 1e-9, 1e-7]) {
      const next = random(77);
      const c = 0.4;
      const phases: Complex[] = [
        { re: c, im: Math.sqrt(1 - c * c) },
        { re: c + delta, im: -Math.sqrt(1 - (c + delta) ** 2) },
        { re: -0.6, im: 0.8 },
        { re: -0.6, im: -0.8 },
      ];
      const frame = orthonormal(8, 8, next, true);
      const of = (values: readonly Complex[]) => operatorOf(withEigenvalues(frame, values));
      const real = (x: number): Complex => ({ re: x, im: 0 });
      const outcome = findGoodBasis({
        h0: of([1, 1, 1, 1, 2, 2, 2, 2].map(real)).hermitianPart(),
        v: of([1, -1, 0.5, 2, 3, 0.3, -2, 0.7].map(real)).hermitianPart(),
        candidates: { T: of([...phases, ...phases]) },
      });
      expect(outcome.verdict, JSON.stringify(outcome.levels.map((level) => level.questions))).toBe("good");
      for (const state of outcome.states) expect(state.safe).toEqual({ energies: "all", states: "all" });
    }
  });
});

describe("normalEigen", () => {
  it("does not depend on the unit, bit for bit", () => {
    const next = random(5);
    const list = colliding(1e-9, "circle", next);
    const n = list.length;
    const flat = withEigenvalues(orthonormal(n, n, next, true), list).flat();
    const solve = (unit: number) =>
      normalEigen(
        n,
        { re: Float64Array.from(flat, (x) => unit * x.re), im: Float64Array.from(flat, (x) => unit * x.im) },
        unit * 2 ** -43,
      );
    const ordinary = solve(1);
    for (const unit of [2 ** -560, 2 ** 560]) {
      const { re, im, valuesRe, valuesIm } = solve(unit);
      expect([re, im]).toEqual([ordinary.re, ordinary.im]);
      expect([valuesRe, valuesIm]).toEqual([
        ordinary.valuesRe.map((x) => unit * x),
        ordinary.valuesIm.map((y) => unit * y),
      ]);
    }
  });

  it("the zero matrix and a multiple of one keep the given vectors", () => {
    for (const z of [0, 2.5]) {
      const re = Float64Array.of(z, 0, 0, 0, z, 0, 0, 0, z);
      const found = normalEigen(3, { re, im: undefined }, 0);
      expect([...found.re]).toEqual([1, 0, 0, 0, 1, 0, 0, 0, 1]);
      expect(found.im.every((y) => y === 0)).toBe(true);
      expect([...found.valuesRe]).toEqual([z, z, z]);
    }
  });
});
