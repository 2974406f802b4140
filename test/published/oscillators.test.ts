import { describe, expect, it } from "vitest";
import { findGoodBasis, GoodBasisError, Operator } from "../../src/index.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { perturb } from "../../src/perturb/perturb.js";
import {
  bruteForce,
  expectEnclosed,
  expectNear,
  expectValues,
  goodBasis,
  levelAt,
  pick,
  second,
  shift,
  shifts,
  symmetric,
} from "./support.js";

/** Two oscillators with n_x + n_y ≤ most, by total, n_x descending; xy with its exact matrix elements. */
function planeOscillator(most: number) {
  const kets = Array.from({ length: most + 1 }, (_, total) =>
    Array.from({ length: total + 1 }, (_, y) => [total - y, y] as const),
  ).flat();
  const place = new Map(kets.map(([x, y], k) => [`${x},${y}`, k]));
  const elements = kets.flatMap(([x, y], k) =>
    // ⟨n + 1|x|n⟩ = √((n + 1)/2); every pair once.
    [-1, 1].flatMap((step): [number, number, number][] => {
      const to = place.get(`${x + 1},${y + step}`);
      return to === undefined ? [] : [[k, to, 0.5 * Math.sqrt((x + 1) * Math.max(y, y + step))]];
    }),
  );
  const h0 = Operator.diagonal(kets.map(([x, y]) => x + y + 1));
  const v = symmetric(kets.length, elements);
  const exchange = {
    operator: ketPermutation(kets.map(([x, y]) => place.get(`${y},${x}`) ?? -1)),
    label: "parity",
  } as const;
  const parity = {
    operator: ketPermutation(
      kets.map((_, k) => k),
      kets.map(([x, y]) => ((x + y) % 2 === 0 ? 1 : -1)),
    ),
    label: "parity",
  } as const;
  return { h0, v, candidates: { exchange, parity } };
}

// Exact ω√(1 ± δ): Sakurai and Napolitano, Modern Quantum Mechanics; the problem seen in a public copy, of which a worked answer
// in circulation wrongly gives no first-order shift. E = (n_u + 1/2)√(1 + δ) + (n_v + 1/2)√(1 − δ).
describe("isotropic oscillator in the plane with V = xy", () => {
  const problem = planeOscillator(14);

  it("three kets: first-order shifts 0, 1/2, −1/2", () => {
    const basis = goodBasis(planeOscillator(1), { depth: "labels" });
    expectValues(
      shifts(basis.states),
      [
        [0, 1],
        [0.5, 1],
        [-0.5, 1],
      ],
      1e-12,
    );
  });

  it("first excited level: E1 = ±1/2, E2 = −1/4, by exchange alone", () => {
    const basis = goodBasis(problem, { levels: { nearest: 2 }, depth: "labels" });
    expect(basis.levels).toHaveLength(1);
    for (const sign of [1, -1]) {
      const state = pick(basis, 2, { exchange: sign, parity: -1 });
      expect(state.safe).toEqual({ energies: "all", states: "all" });
      expectEnclosed(shift(state), sign / 2, 1e-11);
      expectEnclosed(second(basis, state), -1 / 4, 1e-11);
    }
  });

  it("ground state: E1 = 0, E2 = −1/8", () => {
    const basis = goodBasis(problem, { levels: { lowest: 1 } });
    expectEnclosed(shift(pick(basis, 1)), 0, 1e-12);
    expectEnclosed(second(basis, pick(basis, 1)), -1 / 8, 1e-12);
  });

  it("agrees with the closed form at δ = 0.1", () => {
    const energies = bruteForce(problem.h0.plus(problem.v.scale(0.1))).sort((a, b) => a - b);
    const u = Math.sqrt(1.1);
    const w = Math.sqrt(0.9);
    const printed = [0.9987460731103, 1.947429371161, 2.04755492128];
    [(u + w) / 2, (u + 3 * w) / 2, (3 * u + w) / 2].forEach((exact, k) => {
      expectNear(energies[k] ?? Number.NaN, exact, 1e-9);
      expectNear(energies[k] ?? Number.NaN, printed[k] ?? Number.NaN, 1e-9);
    });
  });

  it("N = 2: labels leave two states together, V gives 1, 0, −1", () => {
    const labelled = findGoodBasis(problem, { levels: { nearest: 3 }, depth: "labels" });
    expect(labelled.verdict).toBe("not good");
    const basis = goodBasis(problem, { levels: { nearest: 3 } });
    expectValues(
      shifts(basis.states),
      [
        [1, 1],
        [0, 1],
        [-1, 1],
      ],
      1e-12,
    );
    const [odd, ...even] = [...levelAt(basis, 3)].sort((a, b) => a.labels.exchange.re - b.labels.exchange.re);
    expect(odd?.safe).toEqual({ energies: "all", states: "all" });
    for (const state of even) expect(state.safe).toEqual({ energies: 2, states: 0 });
    const unsafe = (): unknown => perturb(basis, { states: 1 });
    expect(unsafe).toThrow(GoodBasisError);
    expect(unsafe).toThrow(expect.objectContaining({ code: "unsafe-order" }));
  });
});
