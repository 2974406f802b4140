import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { findGoodBasis, type GoodBasis, GoodBasisError, Operator, type Problem, perturb } from "../../src/index.js";
import { problemOf } from "../support/check-bounds.js";
import { exactProblem } from "../support/exact-problem.js";
import {
  adjoint,
  at,
  columns,
  double,
  eigen,
  type FixedMatrix,
  fixed,
  frobenius,
  matrix,
  minus,
  product,
} from "../support/fixed.js";
import { fixedOperator, fixedStates } from "../support/oracle.js";
import { plans } from "../support/plans.js";

const exact = { uncertainty: "exact" } as const;

function good<K extends string = never, P extends string = string>(problem: Problem<K, P>): GoodBasis<K> {
  // about formulas: V may be as strong as it is
  const outcome = findGoodBasis(problem, { refuseAbove: 1e9 });
  if (outcome.verdict !== "good") throw new Error(outcome.levels[0]?.questions[0]?.message ?? outcome.verdict);
  return outcome.basis;
}

function untyped(value: unknown): never {
  return value as never;
}

function codeOf(attempt: () => unknown): string {
  try {
    attempt();
  } catch (error) {
    return error instanceof GoodBasisError ? error.code : `raw ${String(error)}`;
  }
  return "nothing thrown";
}

describe("the short formulas", () => {
  // H0 = diag(0, 1), V = [[a, b], [b*, c]]: E0, E1 and E2 = ∓|b|² in closed form.
  it.each([
    [0.5, 0.25, 0, -0.125],
    [0, 0, 2, 3],
    [-1, 3, 4, 7],
    [1e-9, 1e-12, 0, 5],
  ])("two levels: a = %d, b = %d + %di, c = %d", (a, re, im, c) => {
    const v = Operator.from(
      {
        re: [
          [a, re],
          [re, c],
        ],
        im: [
          [0, im],
          [-im, 0],
        ],
      },
      exact,
    );
    const { states, perturbations } = perturb(good({ h0: Operator.diagonal([0, 1], exact), v }), { states: 1 });
    expect(perturbations).toEqual(["V"]);
    const square = re * re + im * im;
    for (const [k, state] of states.entries()) {
      expect(state.zeroth.value).toBe(k);
      expect(Math.abs((state.first?.[0]?.value ?? Number.NaN) - (k === 0 ? a : c))).toBeLessThanOrEqual(
        state.first?.[0]?.plusMinus ?? 0,
      );
      const second = state.second?.[0]?.[0];
      expect(Math.abs((second?.value ?? Number.NaN) - (k === 0 ? -square : square))).toBeLessThanOrEqual(
        second?.plusMinus ?? 0,
      );
      expect(second?.plusMinus).toBeLessThan(1e-13 * (1 + square + a * a + c * c));
      // |0⟩ gains −⟨1|V|0⟩ |1⟩, |1⟩ gains ⟨0|V|1⟩ |0⟩
      const [correction] = state.correction ?? [];
      expect([...(correction?.kets ?? [])]).toEqual([1 - k]);
      expect(correction?.re[0]).toBeCloseTo(k === 0 ? -re : re, 12);
      expect(correction?.im?.[0] ?? 0).toBeCloseTo(k === 0 ? im : im, 12);
    }
  });

  it("orders asked for and not asked for", () => {
    const basis = good({
      h0: Operator.diagonal([0, 1]),
      v: Operator.from([
        [0, 1],
        [1, 0],
      ]),
    });
    const [none] = perturb(basis, { order: 0 }).states;
    expect(none?.first).toBeUndefined();
    expect(none?.second).toBeUndefined();
    expect(none?.correction).toBeUndefined();
    const [one] = perturb(basis, { order: 1, states: 1 }).states;
    expect(one?.first).toHaveLength(1);
    expect(one?.second).toBeUndefined();
    expect(one?.correction).toHaveLength(1);
    expect(perturb(basis).states.map((state) => state.index)).toEqual([0, 1]);
    expect(perturb(basis, { select: [1, 0, 1] }).states.map((state) => state.index)).toEqual([1, 0, 1]);
    expect(perturb(basis, { select: [] }).states).toEqual([]);
  });

  it("several perturbations: E2 is symmetric, and gives the second order of every sum of them", () => {
    let compared = 0;
    fc.assert(
      fc.property(plans({ breaking: 0, perturbations: 2, energies: [-5, 0, 5], labels: [2, 3] }), (plan) => {
        const problem = exactProblem(plan);
        const [v0, v1] = problem.perturbations;
        if (v0 === undefined || v1 === undefined) return;
        const { candidates = {} } = problemOf(problem);
        const both = findGoodBasis({ h0: problem.h0, v: { v0, v1 }, candidates });
        const sum = findGoodBasis({ h0: problem.h0, v: v0.plus(v1.scale(-2)), candidates });
        if (both.verdict !== "good" || sum.verdict !== "good") return;
        const isolated = both.states.filter(({ safe }) => safe.energies === "all").map((state) => state.index);
        for (const index of isolated) {
          const [a] = perturb(both.basis, { select: [index] }).states;
          const [b] = perturb(sum.basis, { select: [index] }).states;
          const e2 = (p: number, q: number): { value: number; plusMinus: number } =>
            a?.second?.[p]?.[q] ?? { value: Number.NaN, plusMinus: 0 };
          expect(Math.abs(e2(0, 1).value - e2(1, 0).value)).toBeLessThanOrEqual(e2(0, 1).plusMinus);
          const mixed = e2(0, 0).value - 2 * (e2(0, 1).value + e2(1, 0).value) + 4 * e2(1, 1).value;
          const plusMinus = e2(0, 0).plusMinus + 2 * (e2(0, 1).plusMinus + e2(1, 0).plusMinus) + 4 * e2(1, 1).plusMinus;
          const whole = b?.second?.[0]?.[0] ?? { value: Number.NaN, plusMinus: 0 };
          expect(Math.abs(whole.value - mixed)).toBeLessThanOrEqual(whole.plusMinus + plusMinus);
          compared++;
        }
      }),
      { seed: 27, numRuns: 50 },
    );
    expect(compared).toBeGreaterThan(60);
  });
});

