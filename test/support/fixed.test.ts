import { describe, expect, it } from "vitest";
import { Operator } from "../../src/index.js";
import { generator } from "../numerics/eigen/matrices.js";
import { exactProblem } from "./exact-problem.js";
import {
  adjoint,
  DUST,
  double,
  eigen,
  fixed,
  frobenius,
  identity,
  matrix,
  minus,
  norm2,
  ONE,
  polar,
  product,
  root,
  size,
  times,
} from "./fixed.js";
import { Claims, fixedOperator } from "./oracle.js";

describe("the oracle itself", () => {
  it.each([1, -1, 0.1, -3.5, 2 ** -60, 1e-80, 1e80, Number.EPSILON, Math.PI])("takes %d exactly", (x) => {
    expect(double(fixed(x))).toBe(x);
  });

  it("shifts by powers of two exactly", () => {
    expect(fixed(1e-150, 500)).toBe(fixed(1e-150 * 2 ** 500));
    expect(fixed(5e-324, 1074)).toBe(ONE);
  });

  it("takes square roots", () => {
    const two = root(2n * ONE);
    expect(size(times(two, two) - 2n * ONE)).toBeLessThan(8n);
    expect(double(two)).toBe(Math.SQRT2);
  });

  it("diagonalises to the last digits, degenerate or nearly so", () => {
    const random = generator(5);
    for (const values of [
      [1, 1, 1, 2],
      [0, 0, 0, 0],
      [1, 1 + 2 ** -50, 2, 2],
      [1e-30, 1, 1e10, -1e10],
    ]) {
      const raw = matrix(4, 4, () => [fixed(random()), fixed(random())]);
      const seed = eigen(
        minus(
          raw,
          matrix(4, 4, (i, j) => [-(adjoint(raw).re[i * 4 + j] ?? 0n), -(adjoint(raw).im[i * 4 + j] ?? 0n)]),
        ),
      );
      const u = polar(seed.vectors);
      expect(double(frobenius(minus(product(adjoint(u), u), identity(4))))).toBeLessThan(1e-90);
      const diagonal = matrix(4, 4, (i, j) => [i === j ? fixed(values[i] ?? 0) : 0n, 0n]);
      const a = product(product(u, diagonal), adjoint(u));
      const found = eigen(a);
      const sorted = [...values].sort((x, y) => x - y);
      for (const [k, value] of found.values.entries())
        expect(size(value - fixed(sorted[k] ?? 0))).toBeLessThan(DUST << 40n);
      const lambda = matrix(4, 4, (i, j) => [i === j ? (found.values[i] ?? 0n) : 0n, 0n]);
      expect(double(frobenius(minus(product(a, found.vectors), product(found.vectors, lambda))))).toBeLessThan(1e-78);
    }
  });

  it("knows the 2-norm of a rotation scaled", () => {
    const a = fixedOperator(
      Operator.from([
        [3, -4],
        [4, 3],
      ]),
    );
    expect(size(norm2(a) - fixed(5))).toBeLessThan(DUST);
  });

  it("plants levels that are degenerate to the last bit", () => {
    for (let seed = 1; seed <= 20; seed++) {
      const exact = exactProblem({
        seed,
        n: 2 + (seed % 8),
        complex: seed % 2 === 0,
        energies: [1, 1 + 2 ** -20, 2 ** -18],
        labels: [2],
        unitary: seed % 3 === 0,
        inside: "full",
        perturbations: 1,
        breaking: 0,
        scale: 0,
        uncertainty: "exact",
      });
      const inner = product(product(adjoint(exact.frame), fixedOperator(exact.h0)), exact.frame);
      const truth = matrix(exact.n, exact.n, (i, j) => [i === j ? fixed(exact.energies[i] ?? 0) : 0n, 0n]);
      expect(frobenius(minus(inner, truth))).toBe(0n);
      expect(frobenius(minus(product(adjoint(exact.frame), exact.frame), identity(exact.n)))).toBe(0n);
      // V keeps to the sectors
      exact.sectors.forEach((a, i) => {
        exact.sectors.forEach((b, j) => {
          if (a !== b) expect(exact.inner[0]?.re[i * exact.n + j]).toBe(0n);
        });
      });
    }
  });

  it("says no to a bound that is too small by a part in 2^50, and to NaN", () => {
    const claims = new Claims();
    claims.atMost(ONE, 1 - 2 ** -50, "small");
    claims.atMost(ONE, Number.NaN, "not a number");
    claims.atLeast(ONE, 1 + 2 ** -50, "large");
    expect(claims.broken).toHaveLength(3);
    claims.atMost(ONE, 1, "right");
    claims.atLeast(ONE, 1, "right");
    claims.atMost(ONE, Number.POSITIVE_INFINITY, "nothing said");
    expect(claims.broken).toHaveLength(3);
  });
});
