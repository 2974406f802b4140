import { describe, expect, it } from "vitest";
import { GoodBasisError, Operator } from "../../src/index.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { perturb } from "../../src/perturb/perturb.js";
import { expectAllOrders, expectEnclosed, goodBasis, levelAt, pick, second, shift, symmetric } from "./support.js";

/** A particle on a ring, kets e^{imφ}/√2π with m = M … −M: H0 = m², and an element between m and m ± step. */
function rotor(most: number, step: number, element: number) {
  const n = 2 * most + 1;
  const kets = Array.from({ length: n }, (_, k) => k);
  const h0 = Operator.diagonal(kets.map((k) => (most - k) ** 2));
  const v = symmetric(
    n,
    kets.slice(step).map((k) => [k - step, k, element]),
  );
  const reflection = { operator: ketPermutation(kets.map((k) => n - 1 - k)), label: "parity" } as const;
  const parity = {
    operator: ketPermutation(
      kets,
      kets.map((k) => ((most - k) % 2 === 0 ? 1 : -1)),
    ),
    label: "parity",
  } as const;
  return { h0, v, reflection, parity };
}

// NIST Digital Library of Mathematical Functions, section 28.6(i), equations 28.6.1–28.6.13 (as Abramowitz and Stegun
// 20.2.25); seen in public copies.
describe("Mathieu characteristic values through q²", () => {
  const { h0, v, reflection, parity } = rotor(16, 2, 1);
  const basis = goodBasis({ h0, v, candidates: { reflection, parity } }, { depth: "labels" });

  it("are labelled by reflection and parity, at all orders", () => {
    expectAllOrders(basis.study);
    for (const state of basis.states) {
      const even = Math.round(Math.sqrt(state.energy)) % 2 === 0;
      expect(state.labels.parity.text).toBe(even ? "+1" : "−1");
    }
  });

  it.each([
    { name: "a0", energy: 0, reflection: 1, e1: 0, e2: -1 / 2 },
    { name: "a1", energy: 1, reflection: 1, e1: 1, e2: -1 / 8 },
    { name: "b1", energy: 1, reflection: -1, e1: -1, e2: -1 / 8 },
    { name: "a2", energy: 4, reflection: 1, e1: 0, e2: 5 / 12 },
    { name: "b2", energy: 4, reflection: -1, e1: 0, e2: -1 / 12 },
  ])("$name: $e1 q + $e2 q²", ({ energy, reflection: sign, e1, e2 }) => {
    const state = pick(basis, energy, { reflection: sign });
    expectEnclosed(shift(state), e1, 1e-11);
    expectEnclosed(second(basis, state), e2, 1e-11);
  });

  it("by V alone the pair m = ±1 splits at first order and m = ±2 at the second", () => {
    const bare = goodBasis({ h0, v, candidates: { parity } }, { levels: { lowest: 3 } });
    for (const state of levelAt(bare, 1)) expect(state.safe).toEqual({ energies: 2, states: 0 });
    for (const state of levelAt(bare, 4)) expect(state.safe).toEqual({ energies: 3, states: 0 });
    const found = levelAt(bare, 4).map((state) => second(bare, state).value);
    expect(Math.max(...found)).toBeCloseTo(5 / 12, 11);
    expect(Math.min(...found)).toBeCloseTo(-1 / 12, 11);
  });
});

// Follows from DLMF 28.6.1, 28.6.4, 28.6.5 and 28.6.14 with φ = 2z (E = a/4, q = 2λ); DLMF seen in a public copy.
describe("plane rotor in a uniform field through λ²", () => {
  const { h0, v, reflection } = rotor(12, 1, 1 / 2);
  const basis = goodBasis({ h0, v, candidates: { reflection } }, { depth: "labels" });

  it.each([
    { m: 0, sign: 1, e2: -1 / 2 },
    { m: 1, sign: 1, e2: 5 / 12 },
    { m: 1, sign: -1, e2: -1 / 12 },
    { m: 2, sign: 1, e2: 1 / 30 },
    { m: 2, sign: -1, e2: 1 / 30 },
    { m: 3, sign: 1, e2: 1 / 70 },
    { m: 3, sign: -1, e2: 1 / 70 },
    { m: 4, sign: 1, e2: 1 / 126 },
    { m: 4, sign: -1, e2: 1 / 126 },
  ])("m = $m, reflection $sign: E2 = $e2", ({ m, sign, e2 }) => {
    const state = pick(basis, m * m, { reflection: sign });
    expect(state.safe).toEqual({ energies: "all", states: "all" });
    expectEnclosed(shift(state), 0, 1e-11);
    expectEnclosed(second(basis, state), e2, 1e-11);
  });

  it("without the reflection the pair m = ±2 stays together and its second order is refused", () => {
    const bare = goodBasis({ h0, v }, { levels: { lowest: 3 } });
    const pair = levelAt(bare, 4);
    for (const state of pair) {
      expect(state.safe).toEqual({ energies: 1, states: "none" });
      const unsafe = (): unknown => perturb(bare, { order: 2, select: [state.index] });
      expect(unsafe).toThrow(GoodBasisError);
      expect(unsafe).toThrow(expect.objectContaining({ code: "unsafe-order" }));
    }
  });
});
