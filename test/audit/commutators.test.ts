import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type CommutatorFinding, judgeCommutator } from "../../src/audit/commutators.js";
import { COMMUTATOR_SHARE } from "../../src/audit/resolution.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { Operator } from "../../src/operator/operator.js";
import { hermitian, operatorOf, orthonormal, random, withEigenvalues } from "../refine/support.js";
import { double, type FixedMatrix, frobenius, minus, modulus, norm2, product } from "../support/fixed.js";
import { fixedOperator } from "../support/oracle.js";

const judge = (a: Operator, b: Operator, resolution = 1e-10, ket: (i: number) => string = String): CommutatorFinding =>
  judgeCommutator({ name: "A", operator: a }, { name: "B", operator: b }, resolution, ket);

const exactCommutator = (a: Operator, b: Operator): FixedMatrix => {
  const [x, y] = [fixedOperator(a), fixedOperator(b)];
  return minus(product(x, y), product(y, x));
};

/** Bounds on both sides against the exact commutator of the stored entries. */
function checkBounds(a: Operator, b: Operator, finding: CommutatorFinding): void {
  const exact = exactCommutator(a, b);
  const [two, whole] = [double(norm2(exact)), double(frobenius(exact))];
  expect(finding.bound).toBeGreaterThanOrEqual(two);
  expect(finding.frobeniusBound).toBeGreaterThanOrEqual(whole);
  expect(finding.atLeast).toBeLessThanOrEqual(two);
  expect(finding.bound).toBeLessThanOrEqual(finding.frobeniusBound);
  const rounding = 64 * a.n * 2 ** -53 * a.norm * b.norm;
  expect(Math.abs(finding.norm - whole)).toBeLessThanOrEqual(rounding);
  expect(finding.frobeniusBound).toBeLessThanOrEqual(whole + 8 * a.n * rounding);
  const largest = Math.max(
    ...Array.from({ length: a.n * a.n }, (_, k) => double(modulus(exact, Math.floor(k / a.n), k % a.n))),
  );
  expect(finding.atLeast).toBeGreaterThanOrEqual(largest - rounding);
}

describe("judgeCommutator bounds the exact commutator from both sides", () => {
  for (const uncertainty of ["exact", undefined] as const) {
    for (const complex of [false, true]) {
      it(`${complex ? "complex" : "real"} random operators, entries ${uncertainty ?? "known to half an ulp"}`, () => {
        fc.assert(
          fc.property(fc.integer({ min: 1, max: 6 }), fc.integer(), (n, seed) => {
            const next = random(seed);
            const a = operatorOf(hermitian(n, next, complex), uncertainty);
            const b = operatorOf(hermitian(n, next, complex), uncertainty);
            const finding = judge(a, b);
            checkBounds(a, b, finding);
            if (n > 2) expect(finding.verdict).toBe("broken");
          }),
          { seed: 91, numRuns: 25 },
        );
      });
    }
  }

  it("operators that commute up to rounding", () => {
    for (let seed = 1; seed < 12; seed++) {
      const n = 2 + (seed % 5);
      const rows = orthonormal(n, n, random(seed), seed % 2 === 0);
      const of = (): Operator =>
        operatorOf(
          withEigenvalues(
            rows,
            Array.from({ length: n }, (_, k) => ({ re: ((k + seed) * 7) % 5, im: 0 })),
          ),
          "exact",
        );
      const [a, b] = [of(), of().times(of())];
      const finding = judge(a, b);
      checkBounds(a, b, finding);
      expect(finding.verdict).toBe("commutes");
      expect(finding.largest).toEqual([]);
    }
  });

  it("any operators within the entries' uncertainty", () => {
    for (let seed = 1; seed < 20; seed++) {
      const next = random(seed);
      const [a, b] = [hermitian(3, next, true), hermitian(3, next, true)];
      const radius = 10 ** -(seed % 12);
      const moved = (m: typeof a): Operator =>
        operatorOf(
          m.map((row) =>
            row.map((x) => ({
              re: x.re + 0.7 * radius * Math.sign(next()),
              im: x.im + 0.7 * radius * Math.sign(next()),
            })),
          ),
          "exact",
        );
      const uncertain = { uncertainty: { relative: 0, absolute: radius } };
      const finding = judge(Operator.from(operatorOf(a), uncertain), Operator.from(operatorOf(b), uncertain));
      for (let k = 0; k < 4; k++) {
        const exact = exactCommutator(moved(a), moved(b));
        expect(double(norm2(exact))).toBeLessThanOrEqual(finding.bound);
        expect(double(frobenius(exact))).toBeLessThanOrEqual(finding.frobeniusBound);
        expect(double(norm2(exact))).toBeGreaterThanOrEqual(finding.atLeast);
      }
    }
  });
});

