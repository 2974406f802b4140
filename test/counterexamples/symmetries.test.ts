import { describe, expect, it } from "vitest";
import { auditCommutators, findGoodBasis, Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { ketPermutation, reflection, translation } from "../../src/models/permutations.js";
import { spinChain } from "../../src/models/spin-chain.js";
import { bruteForce, expectNear, expectValues, goodBasis, levelAt, shifts, symmetric } from "../published/support.js";

describe("degeneracy", () => {
  it("conserved operators that do not commute are no protection: two copies of one irreducible space still split", () => {
    const { x, z } = angularMomentum(0.5);
    const two = Operator.identity(2);
    const v = two.kron(Operator.diagonal([1, -1]));
    const problem = { h0: Operator.zero(4), v, candidates: { Sx: x.kron(two), Sz: z.kron(two) } };
    const audit = auditCommutators(problem);
    expect(audit.candidates.map((finding) => finding.conserved)).toEqual([true, true]);
    expect(audit.remarks).toHaveLength(1);
    const basis = goodBasis(problem);
    expectValues(
      shifts(basis.states),
      [
        [1, 2],
        [-1, 2],
      ],
      1e-14,
    );
    for (const state of basis.states) expect(state.safe).toEqual({ energies: 2, states: 0 });
    expect(findGoodBasis(problem, { depth: "labels" }).verdict).not.toBe("good");
  });

  it("translation and reflection of a ring do not commute, but reflection refines k = 0 and π", () => {
    const ring = spinChain(4);
    const bonds = [0, 1, 2, 3].map((i) => [i, (i + 1) % 4] as const);
    const problem = {
      h0: Operator.sum(...bonds.map(([i, k]) => ring.szsz(i, k))),
      v: Operator.sum(...bonds.map(([i, k]) => ring.exchange(i, k))),
      candidates: {
        Sz: { operator: ring.totalSz, label: "m" },
        T: { operator: translation(4, 2), label: { root: 4 } },
        R: { operator: reflection(4, 2), label: "parity" },
      },
    } as const;
    const audit = auditCommutators(problem);
    expect(audit.candidates.map((finding) => finding.conserved)).toEqual([true, true, true]);
    expect(audit.sets).toEqual([
      ["Sz", "T"],
      ["Sz", "R"],
    ]);
    expect(audit.remarks).toHaveLength(1);
    const basis = goodBasis(problem);
    expect(basis.study.sets.find((set) => set.chosen)?.names).toEqual(["Sz", "T"]);
    for (const state of basis.states) {
      const turning = Math.abs(state.labels.T.im) > 0.5;
      if (turning) expect(state.labels.R.status).toBe("not sharp");
      else expect(state.labels.R).toMatchObject({ status: "declared", role: "conserved" });
    }
    expect(basis.states.some((state) => state.labels.R.text === "−1" && Math.abs(state.labels.T.im) < 0.5)).toBe(true);
  });
});

describe("runaway denominators", () => {
  it("are measured blockwise: levels 1e-9 apart that couple only through a third", () => {
    const h0 = Operator.diagonal([0, 1e-9, 1]);
    const v = symmetric(3, [
      [0, 2, 0.1],
      [1, 2, 0.1],
    ]);
    // The short second order gives −0.01 twice; the truth is −0.02 and 0 (to higher orders in 0.1).
    expectNear(-(0.1 ** 2), -0.01, 1e-15);
    const [low, middle] = bruteForce(h0.plus(v)).sort((a, b) => a - b);
    expectNear(low ?? 0, (1 - Math.sqrt(1.08)) / 2, 1e-8);
    expectNear(middle ?? 1, 5e-10, 1e-11);
    for (const options of [{}, { lambda: 1 }, { levelWidth: 1e-12 }]) {
      const outcome = findGoodBasis({ h0, v }, options);
      expect(outcome.verdict).toBe("undecided");
      for (const level of outcome.levels.slice(0, 2)) {
        expect(level.questions.map((question) => question.code)).toContain("near-degenerate");
        const [sector] = level.guard.sectors;
        expectNear(sector?.first.ratio ?? 1, 0.1, 1e-8); // the largest single ratio looks harmless
        expectNear((sector?.second.ratio ?? 0) / 1e7, 1, 1e-6);
      }
    }
  });

  it("many small elements add up where each alone is below the threshold", () => {
    // Two levels of 64 states, 1 apart; V couples every state of one to every state of the other by 1/16.
    const n = 64;
    const h0 = Operator.diagonal(Array.from({ length: 2 * n }, (_, k) => (k < n ? 0 : 1)));
    const v = symmetric(
      2 * n,
      Array.from({ length: n * n }, (_, k) => [Math.floor(k / n), n + (k % n), 1 / 16] as const),
    );
    const { levels } = findGoodBasis({ h0, v }, { lambda: 1, depth: "first order" });
    for (const level of levels) {
      expectNear(level.guard.sectors[0]?.first.ratio ?? 0, 4, 1e-9);
      expect(level.questions.map((question) => question.code)).toContain("near-degenerate");
    }
  });

  it("Kato's bound d/2‖V‖ does not exceed the radius of convergence", () => {
    // ½ ± √(¼ + λ²) branches at λ = ±i/2.
    const basis = goodBasis({ h0: Operator.diagonal([0, 1]), v: symmetric(2, [[0, 1, 1]]) });
    for (const level of basis.levels) {
      const radius = level.guard.radius[0] ?? 0;
      expect(radius).toBeLessThanOrEqual(0.5);
      expect(radius).toBeGreaterThan(0.4999);
    }
  });

  it("inside the level: W against the splitting by V", () => {
    // V parts the pair by 2e-3 only, W couples it by 0.35.
    const h0 = Operator.diagonal([0, 0, 1]);
    const v = symmetric(3, [
      [0, 0, 1e-3],
      [1, 1, -1e-3],
      [0, 2, 0.5],
      [1, 2, 0.7],
    ]);
    const outcome = findGoodBasis({ h0, v }, { lambda: 1 });
    expect(outcome.verdict).toBe("undecided");
    expectNear(outcome.levels[0]?.guard.inside ?? 0, 175, 1e-6);
    expect(outcome.levels[0]?.questions.map((question) => question.code)).toContain("strong-mixing");
  });
});

describe("labels", () => {
  const h0 = Operator.zero(2);
  const v = Operator.diagonal([1, -1]);

  it("snap only where the enclosure allows one member of the family", () => {
    const of = (values: readonly number[], absolute?: number) => {
      const A = Operator.diagonal(values, absolute === undefined ? {} : { uncertainty: { absolute } });
      const outcome = findGoodBasis({ h0, v, candidates: { A: { operator: A, label: "m" } } });
      return outcome.states.map((state) => state.labels.A);
    };
    expect(of([0.5, -0.5]).map(({ text, status }) => [text, status])).toEqual([
      ["1/2", "declared"],
      ["−1/2", "declared"],
    ]);
    for (const label of of([0.5 + 1e-6, -0.5])) expect(label.status).toBe(label.re > 0 ? "measured" : "declared");
    // Known to 0.3 only, 0.5 may be 0, 1/2 or, nearly, 1.
    for (const label of of([0.5, -0.5], 0.3)) expect(label.status).not.toBe("declared");
  });

  it("are proposals where nothing was declared", () => {
    const outcome = findGoodBasis({ h0, v, candidates: { A: Operator.diagonal([0.5, -0.5]) } });
    expect(outcome.states.map((state) => state.labels.A.status)).toEqual(["proposed", "proposed"]);
  });

  it("of unitary candidates separate by either part: e^{±2πi/3} share the real one", () => {
    const C3 = { operator: ketPermutation([1, 2, 0]), label: { root: 3 } } as const;
    const ring = symmetric(3, [
      [0, 1, 1],
      [1, 2, 1],
      [0, 2, 1],
    ]);
    const current = C3.operator.minus(C3.operator.adjoint()).scale({ re: 0, im: 1 });
    const basis = goodBasis({ h0: ring, v: current, candidates: { C3 } }, { depth: "labels" });
    expectValues(
      shifts(levelAt(basis, -1)),
      [
        [Math.sqrt(3), 1],
        [-Math.sqrt(3), 1],
      ],
      1e-12,
    );
    for (const state of basis.states) expect(state.safe).toEqual({ energies: "all", states: "all" });
  });
});

describe("determinism", () => {
  it("the same input gives the same vectors, phases included", () => {
    const { h0, v } = (() => {
      const chain = spinChain(3);
      const dot = (i: number, k: number): Operator => chain.szsz(i, k).plus(chain.exchange(i, k));
      return { h0: Operator.sum(dot(0, 1), dot(1, 2), dot(0, 2)), v: dot(0, 1).plus(chain.sz(2)) };
    })();
    const once = findGoodBasis({ h0, v });
    const again = findGoodBasis({ h0, v });
    expect(again.states).toEqual(once.states);
    for (const { vector } of once.states) {
      const sizes = [...vector.re].map((re, k) => Math.hypot(re, vector.im?.[k] ?? 0));
      const first = sizes.findIndex((size) => size >= 0.987 * Math.max(...sizes));
      expect(vector.re[first]).toBeGreaterThan(0);
      expect(vector.im?.[first] ?? 0).toBe(0);
    }
  });
});
