import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { findGoodBasis, Operator, type Problem } from "../../src/index.js";
import { generator } from "../numerics/eigen/matrices.js";
import { checkOutcome, problemOf } from "../support/check-bounds.js";
import { exactProblem } from "../support/exact-problem.js";
import { plans } from "../support/plans.js";

/** The operator as somebody measured it: every entry off by up to `relative`, and said to be known to that. */
function measured(operator: Operator, relative: number, random: () => number): Operator {
  const n = operator.n;
  const re = Array.from({ length: n }, () => new Array<number>(n).fill(0));
  const im = Array.from({ length: n }, () => new Array<number>(n).fill(0));
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const x = operator.entry(i, j);
      const factor = 1 + 1.9 * relative * random();
      (re[i] as number[])[j] = x.re * factor;
      (re[j] as number[])[i] = x.re * factor;
      (im[i] as number[])[j] = x.im * factor;
      (im[j] as number[])[i] = i === j ? x.im * factor : -x.im * factor;
    }
  }
  return Operator.from({ re, im }, { uncertainty: { relative } });
}

describe("entries known to some digits only", () => {
  it.each([1e-6, 1e-9, 1e-12])("known to %d: every bound covers the true matrices as well", (relative) => {
    let good = 0;
    let undecided = 0;
    fc.assert(
      fc.property(
        plans({ breaking: 0, energies: [0, 1, 3], inside: "full" }),
        fc.constantFrom(1e-10, 1e-3, 0.5),
        (plan, resolution) => {
          const exact = exactProblem(plan);
          const random = generator(plan.seed + 1);
          const told = (operator: Operator): Operator => measured(operator, relative, random);
          const [v0, v1] = exact.perturbations.map(told);
          const given: Problem = {
            ...problemOf(exact),
            h0: told(exact.h0),
            v: v0 !== undefined && v1 !== undefined ? { V0: v0, V1: v1 } : (v0 ?? exact.h0),
          };
          const { claims, outcome } = checkOutcome(exact, { resolution }, given);
          expect(claims.broken).toEqual([]);
          if (outcome.verdict === "good") good++;
          if (outcome.verdict === "undecided") undecided++;
          // a coarser resolution never unsettles what a finer one settled
          if (resolution !== 0.5 && outcome.verdict === "good") {
            expect(findGoodBasis(given, { resolution: 0.5 }).verdict).not.toBe("not good");
          }
        },
      ),
      { seed: 60 + Math.round(-Math.log10(relative)), numRuns: 45 },
    );
    expect(good).toBeGreaterThan(3);
    expect(undecided).toBeGreaterThan(relative > 1e-10 ? 3 : -1);
  });

  // H0 and V commute with A = diag(1, 0, 0) up to their noise, all three turned by a reflector.
  const hidden = (diagonal: readonly number[], uncertainty: number): Operator => {
    const u = [
      [0, 1, 0],
      [0.6, 0, 0.8],
      [-0.8, 0, 0.6],
    ];
    const at = (i: number, k: number): number => u[i]?.[k] ?? 0;
    const entries = [0, 1, 2].map((i) =>
      [0, 1, 2].map((j) => diagonal.reduce((sum, x, k) => sum + at(i, k) * x * at(j, k), 0)),
    );
    return Operator.from(entries, { uncertainty: { relative: uncertainty } });
  };

  it("a commutator known to 1e-6 decides nothing at the resolution 1e-10 and everything at 1e-3", () => {
    const problem = {
      h0: hidden([1, 1, 2], 1e-6),
      v: hidden([1, -1, 0.5], 1e-6),
      candidates: { A: hidden([1, 0, 0], 0) },
    };
    const fine = findGoodBasis(problem);
    expect(fine.verdict).toBe("undecided");
    expect(fine.audit.candidates[0]?.withPerturbations[0]?.verdict).toBe("undecided");
    expect(fine.audit.candidates[0]).toMatchObject({ conserved: false });
    const coarse = findGoodBasis(problem, { resolution: 1e-3 });
    expect(coarse.verdict).toBe("good");
    expect(coarse.audit.candidates[0]).toMatchObject({ conserved: true });
    expect(coarse.resolution).toBe(1e-3);
    for (const { shifts } of coarse.states) {
      expect(shifts[0]?.plusMinus).toBeGreaterThan(1e-7);
      expect(shifts[0]?.plusMinus).toBeLessThan(1e-3);
    }
    for (const level of coarse.levels) for (const largest of level.evidence.largest) expect(largest).toBeLessThan(2e-3);
  });
});

describe("labels are snapped only where one member fits", () => {
  const h0 = Operator.diagonal([1, 1, 2]);
  const v = Operator.diagonal([1, -1, 0]);
  const label = (
    diagonal: readonly number[],
    absolute: number,
    declared: "m" | "j" | "parity" | { rational: number } | { root: number },
  ) =>
    findGoodBasis({
      h0,
      v,
      candidates: { A: { operator: Operator.diagonal(diagonal, { uncertainty: { absolute } }), label: declared } },
    }).states.map((state) => `${state.labels.A.text} ${state.labels.A.status}`);

  it("m: an enclosure below a sixteenth is snapped, a wider one is not", () => {
    expect(label([0.5, -0.5, 0.5], 1e-3, "m")).toEqual(["1/2 declared", "−1/2 declared", "1/2 declared"]);
    for (const text of label([0.5, -0.5, 0.5], 0.1, "m")) expect(text).toMatch(/measured$/);
    for (const text of label([0.5, -0.5, 0.5], 0.3, "m")) expect(text).toMatch(/measured$/);
  });

  it("m: a number that is no member is never bent to one", () => {
    expect(label([0.52, -0.5, 0.5], 1e-3, "m")).toEqual(["0.52 measured", "−1/2 declared", "1/2 declared"]);
  });

  it("fractions: two members inside the enclosure leave the number", () => {
    expect(label([1 / 3, 1 / 4, 0], 1e-4, { rational: 12 })[0]).toBe("1/3 declared");
    expect(label([1 / 3, 1 / 4, 0], 1e-2, { rational: 12 })[0]).toMatch(/measured$/);
    // 1/11 and 1/12 are 0.0076 apart
    expect(label([0.087, 0.5, 0], 5e-3, { rational: 12 })[0]).toMatch(/measured$/);
  });

  it("j and parity: not outside the family", () => {
    expect(label([3.75, 0.75, 3.75], 1e-6, "j")).toEqual(["3/2 declared", "1/2 declared", "3/2 declared"]);
    expect(label([3.7, 0.75, 3.75], 1e-6, "j")[0]).toMatch(/measured$/);
    expect(label([1, -1, 0], 1e-6, "parity")).toEqual(["+1 declared", "−1 declared", "0 measured"]);
  });

  it("the number that stands there is within its radius of the exact one, whatever the text", () => {
    const outcome = findGoodBasis({
      h0,
      v,
      candidates: { A: Operator.diagonal([0.1, 0.2, 0.3], { uncertainty: { absolute: 1e-2 } }) },
    });
    outcome.states.forEach(({ labels }, k) => {
      const exact = [0.1, 0.2, 0.3].map((x) => Math.abs(labels.A.re - x));
      expect(Math.min(...exact), `state ${k}`).toBeLessThanOrEqual(labels.A.radius);
      expect(labels.A.radius).toBeGreaterThanOrEqual(1e-2);
    });
  });
});