describe("judgeCommutator has three verdicts", () => {
  const z = Operator.diagonal([1, -1], { uncertainty: "exact" });
  const mixing = (x: number, uncertainty: "exact" | { relative: number; absolute: number } = "exact"): Operator =>
    Operator.from(
      [
        [1, x],
        [x, -1],
      ],
      { uncertainty },
    );

  it("commutes at the threshold, broken above", () => {
    const threshold = judge(z, mixing(0)).threshold;
    expect(threshold).toBeGreaterThanOrEqual(1e-10 * COMMUTATOR_SHARE * 0.999);
    expect(threshold).toBeLessThan(1e-10 * COMMUTATOR_SHARE * 1.001);
    expect(judge(z, mixing(0))).toMatchObject({
      verdict: "commutes",
      norm: 0,
      bound: 0,
      frobeniusBound: 0,
      atLeast: 0,
      largest: [],
    });
    expect(judge(z, mixing(0.49 * threshold)).verdict).toBe("commutes");
    expect(judge(z, mixing(0.51 * threshold)).verdict).toBe("broken");
    expect(judge(z, mixing(0.51 * threshold), 1e-8).verdict).toBe("commutes");
  });

  it("undecided where the uncertainty straddles the threshold", () => {
    // what is not stored is exactly zero, so the element is given as a tiny one
    const finding = judge(z, mixing(1e-30, { relative: 0, absolute: 1e-9 }));
    expect(finding.verdict).toBe("undecided");
    expect(finding.norm).toBeLessThan(1e-29);
    expect(finding.atLeast).toBe(0);
    expect(finding.bound).toBeGreaterThanOrEqual(2e-9);
    expect(finding.bound).toBeLessThan(2.1e-9);
    expect(finding.largest).toHaveLength(2);
    expect(judge(z, mixing(1e-9, { relative: 0, absolute: 0.99e-9 })).verdict).toBe("broken");
    expect(judge(z, mixing(1e-9, { relative: 0, absolute: 1.01e-9 })).verdict).toBe("undecided");
  });

  it("measures by the norms of the two: scaling either changes no verdict", () => {
    for (const scale of [1e-100, 1e-8, 1, 1e100]) {
      for (const [x, verdict] of [
        [1e-13, "commutes"],
        [1e-11, "broken"],
      ] as const) {
        expect(judge(z.scale(scale), mixing(x)).verdict).toBe(verdict);
        expect(judge(z, mixing(x).scale(scale)).verdict).toBe(verdict);
      }
    }
  });

  it("never takes elements whose squares vanish for zero, nor those whose squares overflow for too large", () => {
    for (const unit of [1e-300, 1e-170, 1e160, 1e300]) {
      const off = Operator.from(
        [
          [0, unit],
          [unit, 0],
        ],
        { uncertainty: "exact" },
      );
      const finding = judge(z, off);
      expect(finding.verdict).toBe("broken");
      for (const size of [finding.atLeast, finding.bound, finding.norm / Math.SQRT2, finding.largest[0]?.size ?? 0])
        expect(size / unit).toBeCloseTo(2, 12);
      const slight = Operator.diagonal([1, 2 ** -44], { uncertainty: "exact" });
      expect(judge(slight, off).verdict).toBe("broken");
      const nearly = Operator.from(
        [
          [unit, 1e-14 * unit],
          [1e-14 * unit, -unit],
        ],
        { uncertainty: "exact" },
      );
      expect(judge(z, nearly).verdict).toBe("commutes");
      const unsure = Operator.from(
        [
          [0, unit],
          [unit, 0],
        ],
        { uncertainty: { relative: 1.01, absolute: 0 } },
      );
      expect(judge(z, unsure).verdict).toBe("undecided");
    }
  });

  it("zero and identity commute with everything", () => {
    const any = operatorOf(hermitian(3, random(2), true));
    for (const trivial of [Operator.zero(3), Operator.identity(3), any]) {
      expect(judge(trivial, any).verdict).toBe("commutes");
      expect(judge(any, trivial).bound).toBeLessThanOrEqual(judge(any, trivial).threshold);
    }
    expect(judge(Operator.from([[3]]), Operator.from([[4]])).verdict).toBe("commutes");
  });
});