describe("what is refused", () => {
  const rotor = {
    h0: Operator.diagonal([0, 1, 1], exact),
    v: Operator.from(
      [
        [0, 1, 1],
        [1, 0, 0],
        [1, 0, 0],
      ],
      exact,
    ),
  };

  it("states that only V tells apart stop at the second order, states that W tells apart at none", () => {
    const basis = good({ h0: Operator.diagonal([0, 1, 1], exact), v: Operator.diagonal([0, 1, 2], exact) });
    expect(codeOf(() => perturb(basis, { order: 2 }))).toBe("nothing thrown");
    expect(codeOf(() => perturb(basis, { states: 1 }))).toBe("unsafe-order");
    expect(codeOf(() => perturb(basis, { states: 1, select: [0] }))).toBe("nothing thrown");
    const second = good(rotor);
    expect(second.states.map((state) => state.safe)).toContainEqual({ energies: 3, states: 0 });
    expect(codeOf(() => perturb(second))).toBe("nothing thrown");
    expect(codeOf(() => perturb(second, { states: 1 }))).toBe("unsafe-order");
  });

  it("states that nothing tells apart stop at the first, and the message names them", () => {
    const basis = good({ h0: Operator.diagonal([0, 1, 1]), v: Operator.zero(3) });
    expect(codeOf(() => perturb(basis, { order: 1 }))).toBe("nothing thrown");
    expect(codeOf(() => perturb(basis, { order: 0 }))).toBe("nothing thrown");
    try {
      perturb(basis);
      expect.unreachable();
    } catch (error) {
      if (!(error instanceof GoodBasisError)) throw error;
      expect(error.code).toBe("unsafe-order");
      expect(error.details["states"]).toEqual([1, 2]);
      expect(error.message).toContain("2 of 3 states");
    }
    expect(perturb(basis, { select: [0] }).states).toHaveLength(1);
  });

  it.each([
    ["options = null", null],
    ["options in words", "order 2"],
    ["order as text", { order: "2" }],
    ["order 3", { order: 3 }],
    ["order −1", { order: -1 }],
    ["order 1.5", { order: 1.5 }],
    ["order NaN", { order: Number.NaN }],
    ["states 2", { states: 2 }],
    ["states true", { states: true }],
    ["select a number", { select: 0 }],
    ["select a text", { select: "01" }],
    ["select the list's own methods", { select: ["length"] }],
    ["select a text inside a list", { select: ["0"] }],
    ["select half a state", { select: [0.5] }],
    ["select −1", { select: [-1] }],
    ["select one too many", { select: [3] }],
    ["select NaN", { select: [Number.NaN] }],
  ])("%s", (_, options) => {
    expect(codeOf(() => perturb(good(rotor), untyped(options)))).toBe("option");
  });
});

