import { describe, expect, it } from "vitest";
import { findGoodBasis, GoodBasisError, Operator } from "../../src/index.js";
import { perturb } from "../../src/perturb/perturb.js";
import {
  bruteForce,
  expectAllOrders,
  expectEnclosed,
  expectValues,
  goodBasis,
  levelAt,
  pick,
  second,
  symmetric,
} from "./support.js";

// Closed form E = Δ/2 ∓ √(Δ²/4 + g1² + g2²) and 0: adiabatic elimination; common practice.
describe("dark and bright states", () => {
  const g1 = 3 / 5;
  const g2 = 4 / 5;
  const gap = 2;
  const h0 = Operator.diagonal([0, 0, gap]);
  const v = symmetric(3, [
    [0, 2, g1],
    [1, 2, g2],
  ]);
  const dark = symmetric(3, [
    [0, 0, g2 * g2],
    [0, 1, -g1 * g2],
    [1, 1, g1 * g1],
  ]);

  it("labelled by the dark projector: E2 = −1/2 for the bright one, 0 for the dark one", () => {
    const basis = goodBasis({ h0, v, candidates: { dark } }, { depth: "labels" });
    expectAllOrders(basis.study);
    expectEnclosed(second(basis, pick(basis, 0, { dark: 0 })), -(g1 * g1 + g2 * g2) / gap, 1e-12);
    expectEnclosed(second(basis, pick(basis, 0, { dark: 1 })), 0, 1e-12);
  });

  it("agrees with the closed form at λ = 0.5", () => {
    const root = Math.sqrt(1 + 0.25);
    expectValues(
      bruteForce(h0.plus(v.scale(0.5))),
      [
        [0, 1],
        [1 + root, 1],
        [1 - root, 1],
      ],
      1e-12,
    );
  });

  it("with no candidate: first order passes, all orders are refused", () => {
    const labelled = findGoodBasis({ h0, v }, { depth: "labels" });
    expect(labelled.verdict).toBe("undecided");
    if (labelled.verdict !== "undecided") return;
    expect(labelled.questions.map(({ code, level }) => ({ code, level }))).toEqual([
      { code: "labels-insufficient", level: 0 },
    ]);

    const first = goodBasis({ h0, v }, { depth: "first order" });
    for (const state of levelAt(first, 0)) {
      expect(state.safe).toEqual({ energies: 1, states: "none" });
      expect(perturb(first, { order: 1, select: [state.index] }).states[0]?.first?.[0]?.value).toBe(0);
      const unsafe = (): unknown => perturb(first, { order: 2, select: [state.index] });
      expect(unsafe).toThrow(GoodBasisError);
      expect(unsafe).toThrow(expect.objectContaining({ code: "unsafe-order" }));
    }
  });

  it("with no candidate, as far as it goes: the second order parts them, energies safe through 3", () => {
    const basis = goodBasis({ h0, v });
    const pair = levelAt(basis, 0);
    for (const state of pair) {
      expect(state.safe).toEqual({ energies: 3, states: 0 });
      const unsafe = (): unknown => perturb(basis, { states: 1, select: [state.index] });
      expect(unsafe).toThrow(expect.objectContaining({ code: "unsafe-order" }));
    }
    expectValues(
      pair.map((state) => second(basis, state).value),
      [
        [-0.5, 1],
        [0, 1],
      ],
      1e-12,
    );
    expect(pick(basis, gap).safe).toEqual({ energies: "all", states: "all" });
  });
});
