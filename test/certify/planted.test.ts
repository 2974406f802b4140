import fc from "fast-check";
import { EigenvalueDecomposition, Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { couplingScale } from "../../src/audit/resolution.js";
import { type FindOptions, findGoodBasis, Operator, type Outcome } from "../../src/index.js";
import { perturb } from "../../src/perturb/perturb.js";
import { exactElement, exactMatrix, exactResidual, exactVector, type Modulus } from "./dyadic.js";
import { type Plan, type Planted, plant } from "./planted.js";

/** "Away from the resolution limit": by this factor. */
const AWAY = 30;

const plans: fc.Arbitrary<Plan> = fc.record({
  seed: fc.integer({ min: 1, max: 2 ** 31 - 1 }),
  blocks: fc.array(fc.integer({ min: 1, max: 4 }), { minLength: 2, maxLength: 4 }),
  levels: fc.integer({ min: 1, max: 3 }),
  hidden: fc.constantFrom("permutation", "unitary"),
  complex: fc.boolean(),
  label: fc.constantFrom("hermitian", "unitary"),
  scalar: fc.boolean(),
  breaking: fc.oneof(
    fc.constant(0),
    fc.double({ min: 1, max: 13, noNaN: true }).map((power) => 10 ** -power),
  ),
});

const depths = ["labels", "first order", "second order", "full"] as const;

function solve({ h0, v, label }: Planted, options: FindOptions): Outcome<"label"> {
  // about evidence: V may be as strong as it is
  return findGoodBasis({ h0, v, candidates: { label } }, { refuseAbove: 1e9, ...options });
}

interface Pair {
  readonly level: number;
  readonly states: readonly [number, number];
  readonly size: Modulus;
}

/** Every in-level element of V between the vectors handed over, exactly. */
function exactPairs({ n, v }: Planted, outcome: Outcome): Pair[] {
  const matrix = exactMatrix(v);
  const vectors = outcome.states.map((state) => exactVector(state, n));
  return outcome.levels.flatMap(({ index, firstState, degeneracy }) => {
    const pairs: Pair[] = [];
    for (let a = firstState; a < firstState + degeneracy; a++) {
      for (let b = a + 1; b < firstState + degeneracy; b++) {
        pairs.push({ level: index, states: [a, b], size: exactElement(vectors[a] ?? [], matrix, vectors[b] ?? []) });
      }
    }
    return pairs;
  });
}

/** Smallest difference of first-order shifts that V, and no label, makes inside a level. */
function smallestSplitting({ states, audit }: Outcome<"label">): number {
  let least = 1;
  for (const a of states) {
    for (const b of states.slice(a.index + 1)) {
      if (a.level !== b.level) continue;
      const apart = Math.hypot(a.labels.label.re - b.labels.label.re, a.labels.label.im - b.labels.label.im) > 1e-6;
      if (apart && audit.candidates[0]?.conserved === true) continue;
      const split = Math.abs((a.shifts[0]?.value ?? 0) - (b.shifts[0]?.value ?? 0));
      if (split > 1e-12) least = Math.min(least, split);
    }
  }
  return least;
}

/** Energies of H0 + λV, ascending, from the real symmetric matrix of twice the size. */
function diagonalised({ n, h0, v }: Planted, lambda: number): number[] {
  const matrix = Matrix.zeros(2 * n, 2 * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const a = h0.entry(i, j);
      const b = v.entry(i, j);
      const re = a.re + lambda * b.re;
      const im = a.im + lambda * b.im;
      matrix.set(i, j, re);
      matrix.set(n + i, n + j, re);
      matrix.set(i, n + j, -im);
      matrix.set(n + i, j, im);
    }
  }
  const values = new EigenvalueDecomposition(matrix, { assumeSymmetric: true }).realEigenvalues.sort((a, b) => a - b);
  return values.filter((_, k) => k % 2 === 0);
}

/** The kets of the first block. */
function firstBlock({ n, label }: Planted, kind: Plan["label"]): number[] {
  const kets = Array.from({ length: n }, (_, ket) => ket);
  return kets.filter((ket) => label.entry(ket, ket).re === (kind === "hermitian" ? 0 : 1));
}

