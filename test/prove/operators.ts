import { expect } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import type { SurdInput } from "../../src/exact/surd.js";
import type { ExactCandidate, ExactProblem } from "../../src/prove/problem.js";
import type { BlockValue, ExactProof, ProvedLeaf } from "../../src/prove/proof.js";
import { type ProofOptions, proveExactly } from "../../src/prove/prove.js";
import { verifyProof } from "../../src/prove/verify.js";
import { angularMomentum } from "../exact/matrices.js";

/** Jx, Jy, Jz, J+ and J² of one angular momentum 2j, by descending m. */
export function spin(twoJ: number): Record<"x" | "y" | "z" | "plus" | "square", ExactOperator> {
  const { z, plus, square } = angularMomentum(twoJ);
  const minus = plus.adjoint();
  return { x: plus.plus(minus).scale("1/2"), y: plus.minus(minus).scale("-i/2"), z, plus, square };
}

/** Operators of several angular momenta in their product space, the first one slowest. */
export function product(...twoJs: readonly number[]): ReturnType<typeof spin>[] {
  const ones = twoJs.map((twoJ) => ExactOperator.identity(twoJ + 1));
  return twoJs.map((twoJ, site) => {
    const own = spin(twoJ);
    const embed = (operator: ExactOperator): ExactOperator =>
      ones.map((one, k) => (k === site ? operator : one)).reduce((all, next) => all.kron(next));
    return {
      x: embed(own.x),
      y: embed(own.y),
      z: embed(own.z),
      plus: embed(own.plus),
      square: embed(own.square),
    };
  });
}

/** a·b of two angular momenta. */
export function dot(a: ReturnType<typeof spin>, b: ReturnType<typeof spin>): ExactOperator {
  const flip = a.plus.times(b.plus.adjoint());
  return flip.plus(flip.adjoint()).scale("1/2").plus(a.z.times(b.z));
}

/** The square of the sum of angular momenta. */
export function squareOfSum(...parts: readonly ReturnType<typeof spin>[]): ExactOperator {
  const z = ExactOperator.sum(...parts.map((part) => part.z));
  const plus = ExactOperator.sum(...parts.map((part) => part.plus));
  return plus.adjoint().times(plus).plus(z.times(z)).plus(z);
}

/** The symmetric matrix of bonds between kets. */
export function bonds(n: number, list: readonly (readonly [number, number, SurdInput?])[]): ExactOperator {
  return ExactOperator.fromTriplets(
    n,
    list.flatMap(([a, b, value = 1]) => [[a, b, value] as const, [b, a, value] as const]),
  );
}

/** A problem with one perturbation V and candidates by name. */
export function problemOf(
  h0: ExactOperator,
  v: ExactOperator,
  candidates: Readonly<Record<string, ExactOperator | Omit<ExactCandidate, "name">>> = {},
): ExactProblem {
  return {
    h0,
    perturbations: [{ name: "V", operator: v }],
    candidates: Object.entries(candidates).map(([name, given]) =>
      given instanceof ExactOperator ? { name, operator: given } : { name, ...given },
    ),
  };
}

/** The proof of a problem, which must pass when it is checked again. */
export function proved(problem: ExactProblem, options: ProofOptions = {}): ExactProof {
  const proof = proveExactly(problem, options);
  expect(verifyProof(proof, problem).faults).toEqual([]);
  return proof;
}

/** Components of a leaf's only vector, normalised, as text by ket; kets without one are left out. */
export function components(leaf: ProvedLeaf): Record<number, string> {
  const [vector, ...more] = leaf.vectors;
  const unit = vector?.normalised();
  if (unit === undefined || more.length > 0) throw new Error("not one vector with a rational norm");
  return Object.fromEntries(unit.values.map((value, k) => [unit.index[k], value.text({ underRoot: true })]));
}

/** An exact eigenvalue as text; anything else in words. */
export function textOf(value: BlockValue | undefined): string {
  return value?.kind === "value" ? value.value.text() : (value?.kind ?? "none");
}

/** Leaves as "E0; label, label; E1; E2". */
export function lines(proof: ExactProof): string[] {
  return proof.leaves.map((leaf) => {
    const labels = leaf.labels.map(({ candidate, text }) => `${candidate} ${text}`).join(", ");
    const shifts = leaf.shifts.map(({ value }) => textOf(value)).join(", ");
    const second = leaf.second?.map((row) => row.map((x) => x.text()).join(" ")).join(" / ") ?? "-";
    return `${textOf(leaf.energy)}; ${labels}; ${shifts}; ${second}`;
  });
}

/** The one leaf with an energy and the texts of some labels. */
export function leafOf(proof: ExactProof, energy: string, labels: Readonly<Record<string, string>> = {}): ProvedLeaf {
  const found = proof.leaves.filter(
    (leaf) =>
      textOf(leaf.energy) === energy &&
      Object.entries(labels).every(([name, text]) =>
        leaf.labels.some((label) => label.candidate === name && label.text === text),
      ),
  );
  const [leaf] = found;
  if (leaf !== undefined && found.length === 1) return leaf;
  throw new Error(
    `${found.length} leaves at ${energy} with ${JSON.stringify(labels)} among ${lines(proof).join(" | ")}`,
  );
}
