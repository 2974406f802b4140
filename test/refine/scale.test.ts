import { describe, expect, it } from "vitest";
import type { Problem } from "../../src/audit/problem.js";
import { type FindOptions, findGoodBasis } from "../../src/certify/find.js";
import { Operator } from "../../src/operator/operator.js";
import { type Naive, naiveProduct } from "../operator/naive.js";
import {
  hermitian,
  operatorOf,
  orthonormal,
  random,
  ringHopping,
  ringReflection,
  ringTranslation,
  withEigenvalues,
} from "./support.js";

/** Everything that must not depend on the unit of energy, energies in that unit. */
function essence(problem: Problem, options: FindOptions, power: number): unknown {
  const scaled = (matrix: Operator): Operator => matrix.scale(2 ** power);
  const outcome = findGoodBasis(
    { ...problem, h0: scaled(problem.h0 as Operator), v: scaled(problem.v as Operator) },
    options,
  );
  const inUnit = (energy: number | null): number | null => (energy === null ? null : energy / 2 ** power);
  return {
    verdict: outcome.verdict,
    levels: outcome.levels.map((level) => ({
      verdict: level.verdict,
      safe: level.safe,
      energy: inUnit(level.energy),
      gaps: [inUnit(level.gapBelow), inUnit(level.gapAbove)],
      questions: level.questions.map((question) => question.code),
      ratios: level.guard.sectors.map(({ first, second, inside }) => [first.ratio, second.ratio, inside?.ratio]),
      couplings: level.couplings.map(({ states, size }) => [states, inUnit(size)]),
    })),
    states: outcome.states.map((state) => ({
      labels: state.labels,
      safe: state.safe,
      energy: inUnit(state.energy),
      shifts: state.shifts.map(({ value }) => inUnit(value)),
      vector: state.vector,
    })),
  };
}

/** Four sectors of four levels each, all turned by one random rotation. */
function hidden(complex: boolean, seed: number): Problem {
  const next = random(seed);
  const n = 16;
  const frame = orthonormal(n, n, next, complex);
  const of = (value: (i: number) => number): Operator =>
    operatorOf(
      withEigenvalues(
        frame,
        frame.map((_, i) => ({ re: value(i), im: 0 })),
      ),
    ).hermitianPart();
  const block = (i: number): number => Math.floor(i / 4);
  const inside = hermitian(n, next, complex).map((row, i) =>
    row.map((x, j) => (block(i) === block(j) ? x : { re: 0, im: 0 })),
  );
  const turn: Naive = frame[0]?.map((_, j) => frame.map((row) => row[j] ?? { re: 0, im: 0 })) ?? [];
  const back: Naive = frame.map((row) => row.map((x) => ({ re: x.re, im: -x.im })));
  const v = operatorOf(naiveProduct(turn, naiveProduct(inside, back))).hermitianPart();
  return { h0: of((i) => i % 4), v, candidates: { A: of(block), B: of((i) => (block(i) < 2 ? 1 : -1)) } };
}

const cases: readonly [name: string, problem: Problem][] = [
  [
    "ring, translation and reflection",
    {
      h0: ringHopping(6),
      v: ringHopping(6, 2),
      candidates: { T: ringTranslation(6), R: ringReflection(6) },
    },
  ],
  ["hidden symmetry, real", hidden(false, 3)],
  ["hidden symmetry, complex", hidden(true, 4)],
  [
    "left to the second order",
    {
      h0: Operator.diagonal([0, 0, 1, 2]),
      v: Operator.from([
        [0, 0, 0.2, 0.1],
        [0, 0, 0.3, 0.4],
        [0.2, 0.3, 1, 0.5],
        [0.1, 0.4, 0.5, 0],
      ]),
    },
  ],
  [
    "a near-degeneracy",
    {
      h0: Operator.diagonal([0, 1e-9, 1]),
      v: Operator.from([
        [0, 0, 0.1],
        [0, 0, 0.1],
        [0.1, 0.1, 0],
      ]),
    },
  ],
];

const settings: readonly FindOptions[] = [{}, { lambda: 0.01 }, { depth: "labels" }];

describe("H0 and V in another unit of energy", () => {
  for (const [name, problem] of cases) {
    it(`${name}: the same verdicts, labels and vectors, bit for bit`, () => {
      for (const options of settings) {
        const ordinary = essence(problem, options, 0);
        for (const power of [-300, -200, -101, -37, -1, 1, 53, 150, 190]) {
          expect(essence(problem, options, power), `2^${power}`).toEqual(ordinary);
        }
      }
    });
  }
});
