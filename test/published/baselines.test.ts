import { describe, expect, it } from "vitest";
import { Operator } from "../../src/index.js";
import { oscillator } from "../../src/models/oscillator.js";
import {
  bruteForce,
  expectAllOrders,
  expectEnclosed,
  expectNear,
  expectValues,
  goodBasis,
  pick,
  second,
  shift,
  symmetric,
} from "./support.js";

// Bender and Wu, Phys. Rev. 184, 1231 (1969): E = 1/2 + (3/4)λ − (21/8)λ² + …; from memory. E1 = (6n² + 6n + 3)/4 and
// E2 = −(34n³ + 51n² + 59n + 21)/8 of the excited states are from memory too.
describe("quartic anharmonic oscillator", () => {
  const { n, number, xPower, x } = oscillator(20);
  const h0 = number.plus(Operator.identity(n).scale(0.5));
  const v = xPower(4);
  const basis = goodBasis({ h0, v }, { levels: { lowest: 4 }, lambda: 1e-3 });

  it.each([
    { level: 0, e1: 3 / 4, e2: -21 / 8, tolerance1: 1e-9, tolerance2: 3e-9 },
    { level: 1, e1: 3.75, e2: -20.625, tolerance1: 1e-10, tolerance2: 1e-9 },
    { level: 2, e1: 9.75, e2: -76.875, tolerance1: 1e-10, tolerance2: 1e-9 },
    { level: 3, e1: 18.75, e2: -196.875, tolerance1: 1e-10, tolerance2: 1e-9 },
  ])("n = $level: E1 = $e1, E2 = $e2", ({ level, e1, e2, tolerance1, tolerance2 }) => {
    const state = pick(basis, level + 0.5);
    expectEnclosed(shift(state), e1, tolerance1);
    expectEnclosed(second(basis, state), e2, tolerance2);
    expectNear((6 * level ** 2 + 6 * level + 3) / 4, e1, 1e-12);
    expectNear(-(34 * level ** 3 + 51 * level ** 2 + 59 * level + 21) / 8, e2, 1e-12);
  });

  it("agrees with the curvature of the diagonalised matrix", () => {
    const lowest = (lambda: number): number => Math.min(...bruteForce(h0.plus(v.scale(lambda))));
    const step = 1e-3;
    expectNear((lowest(step) + lowest(-step) - 1) / (2 * step * step), -2.625, 2e-2);
  });

  it("the fourth power of the truncated x is wrong in its last rows only", () => {
    const power = x.power(4);
    for (let i = 0; i < n; i++) {
      const error = Math.abs(power.entry(i, i).re - v.entry(i, i).re);
      if (i < n - 2) expect(error).toBeLessThan(1e-10);
      else expect(error).toBeGreaterThan(1);
    }
  });
});

// Exact roots V0(1 − ε) and (V0/2)(3 ± √(1 + 4ε²)): Griffiths and Schroeter, Introduction to Quantum Mechanics; from memory.
describe("three levels, two of them degenerate", () => {
  const h0 = Operator.diagonal([1, 1, 2]);
  const v = symmetric(3, [
    [0, 0, -1],
    [1, 2, 1],
  ]);
  const basis = goodBasis({ h0, v, candidates: { A: Operator.diagonal([1, 0, 0]) } }, { depth: "labels" });

  it("E1 = −1, 0, 0 and E2 = 0, −1, 1", () => {
    expectAllOrders(basis.study);
    const [one, two, three] = [pick(basis, 1, { A: 1 }), pick(basis, 1, { A: 0 }), pick(basis, 2, { A: 0 })];
    expectEnclosed(shift(one), -1, 1e-12);
    expectEnclosed(second(basis, one), 0, 1e-12);
    expectEnclosed(shift(two), 0, 1e-12);
    expectEnclosed(second(basis, two), -1, 1e-12);
    expectEnclosed(shift(three), 0, 1e-12);
    expectEnclosed(second(basis, three), 1, 1e-12);
  });

  it("agrees with the exact roots at ε = 0.3", () => {
    const root = Math.sqrt(1 + 4 * 0.09);
    expectValues(
      bruteForce(h0.plus(v.scale(0.3))),
      [
        [0.7, 1],
        [(3 + root) / 2, 1],
        [(3 - root) / 2, 1],
      ],
      1e-12,
    );
  });

  it("needs no label to be good: V tells the pair apart at first order", () => {
    const bare = goodBasis({ h0, v });
    expect(bare.states.map((state) => state.safe)).toEqual([
      { energies: 2, states: 0 },
      { energies: 2, states: 0 },
      { energies: "all", states: "all" },
    ]);
    expect(bare.levels[0]?.evidence.nodes.map((node) => node.kind)).toEqual(["perturbation"]);
  });
});
