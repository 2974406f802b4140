import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { type FindOptions, findGoodBasis, Operator } from "../../src/index.js";
import { checkOutcome, checkWhole } from "../support/check-bounds.js";
import { type ExactPlan, exactProblem } from "../support/exact-problem.js";
import { plans } from "../support/plans.js";

const depths = fc.constantFrom<NonNullable<FindOptions["depth"]>>("full", "full", "labels", "first order");

/** Verdicts met and bounds compared, so that a run which met nothing fails. */
interface Tally {
  good: number;
  "not good": number;
  undecided: number;
  checked: number;
}

function compare(plan: ExactPlan, options: FindOptions, tally: Tally): void {
  const { claims, outcome } = checkOutcome(exactProblem(plan), options);
  expect(claims.broken).toEqual([]);
  tally[outcome.verdict]++;
  tally.checked += claims.checked;
}

const none = (): Tally => ({ good: 0, "not good": 0, undecided: 0, checked: 0 });

describe("no stated bound is wrong", () => {
  it("states, elements, shifts, second orders and labels of random problems with planted degeneracy", () => {
    const tally = none();
    fc.assert(
      fc.property(plans(), depths, (plan, depth) => compare(plan, { depth }, tally)),
      { seed: 1203, numRuns: 160 },
    );
    expect(tally.good).toBeGreaterThan(70);
    expect(tally["not good"]).toBeGreaterThan(10);
    expect(tally.undecided).toBeGreaterThan(10);
    expect(tally.checked).toBeGreaterThan(5000);
  });

  it("the same where the next level is 1e-6 away and V tells states apart by 1e-4 only", () => {
    const tally = none();
    fc.assert(
      fc.property(
        plans({ inside: "close", energies: [1, 1 + 2 ** -20, 3], breaking: 0, perturbations: 1, uncertainty: "exact" }),
        (plan) => compare({ ...plan, n: Math.max(4, plan.n) }, { refuseAbove: 1e9 }, tally),
      ),
      { seed: 77, numRuns: 45 },
    );
    expect(tally.good).toBeGreaterThan(20);
  });

  it.each([170, -113, -498, -530, -1000])("at the scale 2^%d", (scale) => {
    const tally = none();
    fc.assert(
      fc.property(plans({ scale }), depths, (plan, depth) => compare(plan, { depth }, tally)),
      { seed: scale + 5000, numRuns: 18 },
    );
    expect(tally.good + tally["not good"]).toBeGreaterThan(5);
  });

  it("the scale of everything changes no verdict as long as squares stay in range", () => {
    fc.assert(
      fc.property(plans(), fc.constantFrom(-340, -113, 100, 170), (plan, scale) => {
        const here = checkOutcome(exactProblem(plan)).outcome;
        const there = checkOutcome(exactProblem({ ...plan, scale })).outcome;
        // λ is not stated: both are H0 and V in another unit
        expect(there.verdict).toBe(here.verdict);
        expect(there.states.map((state) => state.safe)).toEqual(here.states.map((state) => state.safe));
      }),
      { seed: 9, numRuns: 25 },
    );
  });

  it("the whole space: orthonormality, energies, commutators, and the nearby symmetric model", () => {
    let checked = 0;
    fc.assert(
      fc.property(plans(), fc.constantFrom(0, 0, 0, -113, -498), (plan, scale) => {
        const { claims } = checkWhole(exactProblem({ ...plan, scale }));
        expect(claims.broken).toEqual([]);
        checked += claims.checked;
      }),
      { seed: 41, numRuns: 90 },
    );
    expect(checked).toBeGreaterThan(1500);
  });

  it("eta is no empty word: a symmetry broken a little puts V that far from its model, and not a thousand times farther", () => {
    fc.assert(
      fc.property(plans({ breaking: 2 ** -40, labels: [3], inside: "full", scale: 0 }), (plan) => {
        const exact = exactProblem({ ...plan, n: Math.max(6, plan.n) });
        const { claims, study } = checkWhole(exact);
        expect(claims.broken).toEqual([]);
        if (study.sectors.sectors.length < 2) return;
        const { eta } = study.whole.nearby;
        for (const bound of eta) expect(bound).toBeGreaterThan(0);
        for (const bound of eta) expect(bound).toBeLessThan(2 ** -40 * 1000);
      }),
      { seed: 4, numRuns: 15 },
    );
  });

  it("bounds are of use: a good outcome's are within a thousand times n of what rounding leaves", () => {
    fc.assert(
      fc.property(
        plans({ breaking: 0, energies: [0, 1], uncertainty: "exact", inside: "full", perturbations: 1 }),
        (plan) => {
          const { outcome } = checkOutcome(exactProblem(plan));
          for (const { evidence, tilt } of outcome.levels) {
            expect(evidence.orthonormality).toBeLessThan(1e-12);
            expect(tilt).toBeLessThan(1e-11);
            for (const largest of evidence.largest) expect(largest).toBeLessThan(1e-11);
          }
          for (const { shifts, energyPlusMinus } of outcome.states) {
            expect(energyPlusMinus).toBeLessThan(1e-12);
            for (const { plusMinus } of shifts) expect(plusMinus).toBeLessThan(1e-9);
          }
        },
      ),
      { seed: 12, numRuns: 40 },
    );
  });
});

describe("elements too small to square", () => {
  it.each([2 ** -540, 2 ** -700, 2 ** -1000])("%d between two labels is in every bound", (tiny) => {
    const { claims, outcome } = checkTiny(tiny);
    expect(claims).toEqual([]);
    expect(outcome).toBe("good");
  });
});

function checkTiny(tiny: number): { claims: string[]; outcome: string } {
  const plan: ExactPlan = {
    seed: 3,
    n: 2,
    complex: false,
    energies: [1],
    labels: [],
    unitary: false,
    inside: "zero",
    perturbations: 1,
    breaking: 0,
    scale: 0,
    uncertainty: "exact",
  };
  const exact = exactProblem(plan);
  const v = Operator.from(
    [
      [1, tiny],
      [tiny, 1],
    ],
    { uncertainty: "exact" },
  );
  const A = Operator.diagonal([1, -1], { uncertainty: "exact" });
  const outcome = findGoodBasis({ h0: exact.h0, v, candidates: { A } }, { depth: "labels" });
  const broken: string[] = [];
  const [finding] = outcome.audit.candidates[0]?.withPerturbations ?? [];
  if (!((finding?.bound ?? 0) >= 2 * tiny)) broken.push(`commutator bound ${finding?.bound}`);
  if (!((finding?.frobeniusBound ?? 0) >= 2 * tiny)) broken.push(`Frobenius bound ${finding?.frobeniusBound}`);
  if (!((finding?.atLeast ?? 1) <= 2 * tiny)) broken.push(`lower bound ${finding?.atLeast}`);
  const [node] = outcome.levels[0]?.evidence.nodes ?? [];
  const [bound] = node?.couplings ?? [];
  for (const [name, value] of Object.entries({ ...bound })) {
    if (typeof value === "number" && !(value >= tiny)) broken.push(`${name} ${value}`);
  }
  if (!((outcome.levels[0]?.evidence.offDiagonal[0] ?? 0) >= tiny)) broken.push("off-diagonal");
  if (!((outcome.whole.nearby.eta[0] ?? 0) >= tiny)) broken.push("eta");
  for (const state of outcome.states) if (!((state.shifts[0]?.plusMinus ?? 0) >= tiny)) broken.push("shift");
  return { claims: broken, outcome: outcome.verdict };
}