describe("problems with planted symmetry and planted breaking", () => {
  it("no in-level element exceeds its stated bound, and none of a good outcome the resolution", () => {
    fc.assert(
      fc.property(plans, fc.constantFrom(...depths), (plan, depth) => {
        const problem = plant(plan);
        const outcome = solve(problem, { depth });
        const threshold = outcome.resolution * couplingScale(problem.v);
        for (const { level, size } of exactPairs(problem, outcome)) {
          const { evidence } = outcome.levels[level] ?? {};
          expect(size.atMost(evidence?.largest[0] ?? 0), `${size.value} within ${evidence?.largest[0]}`).toBe(true);
          if (outcome.verdict === "good") expect(size.atMost(threshold)).toBe(true);
        }
      }),
      { seed: 20240917, numRuns: 400 },
    );
  });

  it("every coupling of a not-good outcome lies within its bounds and above the resolution", () => {
    let seen = 0;
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant({ ...plan, scalar: false });
        const outcome = solve(problem, { depth: "labels" });
        if (outcome.verdict !== "not good") return;
        seen++;
        const threshold = outcome.resolution * couplingScale(problem.v);
        const pairs = exactPairs(problem, outcome);
        for (const { states, atLeast, atMost, size } of outcome.couplings) {
          const [a, b] = [...states].sort((x, y) => x - y);
          const exact = pairs.find((pair) => pair.states[0] === a && pair.states[1] === b)?.size;
          expect(exact?.atMost(atMost)).toBe(true);
          expect(exact?.atMost(atLeast * (1 - 1e-15))).toBe(false);
          expect(exact?.atMost(threshold)).toBe(false);
          expect(size).toBeGreaterThanOrEqual(atLeast);
          expect(size).toBeLessThanOrEqual(atMost);
        }
      }),
      { seed: 31, numRuns: 300 },
    );
    expect(seen).toBeGreaterThan(50);
  });

  it("energies lie within their stated residuals", () => {
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant(plan);
        const outcome = solve(problem, {});
        const matrix = exactMatrix(problem.h0);
        for (const state of outcome.states) {
          const residual = exactResidual(matrix, exactVector(state, problem.n), state.energy);
          expect(residual.atMost(state.energyPlusMinus)).toBe(true);
        }
      }),
      { seed: 47, numRuns: 150 },
    );
  });

  it("away from the resolution limit every problem is good at full depth", () => {
    let broken = 0;
    let kept = 0;
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant(plan);
        const outcome = solve(problem, {});
        // away from the limit by both measures: of all of V, and of V without its common part, which may be most of it
        const near = (scale: number): boolean => {
          const relative = problem.coupling / scale;
          return relative > outcome.resolution / AWAY && relative < outcome.resolution * AWAY;
        };
        if (near(couplingScale(problem.v)) || near(problem.v.norm)) return;
        // Where the second order alone may part states, its own size must be away from the limit too.
        const second = plan.scalar ? plan.breaking ** 2 : 0;
        if (second > 1e-16 && second < outcome.resolution * AWAY) return;
        if (outcome.audit.candidates[0]?.conserved) kept++;
        else broken++;
        const questions = outcome.levels.flatMap((level) => level.questions.map((question) => question.message));
        expect(outcome.verdict, questions.join("; ")).toBe("good");
      }),
      { seed: 7, numRuns: 600 },
    );
    expect(kept).toBeGreaterThan(100);
    expect(broken).toBeGreaterThan(100);
  });

  it("what is dropped between different labels is no more than the distance to the symmetric model", () => {
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant(plan);
        const outcome = solve(problem, {});
        if (outcome.audit.candidates[0]?.conserved !== true) return;
        const vectors = outcome.states.map((state) => exactVector(state, problem.n));
        const { eta0, eta } = outcome.whole.nearby;
        const dropped = (matrix: ReturnType<typeof exactMatrix>): number => {
          let sum = 0;
          for (const a of outcome.states) {
            for (const b of outcome.states) {
              const apart = Math.hypot(a.labels.label.re - b.labels.label.re, a.labels.label.im - b.labels.label.im);
              if (apart < 1e-6) continue;
              sum += exactElement(vectors[a.index] ?? [], matrix, vectors[b.index] ?? []).value ** 2;
            }
          }
          return Math.sqrt(sum);
        };
        // The vectors are orthonormal to 1e-13 only, which changes these numbers in the last digits.
        expect(dropped(exactMatrix(problem.v))).toBeLessThanOrEqual((eta[0] ?? 0) * (1 + 1e-9));
        expect(dropped(exactMatrix(problem.h0))).toBeLessThanOrEqual(eta0 * (1 + 1e-9));
      }),
      { seed: 23, numRuns: 150 },
    );
  });

  it("energies through the second order agree with diagonalising H0 + λV, where they are called safe", () => {
    let compared = 0;
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant(plan);
        const outcome = solve(problem, {});
        if (outcome.verdict !== "good" || smallestSplitting(outcome) < 1e-2) return;
        const safe = outcome.states.filter((state) => state.safe.energies === "all" || state.safe.energies >= 2);
        if (safe.length < outcome.states.length) return;
        compared++;
        const lambda = 1e-4;
        const { states } = perturb(outcome.basis);
        const series = states.map(
          ({ zeroth, first, second }) =>
            zeroth.value + lambda * (first?.[0]?.value ?? 0) + lambda ** 2 * (second?.[0]?.[0]?.value ?? 0),
        );
        const truth = diagonalised(problem, lambda);
        const wrong = series.sort((a, b) => a - b).map((energy, k) => Math.abs(energy - (truth[k] ?? 0)));
        // The third order is at most a few λ³, with a splitting by V of 1e-2 or more in a denominator.
        expect(Math.max(...wrong)).toBeLessThan(lambda ** 3 * (20 + 5 / smallestSplitting(outcome)));
      }),
      { seed: 29, numRuns: 400 },
    );
    expect(compared).toBeGreaterThan(100);
  });

  it("rounding does not part states: H0 and V alike on a pair, hidden by a rotation", () => {
    fc.assert(
      fc.property(plans, (plan) => {
        // Every block alone is a level; V is a number on each.
        const problem = plant({ ...plan, hidden: "unitary", scalar: true, breaking: 0, levels: 1 });
        const h0 = problem.label.plus(problem.label.adjoint());
        const outcome = findGoodBasis({ h0, v: h0.times(h0).hermitianPart() });
        const questions = outcome.levels.flatMap((level) => level.questions.map((question) => question.message));
        expect(outcome.verdict, questions.join("; ")).toBe("good");
        for (const { safe, level } of outcome.states) {
          if (outcome.levels[level]?.degeneracy === 1) expect(safe).toEqual({ energies: "all", states: "all" });
          else expect(safe.states).toBe("none");
        }
      }),
      { seed: 13, numRuns: 100 },
    );
  });

  it("a symmetry broken below the resolution limit is still a label, one broken above it is not", () => {
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant({ ...plan, scalar: false });
        const [finding] = solve(problem, {}).audit.candidates;
        const commutator = finding?.withPerturbations[0];
        const relative = (commutator?.norm ?? 0) / (couplingScale(problem.v) * couplingScale(problem.label));
        const limit = (commutator?.threshold ?? 0) / (couplingScale(problem.v) * couplingScale(problem.label));
        if (relative < limit / AWAY) expect(finding?.conserved).toBe(true);
        if (relative > limit * AWAY) expect(commutator?.verdict).toBe("broken");
      }),
      { seed: 11, numRuns: 300 },
    );
  });

  it("with labels only, a coupling well above the resolution inside equal labels is not good", () => {
    fc.assert(
      fc.property(plans, fc.double({ min: 1, max: 8, noNaN: true }), (plan, power) => {
        // Two kets of one block and one level, coupled by a planted element and alike otherwise.
        const base = plant({
          ...plan,
          scalar: true,
          breaking: 0,
          hidden: "permutation",
          levels: 1,
          blocks: [2, ...plan.blocks],
        });
        const [a = 0, b = 0] = firstBlock(base, plan.label);
        const size = 10 ** -power;
        const v = base.v.plus(
          Operator.fromTriplets(base.n, [
            [a, b, size],
            [b, a, size],
          ]),
        );
        const outcome = solve({ ...base, v }, { depth: "labels" });
        expect(size).toBeGreaterThan(AWAY * outcome.resolution * couplingScale(v));
        expect(outcome.verdict).toBe("not good");
        if (outcome.verdict !== "not good") return;
        expect(outcome.couplings[0]?.size).toBeCloseTo(size, 12);
        // V may finish: then it is good.
        const full = solve({ ...base, v }, {});
        const questions = full.levels.flatMap((level) => level.questions.map((question) => question.message));
        expect(full.verdict, questions.join("; ")).toBe("good");
      }),
      { seed: 3, numRuns: 100 },
    );
  });

  it("with labels only, the verdict on the vectors handed over follows their true elements", () => {
    fc.assert(
      fc.property(plans, (plan) => {
        const problem = plant({ ...plan, scalar: false, breaking: 0 });
        const outcome = solve(problem, { depth: "labels" });
        const largest = exactPairs(problem, outcome).reduce((most, { size }) => Math.max(most, size.value), 0);
        const threshold = outcome.resolution * couplingScale(problem.v);
        if (largest > AWAY * threshold) expect(outcome.verdict).toBe("not good");
        if (largest < threshold / AWAY) expect(outcome.verdict).not.toBe("not good");
      }),
      { seed: 5, numRuns: 200 },
    );
  });
});
