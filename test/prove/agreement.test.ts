import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { type BasisState, findGoodBasis, Operator } from "../../src/index.js";
import type { ExactProblem } from "../../src/prove/problem.js";
import type { ExactProof, ProvedLeaf } from "../../src/prove/proof.js";
import { type ExactPlan, exactProblem } from "../support/exact-problem.js";
import { bonds, dot, problemOf, product, proved, type spin, squareOfSum } from "./operators.js";

/** The same matrix in doubles. */
function floating(operator: ExactOperator): Operator {
  const { csr, radius } = operator.toFloating();
  return Operator.fromCsr(csr, radius);
}

/** The states of the floating study of a problem. */
function study(problem: ExactProblem): readonly BasisState<string>[] {
  return findGoodBasis({
    h0: floating(problem.h0),
    v: Object.fromEntries(problem.perturbations.map(({ name, operator }) => [name, floating(operator)])),
    candidates: Object.fromEntries(problem.candidates.map(({ name, operator }) => [name, floating(operator)])),
  }).states;
}

/** |⟨exact|floating⟩|² for vectors of length one. */
function overlap(leaf: ProvedLeaf, { vector }: BasisState<string>): number {
  const unit = leaf.vectors[0]?.toFloating() ?? [];
  let [re, im] = [0, 0];
  for (const [k, ket] of vector.kets.entries()) {
    const a = unit[ket] ?? { re: 0, im: 0 };
    const [x, y] = [vector.re[k] ?? 0, vector.im?.[k] ?? 0];
    re += a.re * x + a.im * y;
    im += a.re * y - a.im * x;
  }
  return re * re + im * im;
}

const [a, b] = product(3, 2) as [ReturnType<typeof spin>, ReturnType<typeof spin>];
const n = 6;
const ring = bonds(
  n,
  Array.from({ length: n }, (_, k) => [k, (k + 1) % n] as const),
);
const turn = ExactOperator.permutation(Array.from({ length: n }, (_, k) => (k + 1) % n));

const PROBLEMS: Readonly<Record<string, ExactProblem>> = {
  coupling: problemOf(a.z.plus(b.z), dot(a, b), { J2: squareOfSum(a, b), Jz: a.z.plus(b.z) }),
  zeeman: problemOf(dot(a, b), a.z.plus(b.z.scale(2)), { Jz: a.z.plus(b.z) }),
  ring: problemOf(ring, ring.times(ring), { T: turn }),
  "second order": problemOf(
    ExactOperator.diagonal([0, 0, 2]),
    bonds(3, [
      [0, 2, "3/5"],
      [1, 2, "4/5"],
    ]),
  ),
};

describe("the floating study of the same problem", () => {
  it.each(Object.keys(PROBLEMS))("agrees to the last bits: %s", (name) => {
    const problem = PROBLEMS[name] as ExactProblem;
    const proof = proved(problem);
    const states = study(problem);
    expect(states).toHaveLength(proof.leaves.length);
    for (const leaf of proof.leaves) {
      const [state, ...more] = states.filter((other) => Math.abs(overlap(leaf, other) - 1) < 1e-12);
      expect(more).toEqual([]);
      const [shift] = leaf.shifts;
      if (state === undefined || leaf.energy.kind !== "value" || shift?.value.kind !== "value")
        throw new Error("no match");
      for (const { candidate, text } of leaf.labels) expect(state.labels[candidate]?.text).toBe(text);
      const energy = leaf.energy.value.toNumber();
      expect(Math.abs(state.energy - energy)).toBeLessThanOrEqual(state.energyPlusMinus);
      const found = state.shifts[0] ?? { value: Number.NaN, plusMinus: 0 };
      expect(Math.abs(found.value - shift.value.value.toNumber())).toBeLessThanOrEqual(found.plusMinus);
      expect(found.plusMinus).toBeLessThan(1e-12);
      expect(state.safe).toEqual({ energies: leaf.safe.energies, states: leaf.safe.states });
    }
  });
});

const PLANS: readonly ExactPlan[] = (["scalar", "zero", "close", "full"] as const).flatMap((inside, k) =>
  [0, 1, 2].map((seed) => ({
    seed: 10 * k + seed + 1,
    n: 8 + 2 * seed,
    complex: seed === 1,
    energies: [0, 1, 1.5],
    labels: [2, 3],
    unitary: seed === 2,
    inside,
    perturbations: seed === 2 && inside !== "scalar" ? 2 : 1,
    breaking: 0,
    scale: 0,
    uncertainty: "exact" as const,
  })),
);

describe("problems hidden behind an exact rotation", () => {
  it.each(PLANS)("are proved as they were made: $inside, seed $seed", (plan) => {
    const made = exactProblem(plan);
    const exact = (operator: Operator): ExactOperator => ExactOperator.fromFloating(operator.csr);
    const problem: ExactProblem = {
      h0: exact(made.h0),
      perturbations: made.perturbations.map((operator, k) => ({ name: `V${k}`, operator: exact(operator) })),
      candidates: made.labels.map((operator, k) => ({ name: `A${k}`, operator: exact(operator) })),
    };
    const proof: ExactProof = proved(problem);
    expect(proof.audit.candidates.every(({ conserved }) => conserved)).toBe(true);
    const wanted = [...new Set(made.energies)]
      .sort((x, y) => x - y)
      .map((energy) => [energy, made.energies.filter((other) => other === energy).length]);
    expect(
      proof.levels.map(({ energy, degeneracy }) => [
        energy.kind === "value" ? energy.value.toNumber() : undefined,
        degeneracy,
      ]),
    ).toEqual(wanted);
    // each sector of one energy holds as many states as it was made of
    const count = (list: readonly string[]): string[] =>
      [...new Set(list)].map((key) => `${key}: ${list.filter((other) => other === key).length}`).sort();
    const keys = made.sectors.map((sector, i) => `${made.energies[i]} ${sector}`);
    const digit = [1, 0, -1, 0];
    const found = proof.leaves.flatMap(({ energy, labels, vectors }) => {
      const values = labels.map(({ value }) => {
        if (value.kind !== "value") return "?";
        const { re, im } = value.value.toComplex();
        return plan.unitary ? [0, 1, 2, 3].find((k) => digit[k] === re && digit[(k + 3) % 4] === im) : re;
      });
      const key = `${energy.kind === "value" ? energy.value.toNumber() : "?"} ${values.join(",")}`;
      return vectors.map(() => key);
    });
    expect(count(found)).toEqual(count(keys));
    // where V is scalar by construction, its numbers are those of the inner matrix
    if (plan.inside === "zero") {
      for (const { shifts } of proof.leaves) expect(shifts.every(({ value }) => value.kind === "value")).toBe(true);
    }
  });
});
