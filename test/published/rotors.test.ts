import { describe, expect, it } from "vitest";
import { Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { ketPermutation } from "../../src/models/permutations.js";
import {
  expectAllOrders,
  expectEnclosed,
  expectNear,
  goodBasis,
  levelAt,
  pick,
  second,
  shift,
  solved,
  symmetric,
} from "./support.js";

// King, Hainer and Cross, J. Chem. Phys. 11, 27 (1943), closed forms and species, seen in a public copy, energies from memory;
// Townes and Schawlow, Microwave Spectroscopy (1955). H2O constants in cm⁻¹ after Herzberg, values from memory.
describe("asymmetric rotor", () => {
  const A = 27.877;
  const B = 14.512;
  const C = 9.285;
  const parity = "parity" as const;

  /** Symmetric top, asymmetry, and the rotations by π about a and b, on |J K⟩ with K = J … −J, axes a = z, b = x. */
  function rotor(j: number) {
    const { n, z, plus, minus, squared } = angularMomentum(j);
    const h0 = squared.scale((B + C) / 2).plus(z.times(z).scale(A - (B + C) / 2));
    const v = plus
      .power(2)
      .plus(minus.power(2))
      .scale((B - C) / 4);
    const kets = Array.from({ length: n }, (_, k) => k);
    const sign = (k: number): number => (k % 2 === 0 ? 1 : -1);
    const Ra = {
      operator: ketPermutation(
        kets,
        kets.map((k) => sign(j - k)),
      ),
      label: parity,
    };
    // exp(−iπJ_x)|J K⟩ = exp(−iπJ)|J, −K⟩.
    const Rb = {
      operator: ketPermutation(
        kets.map((k) => n - 1 - k),
        kets.map(() => sign(j)),
      ),
      label: parity,
    };
    return { h0, v, candidates: { Ra, Rb } };
  }

  const species = { A: [1, 1], Ba: [1, -1], Bb: [-1, 1], Bc: [-1, -1] } as const;
  const root = Math.sqrt((B - C) ** 2 + (A - C) * (A - B));

  it.each([
    { j: 1, name: "1_01", kind: "Ba", exact: B + C, printed: 23.797 },
    { j: 1, name: "1_11", kind: "Bb", exact: A + C, printed: 37.162 },
    { j: 1, name: "1_10", kind: "Bc", exact: A + B, printed: 42.389 },
    { j: 2, name: "A + B + 4C", kind: "Bc", exact: A + B + 4 * C, printed: 79.529 },
    { j: 2, name: "A + 4B + C", kind: "Bb", exact: A + 4 * B + C, printed: 95.21 },
    { j: 2, name: "4A + B + C", kind: "Ba", exact: 4 * A + B + C, printed: 135.305 },
    { j: 2, name: "2_20", kind: "A", exact: 2 * (A + B + C) + 2 * root, printed: 136.562671999 },
    { j: 2, name: "2_02", kind: "A", exact: 2 * (A + B + C) - 2 * root, printed: 70.13332800102 },
  ] as const)("$name is $printed cm⁻¹, species $kind", ({ j, kind, exact, printed }) => {
    const { h0, v, candidates } = rotor(j);
    const [Ra, Rb] = species[kind];
    const state = pick(solved(h0.plus(v), candidates), exact, { Ra, Rb });
    expectNear(state.energy, exact, 1e-9);
    expectNear(state.energy, printed, 1e-9);
  });

  it("first order is exact for J = 1 and for the K = 1 pair of J = 2", () => {
    const one = rotor(1);
    const basis = goodBasis(one, { depth: "labels" });
    expectAllOrders(basis.study);
    const sum = (state: Parameters<typeof shift>[0]): number => state.energy + shift(state).value;
    const top = A + (B + C) / 2;
    expectNear(sum(pick(basis, B + C, { Ra: 1, Rb: -1 })), B + C, 1e-9);
    expectNear(sum(pick(basis, top, { Ra: -1, Rb: 1 })), A + C, 1e-9);
    expectNear(sum(pick(basis, top, { Ra: -1, Rb: -1 })), A + B, 1e-9);

    const two = goodBasis(rotor(2), { depth: "labels" });
    expectAllOrders(two.study);
    const pair = A + 2.5 * (B + C);
    expectNear(sum(pick(two, pair, { Ra: -1, Rb: -1 })), 79.529, 1e-9);
    expectNear(sum(pick(two, pair, { Ra: -1, Rb: 1 })), 95.21, 1e-9);
    for (const state of levelAt(two, pair)) expectEnclosed(second(two, state), 0, 1e-9);
  });
});

// Kronig, Proc. Natl. Acad. Sci. 12, 488 (1926); Townes and Schawlow (1955). The table of differences (Microwave Molecular
// Spectroscopy, Encyclopedia of Physical Science and Technology, 3rd ed., 2001) seen in a public copy.
describe("second-order Stark effect of a linear rotor", () => {
  const jMax = 8;
  const kets = Array.from({ length: jMax + 1 }, (_, j) =>
    Array.from({ length: 2 * j + 1 }, (_, k) => ({ j, m: j - k })),
  ).flat();
  const place = (j: number, m: number): number => j * j + j - m;
  const h0 = Operator.diagonal(kets.map(({ j }) => j * (j + 1)));
  const cosine = kets
    .filter(({ j, m }) => j > 0 && Math.abs(m) < j)
    .map(
      ({ j, m }) => [place(j - 1, m), place(j, m), Math.sqrt((j * j - m * m) / ((2 * j - 1) * (2 * j + 1)))] as const,
    );
  const v = symmetric(kets.length, cosine).scale(-1);
  const Jz = { operator: Operator.diagonal(kets.map(({ m }) => m)), label: "m" } as const;
  const basis = goodBasis({ h0, v, candidates: { Jz } }, { depth: "labels" });
  const e2 = (j: number, m: number): number => second(basis, pick(basis, j * (j + 1), { Jz: m })).value;

  it("has 81 states in levels of 2J + 1, told apart by M", () => {
    expect(basis.states).toHaveLength(81);
    expect(basis.levels.map((level) => level.degeneracy)).toEqual([1, 3, 5, 7, 9, 11, 13, 15, 17]);
    expectAllOrders(basis.study);
  });

  it("E2 follows Kronig's formula through J = 5", () => {
    expectEnclosed(second(basis, pick(basis, 0)), -1 / 6, 1e-12);
    for (let j = 1; j <= 5; j++) {
      for (let m = -j; m <= j; m++) {
        const closed = (j * (j + 1) - 3 * m * m) / (2 * j * (j + 1) * (2 * j - 1) * (2 * j + 3));
        const state = pick(basis, j * (j + 1), { Jz: m });
        expectEnclosed(second(basis, state), closed, 1e-12);
        expectEnclosed(shift(state), 0, 1e-12);
      }
    }
  });

  it.each([
    [0, 0, 0.5333],
    [1, 0, -0.1524],
    [1, 1, 0.1238],
    [2, 0, -0.0254],
    [2, 1, -0.0071],
    [2, 2, 0.0476],
    [3, 0, -0.0092],
    [3, 1, -0.0056],
    [3, 2, 0.0052],
    [4, 0, -0.0044],
    [4, 1, -0.0033],
    [4, 2, -0.0001],
    [4, 3, 0.0054],
  ])("table entry J = %d → J + 1, |M| = %d: %d", (j, m, printed) => {
    expectNear(2 * (e2(j + 1, m) - e2(j, m)), printed, 6e-5);
    expectNear(2 * (e2(j + 1, -m) - e2(j, -m)), printed, 6e-5);
  });
});
