import { describe, expect, it } from "vitest";
import type { PreparedProblem } from "../../src/audit/problem.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { stackRows } from "../../src/numerics/stack.js";
import { Operator } from "../../src/operator/operator.js";
import { alignByLadders } from "../../src/refine/ladder.js";
import { fixPhases } from "../../src/refine/phase.js";
import { type BlockLabel, buildSectors } from "../../src/refine/sectors.js";
import { TreeBuilder } from "../../src/refine/tree.js";
import { distance, naiveOf } from "../operator/naive.js";
import { csr, naiveOfCsr, prepare, random, restricted } from "./support.js";

interface State {
  readonly labels: readonly BlockLabel[];
  readonly together: number;
}

const label = (candidate: number, re: number): BlockLabel => ({ candidate, value: { re, im: 0 } });
const state = (...labels: BlockLabel[]): State => ({ labels, together: 1 });

/** Vectors with random phases, each fixed by itself, as they reach the alignment. */
function scrambled(vectors: ReturnType<typeof csr>, seed: number): ReturnType<typeof csr> {
  const next = random(seed);
  const rows = naiveOfCsr(vectors).map((row) => {
    const angle = 4 * next();
    const [c, s] = [Math.cos(angle), Math.sin(angle)];
    return row.map((x) => ({ re: x.re * c - x.im * s, im: x.re * s + x.im * c }));
  });
  return csr(rows);
}

const single = (j: number): { problem: PreparedProblem; states: State[] } => {
  const { z, plus, n } = angularMomentum(j);
  return {
    problem: prepare({ h0: Operator.zero(n), v: z, candidates: { Jz: { operator: z, ladder: plus } } }),
    states: Array.from({ length: n }, (_, k) => state(label(0, j - k))),
  };
};

