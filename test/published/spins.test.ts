import { describe, expect, it } from "vitest";
import { auditCommutators, Operator } from "../../src/index.js";
import { sitePermutation, translation } from "../../src/models/permutations.js";
import { spinChain } from "../../src/models/spin-chain.js";
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
  shifts,
} from "./support.js";

// Pople, Schneider and Bernstein, High-resolution Nuclear Magnetic Resonance (1959): (1/2)√(J² + δ²) of the AB pair, the formula
// seen in a public copy; the series follow from its expansion. Heisenberg dimer −3/4 J, 1/4 J.
describe("two spins 1/2", () => {
  const chain = spinChain(2);
  const dot = chain.szsz(0, 1).plus(chain.exchange(0, 1));
  const staggered = chain.sz(0).minus(chain.sz(1));
  const Sz = { operator: chain.totalSz, label: "m" } as const;

  it("exchange dimer in a staggered field: E2 = −1 and 1", () => {
    const basis = goodBasis({ h0: dot, v: staggered, candidates: { Sz }, kets: chain.kets() }, { depth: "labels" });
    expectAllOrders(basis.study);
    expectEnclosed(second(basis, pick(basis, -0.75)), -1, 1e-10);
    expectEnclosed(second(basis, pick(basis, 0.25, { Sz: 0 })), 1, 1e-10);
    for (const m of [1, -1]) expectEnclosed(second(basis, pick(basis, 0.25, { Sz: m })), 0, 1e-10);
    const root = Math.sqrt(1 + 4 * 0.3 ** 2) / 2;
    const energies = bruteForce(dot.plus(staggered.scale(0.3)));
    expectValues(
      energies,
      [
        [0.25, 2],
        [-0.25 + root, 1],
        [-0.25 - root, 1],
      ],
      1e-12,
    );
  });

  it("weakly coupled AB pair: E1 = −1/4, E2 = ±1/4", () => {
    const h0 = staggered.scale(0.5).plus(chain.totalSz.scale(3));
    const basis = goodBasis({ h0, v: dot });
    for (const sign of [1, -1]) {
      const state = pick(basis, sign / 2);
      expectEnclosed(shift(state), -0.25, 1e-10);
      expectEnclosed(second(basis, state), sign / 4, 1e-10);
    }
  });
});

// Kambe, J. Phys. Soc. Jpn. 5, 48 (1950); Griffiths and Schroeter, Introduction to Quantum Mechanics (triangle −3/4 J four-fold,
// square −2 J), the problem seen in a public copy.
describe("spin-1/2 triangle and square", () => {
  const chain = spinChain(3);
  const dot = (i: number, k: number): Operator => chain.szsz(i, k).plus(chain.exchange(i, k));
  const h0 = Operator.sum(dot(0, 1), dot(1, 2), dot(0, 2));
  const one = Operator.identity(chain.n);
  const S2 = { operator: one.scale(2.25).plus(h0.scale(2)), label: "j" } as const;
  const Sz = { operator: chain.totalSz, label: "m" } as const;
  const pair = { operator: one.scale(1.5).plus(dot(0, 1).scale(2)), label: "j" } as const;
  // S1·(S2 × S3) = Σ cyclic S1x S2y S3z − S1x S2z S3y.
  const triple = (x: number, y: number, z: number): Operator => chain.sx(x).times(chain.sy(y)).times(chain.sz(z));
  const chirality = Operator.sum(triple(0, 1, 2), triple(1, 2, 0), triple(2, 0, 1)).minus(
    Operator.sum(triple(0, 2, 1), triple(1, 0, 2), triple(2, 1, 0)),
  );
  const C3 = { operator: sitePermutation(2, [1, 2, 0]), label: { root: 3 } } as const;

  it("triangle: levels ∓3/4, four-fold each", () => {
    expectValues(
      bruteForce(h0),
      [
        [-0.75, 4],
        [0.75, 4],
      ],
      1e-12,
    );
  });

  it("one bond changed: E1 = −3/4 for S12 = 0, 1/4 for S12 = 1", () => {
    const basis = goodBasis({ h0, v: dot(0, 1), candidates: { S2, Sz, pair } }, { depth: "labels" });
    expectAllOrders(basis.study);
    expectValues(
      shifts(basis.states),
      [
        [-0.75, 2],
        [0.25, 6],
      ],
      1e-10,
    );
    for (const state of basis.states) {
      expectEnclosed(shift(state), state.labels.pair.text === "0" ? -0.75 : 0.25, 1e-10);
    }
  });

  it("chirality: E1 = ±√3/4, labelled by the cyclic permutation", () => {
    const basis = goodBasis({ h0, v: chirality, candidates: { S2, Sz, C3 } }, { depth: "labels" });
    expectAllOrders(basis.study);
    expectValues(
      shifts(basis.states),
      [
        [Math.sqrt(3) / 4, 2],
        [-Math.sqrt(3) / 4, 2],
        [0, 4],
      ],
      1e-10,
    );
    for (const state of basis.states) {
      const turned = Math.abs(state.labels.C3.im) > 0.5;
      expectNear(Math.abs(shift(state).value), turned ? Math.sqrt(3) / 4 : 0, 1e-10);
      expect(state.labels.S2.text).toBe(turned ? "1/2" : "3/2");
    }
  });

  it("refuses S12² under chirality", () => {
    const audit = auditCommutators({ h0, v: chirality, candidates: { pair, C3 } });
    expect(audit.candidates[0]).toMatchObject({ conserved: false, descriptive: true });
    expect(audit.candidates[0]?.withPerturbations[0]?.verdict).toBe("broken");
    expect(audit.candidates[1]?.conserved).toBe(true);
  });

  it("square: −2, −1 (three times), 0 (seven times), 1 (five times)", () => {
    const square = spinChain(4);
    const bond = (i: number): Operator => square.szsz(i, (i + 1) % 4).plus(square.exchange(i, (i + 1) % 4));
    const energies = bruteForce(Operator.sum(bond(0), bond(1), bond(2), bond(3)));
    expectValues(
      energies,
      [
        [-2, 1],
        [-1, 3],
        [0, 7],
        [1, 5],
      ],
      1e-12,
    );
  });
});