describe("judgeCommutator names the largest elements", () => {
  it("at most three, in descending order, by ket", () => {
    const { x, z, kets } = angularMomentum(2);
    const finding = judge(z, x, 1e-10, (i) => `|${kets[i]}⟩`);
    expect(finding.left).toBe("A");
    expect(finding.largest.map(({ rowKet, columnKet }) => [rowKet, columnKet])).toEqual([
      ["|1⟩", "|0⟩"],
      ["|0⟩", "|1⟩"],
      ["|0⟩", "|-1⟩"],
    ]);
    for (const { size } of finding.largest) expect(size).toBeCloseTo(Math.sqrt(6) / 2, 14);
  });

  it("finds them wherever they stand, complex ones by their modulus", () => {
    const diagonal = Operator.diagonal([0, 1, 2, 3], { uncertainty: "exact" });
    const b = Operator.fromTriplets(
      4,
      [
        [0, 1, 3],
        [1, 0, 3],
        [1, 2, 0, 4],
        [2, 1, 0, -4],
        [0, 3, 3, 4],
        [3, 0, 3, -4],
      ],
      { uncertainty: "exact" },
    );
    const finding = judge(diagonal, b);
    expect(finding.largest).toMatchObject([
      { row: 0, column: 3, rowKet: "0", columnKet: "3" },
      { row: 3, column: 0 },
      { row: 1, column: 2 },
    ]);
    expect(finding.largest.map(({ size }) => size)).toEqual([15, 15, 4]);
    const only = judge(
      Operator.diagonal([0, 1, 1, 1], { uncertainty: "exact" }),
      Operator.fromTriplets(
        4,
        [
          [0, 1, 1e-3],
          [1, 0, 1e-3],
        ],
        { uncertainty: "exact" },
      ),
    );
    expect(only.largest).toHaveLength(2);
  });
});

describe("judgeCommutator points out a likely edge", () => {
  const number = (n: number): Operator =>
    Operator.diagonal(
      Array.from({ length: n }, (_, k) => k + 0.5),
      { uncertainty: "exact" },
    );
  /** 1 on every ket, displaced on the last `kets`. */
  const edged = (n: number, kets: number): Operator =>
    Operator.diagonal(new Float64Array(n).fill(1), { uncertainty: "exact" }).plus(
      Operator.fromTriplets(
        n,
        [
          [n - 1, n - 1 - kets, 0.5],
          [n - 1 - kets, n - 1, 0.5],
        ],
        { uncertainty: "exact" },
      ),
    );

  it("where every failing element lies among the last kets", () => {
    expect(judge(number(12), edged(12, 1))).toMatchObject({ verdict: "broken", edge: true });
    expect(judge(number(12), edged(12, 2))).toMatchObject({ edge: true });
    expect(judge(number(8), edged(8, 1)).edge).toBe(true);
  });

  it("not in a small space, not for a failure elsewhere, not where nothing is broken", () => {
    expect(judge(number(7), edged(7, 1))).toMatchObject({ verdict: "broken", edge: false });
    // an element that reaches out of the last quarter is no edge: a mirror of a ring fails between the first and the last ket
    expect(judge(number(12), edged(12, 5))).toMatchObject({ verdict: "broken", edge: false });
    expect(judge(number(12), edged(12, 11))).toMatchObject({ verdict: "broken", edge: false });
    const inner = edged(12, 1).plus(
      Operator.fromTriplets(
        12,
        [
          [0, 9, 1e-3],
          [9, 0, 1e-3],
        ],
        { uncertainty: "exact" },
      ),
    );
    expect(judge(number(12), inner)).toMatchObject({ verdict: "broken", edge: false });
    expect(judge(number(12), Operator.identity(12))).toMatchObject({ verdict: "commutes", edge: false });
  });
});
