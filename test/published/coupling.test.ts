import { describe, expect, it } from "vitest";
import { Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { productSpace } from "../../src/models/product-space.js";
import { spinChain } from "../../src/models/spin-chain.js";
import {
  coefficient,
  expectAllOrders,
  expectEnclosed,
  expectNear,
  goodBasis,
  overlap,
  pick,
  shift,
} from "./support.js";

// Particle Data Group, Review of Particle Physics, table of Clebsch–Gordan coefficients; values from memory, confirmed
// against DLMF 34.2.4 with the phases of 34.1.1.
describe("Clebsch–Gordan coefficients", () => {
  const half = Math.SQRT1_2;
  const third = Math.sqrt(1 / 3);
  const thirds = Math.sqrt(2 / 3);
  const quarters = Math.sqrt(3 / 4);
  type Row = {
    J: number;
    M: number;
    e1: number;
    components: readonly (readonly [m1: number, m2: number, c: number])[];
  };
  const tables: { j1: number; rows: readonly Row[] }[] = [
    {
      j1: 0.5,
      rows: [
        {
          J: 1,
          M: 0,
          e1: 0.25,
          components: [
            [0.5, -0.5, half],
            [-0.5, 0.5, half],
          ],
        },
        {
          J: 0,
          M: 0,
          e1: -0.75,
          components: [
            [0.5, -0.5, half],
            [-0.5, 0.5, -half],
          ],
        },
      ],
    },
    {
      j1: 1,
      rows: [
        {
          J: 1.5,
          M: 0.5,
          e1: 0.5,
          components: [
            [1, -0.5, third],
            [0, 0.5, thirds],
          ],
        },
        {
          J: 0.5,
          M: 0.5,
          e1: -1,
          components: [
            [1, -0.5, thirds],
            [0, 0.5, -third],
          ],
        },
        {
          J: 1.5,
          M: -0.5,
          e1: 0.5,
          components: [
            [0, -0.5, thirds],
            [-1, 0.5, third],
          ],
        },
        {
          J: 0.5,
          M: -0.5,
          e1: -1,
          components: [
            [0, -0.5, third],
            [-1, 0.5, -thirds],
          ],
        },
      ],
    },
    {
      j1: 1.5,
      rows: [
        {
          J: 2,
          M: 1,
          e1: 0.75,
          components: [
            [1.5, -0.5, 0.5],
            [0.5, 0.5, quarters],
          ],
        },
        {
          J: 1,
          M: 1,
          e1: -1.25,
          components: [
            [1.5, -0.5, quarters],
            [0.5, 0.5, -0.5],
          ],
        },
        {
          J: 2,
          M: 0,
          e1: 0.75,
          components: [
            [0.5, -0.5, half],
            [-0.5, 0.5, half],
          ],
        },
        {
          J: 1,
          M: 0,
          e1: -1.25,
          components: [
            [0.5, -0.5, half],
            [-0.5, 0.5, -half],
          ],
        },
      ],
    },
  ];

  describe.each(tables)("$j1 × 1/2", ({ j1, rows }) => {
    const one = angularMomentum(j1);
    const spin = angularMomentum(0.5);
    const space = productSpace([one.n, 2]);
    const on = (a: Operator, b: Operator): Operator => space.embed(a, 0).times(space.embed(b, 1));
    const dot = on(one.z, spin.z).plus(on(one.plus, spin.minus).plus(on(one.minus, spin.plus)).scale(0.5));
    const sum = j1 * (j1 + 1) + 0.75;
    const J2 = { operator: Operator.identity(space.n).scale(sum).plus(dot.scale(2)), label: "j" } as const;
    const basis = goodBasis(
      { h0: space.embed(one.z, 0).plus(space.embed(spin.z, 1)), v: dot, candidates: { J2 } },
      { depth: "labels" },
    );

    it("labels J inside every level of M, at all orders", () => {
      expectAllOrders(basis.study);
      for (const state of basis.states) expect(state.labels.J2.status).toBe("declared");
    });

    it.each(rows)("|$J, $M⟩", ({ J, M, e1, components }) => {
      const state = pick(basis, M, { J2: J * (J + 1) });
      expect(state.labels.J2.text).toBe(Number.isInteger(J) ? `${J}` : `${2 * J}/2`);
      expectEnclosed(shift(state), e1, 1e-10);
      const ket = (m1: number, m2: number): number => (j1 - m1) * 2 + (0.5 - m2);
      const [first] = components;
      const sign = Math.sign(coefficient(state, ket(first?.[0] ?? 0, first?.[1] ?? 0)).re);
      for (const [m1, m2, c] of components) {
        const found = coefficient(state, ket(m1, m2));
        expectNear(sign * found.re, c, 1e-9);
        expect(found.im).toBe(0);
      }
      expect(state.vector.kets).toHaveLength(2);
    });
  });
});

// |⟨(12)J12, 3; J M|1, (23)J23; J M⟩| = √((2J12 + 1)(2J23 + 1)) |6j|: DLMF 34.4.2, seen in a public copy; the recoupling
// formula seen in a public copy of Varshalovich et al. (1988); Edmonds, Angular Momentum in Quantum Mechanics (1957).
describe("recoupling of three spins 1/2", () => {
  const chain = spinChain(3);
  const dot = (i: number, k: number): Operator => chain.szsz(i, k).plus(chain.exchange(i, k));
  const one = Operator.identity(chain.n);
  const squareOf = (i: number, k: number): Operator => one.scale(1.5).plus(dot(i, k).scale(2));
  const S2 = one.scale(2.25).plus(Operator.sum(dot(0, 1), dot(1, 2), dot(0, 2)).scale(2));
  const basisOf = (pair: Operator) =>
    goodBasis(
      {
        h0: chain.totalSz,
        v: pair.plus(S2.scale(0.37)),
        candidates: { S2: { operator: S2, label: "j" }, pair: { operator: pair, label: "j" } },
      },
      { depth: "labels" },
    );
  const a = basisOf(squareOf(0, 1));
  const b = basisOf(squareOf(1, 2));

  it.each([
    { j12: 0, j23: 0, exact: 1 / 2 },
    { j12: 0, j23: 1, exact: Math.sqrt(3) / 2 },
    { j12: 1, j23: 0, exact: Math.sqrt(3) / 2 },
    { j12: 1, j23: 1, exact: 1 / 2 },
  ])("overlap of J12 = $j12 and J23 = $j23 at J = M = 1/2", ({ j12, j23, exact }) => {
    const left = pick(a, 0.5, { S2: 0.75, pair: j12 * (j12 + 1) });
    const right = pick(b, 0.5, { S2: 0.75, pair: j23 * (j23 + 1) });
    const { re, im } = overlap(left, right, chain.n);
    expectNear(Math.hypot(re, im), exact, 1e-10);
  });

  it("both sets are complete inside every level", () => {
    expectAllOrders(a.study);
    expectAllOrders(b.study);
  });
});