// Closed form of the 4-ring: −1/2 − √(1/4 + 2ε²) and −1; at the Heisenberg point −2.
describe("four-spin XXZ ring from the Ising limit", () => {
  const chain = spinChain(4);
  const names = chain.kets();
  const sector = names.flatMap((name, k) => (name.split("u").length === 3 ? [k] : []));
  const frame = {
    rows: sector.length,
    cols: chain.n,
    ptr: Int32Array.from({ length: sector.length + 1 }, (_, k) => k),
    col: Int32Array.from(sector),
    re: new Float64Array(sector.length).fill(1),
    im: undefined,
  };
  const around = (term: (i: number, k: number) => Operator): Operator =>
    Operator.sum(...[0, 1, 2, 3].map((i) => term(i, (i + 1) % 4))).restrict(frame);
  const h0 = around((i, k) => chain.szsz(i, k));
  const v = around((i, k) => chain.exchange(i, k));
  const T = { operator: translation(4, 2).restrict(frame), label: { root: 4 } } as const;
  const kets = sector.map((k) => names[k] ?? "");

  it("the Néel pair is told apart by translation, and splits by E2 = −2 and 0", () => {
    expect(kets).toHaveLength(6);
    const basis = goodBasis({ h0, v, candidates: { T }, kets }, { depth: "labels" });
    expectAllOrders(basis.study);
    const even = pick(basis, -1, { T: 1 });
    const odd = pick(basis, -1, { T: -1 });
    for (const state of [even, odd]) expectEnclosed(shift(state), 0, 1e-10);
    expectEnclosed(second(basis, even), -2, 1e-10);
    expectEnclosed(second(basis, odd), 0, 1e-10);
  });

  it("agrees with the closed form at ε = 1 and 0.6", () => {
    const lowest = (epsilon: number): number => Math.min(...bruteForce(h0.plus(v.scale(epsilon))));
    expectNear(lowest(1), -2, 1e-12);
    expectNear(lowest(0.6), -0.5 - Math.sqrt(0.25 + 2 * 0.36), 1e-12);
    expectNear(lowest(0.6), -1.48488578018, 1e-11);
  });

  it("without translation the second order parts the pair: energies safe through 3, states through 0", () => {
    const basis = goodBasis({ h0, v, kets }, { levels: { lowest: 1 } });
    expect(basis.states.map((state) => state.safe)).toEqual([
      { energies: 3, states: 0 },
      { energies: 3, states: 0 },
    ]);
    expectValues(
      basis.states.map((state) => second(basis, state).value),
      [
        [-2, 1],
        [0, 1],
      ],
      1e-10,
    );
  });
});
