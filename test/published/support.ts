import { expect } from "vitest";
import {
  type BasisState,
  type FindOptions,
  findGoodBasis,
  type GoodBasis,
  Operator,
  type Problem,
  type Study,
} from "../../src/index.js";
import type { Complex } from "../../src/numerics/complex.js";
import { perturb } from "../../src/perturb/perturb.js";

/** A value and how often it occurs. */
export type Multiple = readonly [value: number, times: number];

/** A number with its rigorous bound. */
export interface Enclosed {
  readonly value: number;
  readonly plusMinus: number;
}

/** A label to look for. */
export type Wanted = number | Complex;

/** The certified basis of a problem that must come out good. */
export function goodBasis<K extends string = never, P extends string = string>(
  problem: Problem<K, P>,
  options: FindOptions = {},
): GoodBasis<K> {
  const outcome = findGoodBasis(problem, options);
  if (outcome.verdict === "good") return outcome.basis;
  const reasons = outcome.levels.flatMap((level) => level.questions.map((question) => question.message));
  throw new Error(`expected a good basis, got ${outcome.verdict}: ${reasons.join("; ")}`);
}

/** The one state at an energy that carries all the labels given. */
export function pick<K extends string>(
  basis: { readonly states: readonly BasisState<K>[] },
  energy: number,
  labels: Partial<Record<K, Wanted>> = {},
): BasisState<K> {
  const found = basis.states.filter(
    (state) =>
      Math.abs(state.energy - energy) <= 1e-9 * (1 + Math.abs(energy)) &&
      Object.entries<Wanted | undefined>(labels).every(([name, value]) => carries(state, name, value)),
  );
  const [state] = found;
  if (state !== undefined && found.length === 1) return state;
  const list = basis.states.map(
    (other) =>
      `${other.energy}: ${Object.entries<BasisState["labels"][string]>(other.labels).map(([k, l]) => `${k} = ${l.text}`)}`,
  );
  throw new Error(`${found.length} states at ${energy} carry ${JSON.stringify(labels)}, of ${list.join("; ")}`);
}

function carries(state: BasisState, name: string, value: Wanted | undefined): boolean {
  const label = state.labels[name];
  if (label === undefined || value === undefined || label.status === "not sharp") return false;
  const { re, im } = typeof value === "number" ? { re: value, im: 0 } : value;
  return Math.hypot(label.re - re, label.im - im) <= label.radius + 1e-9;
}

/** All states of the level at an energy. */
export function levelAt<K extends string>(basis: GoodBasis<K>, energy: number): readonly BasisState<K>[] {
  const level = basis.levels.find((other) => Math.abs(other.energy - energy) <= 1e-9 * (1 + Math.abs(energy)));
  if (level === undefined) throw new Error(`no level at ${energy}, only ${basis.levels.map((other) => other.energy)}`);
  return basis.states.slice(level.firstState, level.firstState + level.degeneracy);
}

/** The first-order shift of a state by the only perturbation, or by the one named. */
export function shift(state: BasisState, perturbation?: string): Enclosed {
  const found = state.shifts.find((other) => perturbation === undefined || other.perturbation === perturbation);
  if (found === undefined) throw new Error(`no shift by ${perturbation}`);
  return found;
}

/** The second-order energy of a state under the only perturbation. */
export function second<K extends string>(basis: GoodBasis<K>, state: BasisState<K>): Enclosed {
  const found = perturb(basis, { order: 2, select: [state.index] }).states[0]?.second?.[0]?.[0];
  if (found === undefined) throw new Error(`no second order for state ${state.index}`);
  return found;
}

/** A bounded number is within the tolerance of the closed form, and its bound covers it and is good for seven digits. */
export function expectEnclosed(found: Enclosed, exact: number, tolerance: number): void {
  const distance = Math.abs(found.value - exact);
  expect(distance, `${found.value} against ${exact}`).toBeLessThanOrEqual(tolerance);
  expect(distance, `${found.value} ± ${found.plusMinus} covers ${exact}`).toBeLessThanOrEqual(
    found.plusMinus + 4 * Number.EPSILON * Math.abs(exact),
  );
  const useful = 1e-7 * Math.max(1, Math.abs(exact));
  expect(found.plusMinus, "the bound itself").toBeLessThanOrEqual(useful);
}

/** A number is within the tolerance of a value that is printed to some digits only. */
export function expectNear(found: number, expected: number, tolerance: number): void {
  expect(Math.abs(found - expected), `${found} against ${expected}`).toBeLessThanOrEqual(tolerance);
}

/** The numbers are these values, each so many times, in any order. */
export function expectValues(found: Iterable<number>, expected: readonly Multiple[], tolerance: number): void {
  const sorted = [...found].sort((a, b) => a - b);
  const wanted = expected.flatMap(([value, times]) => new Array<number>(times).fill(value)).sort((a, b) => a - b);
  expect(sorted.length, `${sorted}`).toBe(wanted.length);
  wanted.forEach((value, k) => {
    expectNear(sorted[k] ?? Number.NaN, value, tolerance);
  });
}

/** All first-order shifts of a basis. */
export function shifts(states: readonly BasisState[]): number[] {
  return states.map((state) => shift(state).value);
}

/** The energies of a matrix by diagonalising it outright: a problem without perturbation. */
export function bruteForce(matrix: Operator): number[] {
  return solved(matrix).states.map((state) => state.energy);
}

/** A matrix diagonalised outright, with candidates to name its states. */
export function solved<K extends string = never>(
  matrix: Operator,
  candidates?: Problem<K>["candidates"],
): GoodBasis<K> {
  const problem: Problem<K> = { h0: matrix, v: Operator.zero(matrix.n) };
  return goodBasis(candidates === undefined ? problem : { ...problem, candidates });
}

/** The coefficient of a state at a ket. */
export function coefficient({ vector }: BasisState, ket: number): Complex {
  const place = vector.kets.indexOf(ket);
  if (place < 0) return { re: 0, im: 0 };
  return { re: vector.re[place] ?? 0, im: vector.im?.[place] ?? 0 };
}

/** |⟨ket|state⟩|². */
export function weight(state: BasisState, ket: number): number {
  const { re, im } = coefficient(state, ket);
  return re * re + im * im;
}

/** ⟨a|b⟩ of states of two bases over the same n kets. */
export function overlap(a: BasisState, b: BasisState, n: number): Complex {
  let re = 0;
  let im = 0;
  for (let ket = 0; ket < n; ket++) {
    const x = coefficient(a, ket);
    const y = coefficient(b, ket);
    re += x.re * y.re + x.im * y.im;
    im += x.re * y.im - x.im * y.re;
  }
  return { re, im };
}

/** Every state of the study is safe at all orders. */
export function expectAllOrders(study: Pick<Study, "states">): void {
  for (const state of study.states) expect(state.safe, state.limitedBy).toEqual({ energies: "all", states: "all" });
}

/** The Hermitian matrix of the given elements on and above the diagonal; exact integers stay exact. */
export function symmetric(
  n: number,
  elements: readonly (readonly [row: number, col: number, value: number])[],
): Operator {
  return Operator.fromTriplets(
    n,
    elements.flatMap(([row, col, value]): [number, number, number][] =>
      row === col
        ? [[row, col, value]]
        : [
            [row, col, value],
            [col, row, value],
          ],
    ),
  );
}