describe("the series is that of the exact energies", () => {
  it("E(λ) − E0 − λ E1 − λ² E2 is of third order, for every state that may have a second order", () => {
    // λ = 2^−24: what is left is below 2^−72 times a moderate number, while λ² E2 is near 2^−48
    const shift = 24;
    const lambda = fixed(2 ** -shift);
    let compared = 0;
    fc.assert(
      fc.property(
        plans({ breaking: 0, perturbations: 1, energies: [-5, 0, 5], inside: "full", uncertainty: "exact" }),
        (plan) => {
          const problem = exactProblem({ ...plan, n: Math.min(plan.n, 8) });
          const outcome = findGoodBasis(problemOf(problem));
          if (outcome.verdict !== "good") return;
          const v = problem.perturbations[0] ?? problem.h0;
          const h0 = fixedOperator(problem.h0);
          const total = matrix(problem.n, problem.n, (i, j) => {
            const [a, b] = at(h0, i, j);
            const [c, d] = at(fixedOperator(v), i, j);
            return [a + (c >> BigInt(shift)), b + (d >> BigInt(shift))];
          });
          const { values } = eigen(total);
          const select = outcome.states
            .filter(({ safe }) => safe.energies === "all" || safe.energies >= 2)
            .map((s) => s.index);
          for (const { zeroth, first, second } of perturb(outcome.basis, { select }).states) {
            const e1 = first?.[0] ?? { value: Number.NaN, plusMinus: 0 };
            const e2 = second?.[0]?.[0] ?? { value: Number.NaN, plusMinus: 0 };
            const short =
              fixed(Math.round(zeroth.value)) +
              (((fixed(e1.value) + ((fixed(e2.value) * lambda) >> 320n)) * lambda) >> 320n);
            const nearest = values.reduce((least, x) => {
              const distance = x > short ? x - short : short - x;
              return distance < least ? distance : least;
            }, 1n << 400n);
            const allowed = e1.plusMinus * 2 ** -shift + e2.plusMinus * 2 ** (-2 * shift) + 1e4 * 2 ** (-3 * shift);
            expect(double(nearest)).toBeLessThanOrEqual(allowed);
            compared++;
          }
        },
      ),
      { seed: 19, numRuns: 40 },
    );
    expect(compared).toBeGreaterThan(60);
  });

  it("the first-order states solve (E0 − H0) x = (1 − P) V μ outside the level and have no part inside", () => {
    let compared = 0;
    fc.assert(
      fc.property(plans({ breaking: 0, energies: [0, 1, 3] }), (plan) => {
        const problem = exactProblem(plan);
        const outcome = findGoodBasis(problemOf(problem));
        if (outcome.verdict !== "good") return;
        const select = outcome.states.filter(({ safe }) => safe.states === "all").map((state) => state.index);
        const states = fixedStates(outcome.states, problem.n);
        for (const { index, correction } of perturb(outcome.basis, { select, states: 1 }).states) {
          const level = outcome.levels[outcome.states[index]?.level ?? 0];
          const e0 = Math.round(level?.energy ?? 0);
          correction?.forEach((vector, p) => {
            const x = product(adjoint(problem.frame), fixedStates([{ vector }], problem.n));
            const y = product(adjoint(problem.frame), columns(states, [index]));
            const w: FixedMatrix = product(problem.inner[p] ?? problem.frame, y);
            const wanted = matrix(problem.n, 1, (i) => {
              const energy = problem.energies[i] ?? 0;
              const [a, b] = at(w, i, 0);
              return energy === e0 ? [0n, 0n] : [a / BigInt(e0 - energy), b / BigInt(e0 - energy)];
            });
            expect(double(frobenius(minus(x, wanted)))).toBeLessThan(1e-12);
            compared++;
          });
        }
      }),
      { seed: 23, numRuns: 60 },
    );
    expect(compared).toBeGreaterThan(60);
  });
});