describe("alignByLadders", () => {
  it("makes ⟨m + 1|J₊|m⟩ real and positive along one multiplet, the topmost state kept", () => {
    for (const j of [0.5, 1, 1.5, 3]) {
      const { plus, n } = angularMomentum(j);
      const { problem, states } = single(j);
      for (let seed = 1; seed < 6; seed++) {
        const given = scrambled(Operator.identity(n).csr, seed);
        const aligned = alignByLadders(problem, states, given);
        const elements = restricted(naiveOf(plus), naiveOfCsr(aligned));
        for (let k = 1; k < n; k++) {
          expect(elements[k - 1]?.[k]?.re).toBeCloseTo(plus.entry(k - 1, k).re, 14);
          expect(elements[k - 1]?.[k]?.re).toBeGreaterThan(0);
          expect(Math.abs(elements[k - 1]?.[k]?.im ?? 1)).toBeLessThan(1e-15);
        }
        expect(distance(naiveOfCsr(aligned).slice(0, 1), naiveOfCsr(given).slice(0, 1))).toBeLessThan(1e-16);
      }
    }
  });

  it("the order of the states does not matter, and neither do states of other labels", () => {
    const { plus } = angularMomentum(1);
    const { problem } = single(1);
    const given = scrambled(
      csr([
        [0, 0, 1],
        [1, 0, 0],
        [0, 1, 0],
      ]),
      4,
    );
    const aligned = alignByLadders(problem, [state(label(0, -1)), state(label(0, 1)), state(label(0, 0))], given);
    const elements = restricted(naiveOf(plus), naiveOfCsr(aligned));
    expect(elements[2]?.[0]?.re).toBeCloseTo(Math.SQRT2, 14);
    expect(elements[1]?.[2]?.re).toBeCloseTo(Math.SQRT2, 14);
    expect(Math.abs(elements[1]?.[2]?.im ?? 1)).toBeLessThan(1e-15);
  });

  it("follows Condon and Shortley through the coupled multiplets of 1 ⊗ 1/2", () => {
    const [l, s] = [angularMomentum(1), angularMomentum(0.5)];
    const both = (a: Operator, b: Operator): Operator =>
      a.kron(Operator.identity(2)).plus(Operator.identity(3).kron(b));
    const [x, y, z, plus] = [both(l.x, s.x), both(l.y, s.y), both(l.z, s.z), both(l.plus, s.plus)];
    const squared = Operator.sum(x.times(x), y.times(y), z.times(z));
    const problem = prepare({
      h0: Operator.zero(6),
      v: z,
      candidates: { J2: squared, Jz: { operator: z, ladder: plus } },
    });
    const { sectors } = buildSectors(problem, [0, 1], [], new TreeBuilder());
    expect(sectors).toHaveLength(6);
    const states = sectors.map(({ labels }) => state(...labels));
    const vectors = stackRows(
      sectors.map(({ frame }) => frame),
      6,
    );
    for (let seed = 1; seed < 6; seed++) {
      const aligned = naiveOfCsr(alignByLadders(problem, states, fixPhases(scrambled(vectors, seed))));
      const elements = restricted(naiveOf(plus), aligned);
      const at = (k: number, place: number): number =>
        states[k]?.labels.find(({ candidate }) => candidate === place)?.value.re ?? Number.NaN;
      let links = 0;
      states.forEach((_, upper) => {
        states.forEach((__, lower) => {
          if (Math.abs(at(upper, 0) - at(lower, 0)) > 1e-9 || Math.abs(at(upper, 1) - at(lower, 1) - 1) > 1e-9) return;
          const [jj, m] = [at(lower, 0), at(lower, 1)];
          expect(elements[upper]?.[lower]?.re).toBeCloseTo(Math.sqrt(jj - m * (m + 1)), 13);
          expect(Math.abs(elements[upper]?.[lower]?.im ?? 1)).toBeLessThan(1e-14);
          links++;
        });
      });
      expect(links).toBe(4);
      // with their topmost states real, whole multiplets are real
      expect(Math.max(...aligned.flat().map((c) => Math.abs(c.im)))).toBeLessThan(1e-15);
    }
  });

  it("aligns by two ladders at once where two labels have one each", () => {
    const { plus, z, n } = angularMomentum(0.5);
    const one = Operator.identity(2);
    const problem = prepare({
      h0: Operator.zero(n * n),
      v: Operator.zero(n * n),
      candidates: {
        a: { operator: z.kron(one), ladder: plus.kron(one) },
        b: { operator: one.kron(z), ladder: one.kron(plus) },
      },
    });
    const states = [0.5, -0.5].flatMap((a) => [0.5, -0.5].map((b) => state(label(0, a), label(1, b))));
    const aligned = alignByLadders(problem, states, scrambled(Operator.identity(4).csr, 3));
    for (const ladder of [plus.kron(one), one.kron(plus)]) {
      const elements = restricted(naiveOf(ladder), naiveOfCsr(aligned)).flat();
      expect(elements.filter((e) => Math.abs(e.re - 1) < 1e-15 && Math.abs(e.im) < 1e-15)).toHaveLength(2);
      expect(elements.filter((e) => Math.hypot(e.re, e.im) > 1e-15)).toHaveLength(2);
    }
  });

  it("leaves alone what a ladder does not fix", () => {
    const { z, plus, n } = angularMomentum(1);
    const { problem, states } = single(1);
    const given = scrambled(Operator.identity(n).csr, 8);
    const same = (found: ReturnType<typeof csr>): void => {
      expect(naiveOfCsr(found)).toEqual(naiveOfCsr(given));
    };
    // no ladder at all; a ladder too weak to tell; states that are not alone in their leaf; a single state
    same(alignByLadders(prepare({ h0: z, v: z, candidates: { Jz: z } }), states, given));
    const lost = prepare({ h0: z, v: z, candidates: { Jz: { operator: z, ladder: Operator.diagonal([1, 1, 1]) } } });
    same(alignByLadders(lost, states, given));
    same(
      alignByLadders(
        problem,
        states.map((s) => ({ ...s, together: 2 })),
        given,
      ),
    );
    same(
      alignByLadders(
        problem,
        states.map(() => state()),
        given,
      ),
    );
    const faint = plus.scale(1e-8).plus(Operator.fromTriplets(3, [[0, 0, 5]]));
    same(alignByLadders(prepare({ h0: z, v: z, candidates: { Jz: { operator: z, ladder: faint } } }), states, given));
  });

  it("a state that the ladder maps to two others keeps its phase", () => {
    // both states of m = 1 are reached from the state of m = 0
    const ladder = Operator.fromTriplets(3, [
      [0, 2, 1],
      [1, 2, 0, 1],
    ]);
    const problem = prepare({
      h0: Operator.zero(3),
      v: Operator.zero(3),
      candidates: { m: { operator: Operator.diagonal([1, 1, 0]), ladder } },
    });
    const given = scrambled(Operator.identity(3).csr, 5);
    const found = alignByLadders(problem, [state(label(0, 1)), state(label(0, 1)), state(label(0, 0))], given);
    expect(naiveOfCsr(found)).toEqual(naiveOfCsr(given));
  });

  it("a complex ladder is taken with its phases", () => {
    const { z, plus } = angularMomentum(1);
    const problem = prepare({ h0: z, v: z, candidates: { Jz: { operator: z, ladder: plus.scale({ re: 0, im: 1 }) } } });
    const { states } = single(1);
    const aligned = alignByLadders(problem, states, scrambled(Operator.identity(3).csr, 6));
    const elements = restricted(naiveOf(plus.scale({ re: 0, im: 1 })), naiveOfCsr(aligned));
    expect(elements[0]?.[1]?.re).toBeCloseTo(Math.SQRT2, 14);
    expect(elements[1]?.[2]?.re).toBeCloseTo(Math.SQRT2, 14);
  });

  it("is stable under rounding-sized changes of the vectors", () => {
    const { problem, states } = single(1.5);
    const given = scrambled(Operator.identity(4).csr, 9);
    const next = random(3);
    const nudged = csr(
      naiveOfCsr(given).map((row) =>
        row.map((x) => (x.re === 0 && x.im === 0 ? x : { re: x.re + 3e-16 * next(), im: x.im + 3e-16 * next() })),
      ),
    );
    const [a, b] = [given, nudged].map((rows) => naiveOfCsr(alignByLadders(problem, states, fixPhases(rows))));
    expect(distance(a ?? [], b ?? [])).toBeLessThan(2e-15);
  });
});
