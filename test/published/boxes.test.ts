import { describe, expect, it } from "vitest";
import { findGoodBasis, Operator } from "../../src/index.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { expectEnclosed, expectNear, goodBasis, levelAt, pick, shift } from "./support.js";

// Griffiths and Schroeter, Introduction to Quantum Mechanics: E1 = V0/4 and V0(1 ± κ)/4 with κ = (8/3π)² = 0.7205; the set-up
// seen in a public copy, κ from memory.
describe("cubic box with a quarter of it raised", () => {
  const kets = [1, 2, 3].flatMap((x) => [1, 2, 3].flatMap((y) => [1, 2, 3].map((z) => [x, y, z] as const)));
  const place = (x: number, y: number, z: number): number => 9 * (x - 1) + 3 * (y - 1) + z - 1;
  /** 2 ∫₀^{1/2} sin mπx sin nπx dx. */
  const half = (m: number, n: number): number => {
    const quarter = (k: number): number => [0, 1, 0, -1][((k % 4) + 4) % 4] ?? 0; // sin(kπ/2)
    if (m === n) return 0.5;
    return quarter(m - n) / ((m - n) * Math.PI) - quarter(m + n) / ((m + n) * Math.PI);
  };
  const v = Operator.from(
    kets.map(([x, y, z]) => kets.map(([a, b, c]) => (z === c ? half(x, a) * half(y, b) : 0))),
    { uncertainty: { relative: 1e-15 } },
  );
  const X = { operator: ketPermutation(kets.map(([x, y, z]) => place(y, x, z))), label: "parity" } as const;
  const Z = Operator.diagonal(kets.map(([, , z]) => z * z));
  const problem = { h0: Operator.diagonal(kets.map(([x, y, z]) => x * x + y * y + z * z)), v };
  const kappa = (8 / (3 * Math.PI)) ** 2;

  it("κ = 0.7205 and the level of three states", () => {
    expectNear(kappa, 0.72050619479, 1e-11);
    const basis = goodBasis({ ...problem, candidates: { X, Z } }, { levels: { nearest: 6 }, depth: "labels" });
    expect(basis.levels.map((level) => level.degeneracy)).toEqual([3]);
  });

  it.each([
    { x: 1, z: 4, e1: 1 / 4 },
    { x: 1, z: 1, e1: (1 + kappa) / 4 },
    { x: -1, z: 1, e1: (1 - kappa) / 4 },
  ])("(X, n_z²) = ($x, $z): E1 = $e1", ({ x, z, e1 }) => {
    const basis = goodBasis({ ...problem, candidates: { X, Z } }, { levels: { nearest: 6 }, depth: "labels" });
    const state = pick(basis, 6, { X: x, Z: z });
    expect(state.safe).toEqual({ energies: "all", states: "all" });
    expectEnclosed(shift(state), e1, 1e-10);
  });

  it("ground state: E1 = 1/4", () => {
    const basis = goodBasis(problem, { levels: { lowest: 1 } });
    expectEnclosed(shift(pick(basis, 3)), 1 / 4, 1e-12);
  });

  it("exchange alone leaves two equal labels with no coupling: no proof for all orders, good at first order", () => {
    const alone = { ...problem, candidates: { X } };
    const labelled = findGoodBasis(alone, { levels: { nearest: 6 }, depth: "labels" });
    expect(labelled.verdict).toBe("undecided");
    expect(labelled.levels[0]?.questions.map((question) => question.code)).toEqual(["labels-insufficient"]);
    expect(labelled.levels[0]?.couplings).toEqual([]);
    const basis = goodBasis(alone, { levels: { nearest: 6 } });
    for (const state of levelAt(basis, 6)) {
      expect(state.safe).toEqual(
        state.labels.X.re > 0 ? { energies: 2, states: 0 } : { energies: "all", states: "all" },
      );
    }
  });
});
