import { describe, expect, it } from "vitest";
import { diagonalCsr } from "../../src/numerics/sparse.js";
import { Operator } from "../../src/operator/operator.js";
import { splitIntoEigenspaces } from "../../src/refine/eigenspaces.js";
import { invariance } from "../../src/refine/invariance.js";
import { distance } from "../operator/naive.js";
import {
  csr,
  hermitian,
  naiveOfCsr,
  operatorOf,
  orthonormal,
  random,
  restricted,
  ringReflection,
  ringTranslation,
  withEigenvalues,
} from "./support.js";

describe("invariance", () => {
  it("a ring's reflection maps the blocks of momentum 0 and π into themselves, and no others", () => {
    for (const sites of [6, 8]) {
      const { spaces } = splitIntoEigenspaces(ringTranslation(sites).csr, {
        hermitian: false,
        noise: 1e-13,
        cluster: 1e-11,
      });
      expect(spaces).toHaveLength(sites);
      const found = spaces.map(({ rows }) => invariance(rows, ringReflection(sites)));
      expect(found.map(({ invariant }) => invariant)).toEqual(spaces.map((_, k) => k === 0 || 2 * k === sites));
      const at = (k: number): number => found[k]?.matrix.re[0] ?? Number.NaN;
      expect(at(0)).toBeCloseTo(1, 14);
      // the reflection keeps site 0 in place
      expect(at(sites / 2)).toBeCloseTo(1, 14);
    }
  });

  it("gives the operator's matrix in the frame, complex phases in their place", () => {
    for (let seed = 1; seed < 8; seed++) {
      const next = random(seed);
      const a = hermitian(5, next, true);
      const rows = orthonormal(3, 5, next, true);
      const { invariant, matrix } = invariance(csr(rows), operatorOf(a));
      expect(distance(naiveOfCsr(matrix), restricted(a, rows))).toBeLessThan(1e-15);
      expect(invariant).toBe(false);
    }
  });

  it("knows eigenspaces of normal operators from subspaces that leak, in any unit", () => {
    for (let seed = 1; seed < 8; seed++) {
      const rows = orthonormal(5, 5, random(seed), true);
      const values = [1, 1, { re: 0, im: 1 }, -1, 2].map((z) => (typeof z === "number" ? { re: z, im: 0 } : z));
      for (const unit of [1e-200, 1e-3, 1, 1e200]) {
        const a = operatorOf(withEigenvalues(rows, values)).scale(unit);
        expect(invariance(csr(rows.slice(0, 2)), a).invariant).toBe(true);
        expect(invariance(csr(rows.slice(2, 5)), a).invariant).toBe(true);
        const tilted = [
          ...rows.slice(0, 1),
          (rows[2] ?? []).map((x, k) => ({
            re: 0.99995 * x.re + 0.01 * (rows[3]?.[k]?.re ?? 0),
            im: 0.99995 * x.im + 0.01 * (rows[3]?.[k]?.im ?? 0),
          })),
        ];
        expect(invariance(csr(tilted), a).invariant).toBe(false);
      }
    }
  });

  it("the whole space is invariant, and so is any space under zero", () => {
    const whole = diagonalCsr([1, 1, 1]);
    expect(invariance(whole, operatorOf(hermitian(3, random(3), true))).invariant).toBe(true);
    expect(invariance(csr([[0.6, 0.8, 0]]), Operator.zero(3)).invariant).toBe(true);
  });
});
