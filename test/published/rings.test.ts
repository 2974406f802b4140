import { describe, expect, it } from "vitest";
import { auditCommutators, type Operator } from "../../src/index.js";
import { type Bond, hopping } from "../../src/models/lattice.js";
import { ketPermutation } from "../../src/models/permutations.js";
import {
  bruteForce,
  expectAllOrders,
  expectEnclosed,
  expectNear,
  expectValues,
  goodBasis,
  levelAt,
  pick,
  second,
  shift,
  shifts,
  solved,
  symmetric,
} from "./support.js";

const ring = (n: number): Bond[] => Array.from({ length: n }, (_, i) => [i, (i + 1) % n] as const);
const cyclic = (n: number, image: (i: number) => number): Operator =>
  ketPermutation(Array.from({ length: n }, (_, i) => ((image(i) % n) + n) % n));

// Hückel, Z. Phys. 70, 204 (1931); Coulson and Streitwieser, Dictionary of π-Electron Calculations (1965); dE = c_r² dα:
// Coulson and Longuet-Higgins, Proc. R. Soc. A 191, 39 (1947). Common practice; the orbitals seen in a public copy.
describe("benzene with one substituted atom", () => {
  const h0 = hopping(6, ring(6), -1);
  const v = symmetric(6, [[0, 0, 1]]);
  const sigma = { operator: cyclic(6, (i) => -i), label: "parity" } as const;
  const C6 = cyclic(6, (i) => i + 1);
  const basis = goodBasis({ h0, v, candidates: { sigma } }, { depth: "labels" });

  it("has the levels −2, −1 (twice), 1 (twice), 2", () => {
    expectValues(
      bruteForce(h0),
      [
        [-2, 1],
        [-1, 2],
        [1, 2],
        [2, 1],
      ],
      1e-10,
    );
    expectAllOrders(basis.study);
  });

  it.each([
    { name: "a2u", energy: -2, sigma: 1, e1: 1 / 6 },
    { name: "e1g +", energy: -1, sigma: 1, e1: 1 / 3 },
    { name: "e1g −", energy: -1, sigma: -1, e1: 0 },
    { name: "e2u +", energy: 1, sigma: 1, e1: 1 / 3 },
    { name: "e2u −", energy: 1, sigma: -1, e1: 0 },
    { name: "b2g", energy: 2, sigma: 1, e1: 1 / 6 },
  ])("E1($name) = $e1", ({ energy, sigma: s, e1 }) => {
    const state = pick(basis, energy, { sigma: s });
    expect(state.labels.sigma.text).toBe(s > 0 ? "+1" : "−1");
    expectEnclosed(shift(state), e1, 1e-10);
  });

  it("second order: −35/432 for a2u, nothing for the odd partners", () => {
    expectEnclosed(second(basis, pick(basis, -2)), -35 / 432, 1e-12);
    expectEnclosed(second(basis, pick(basis, -1, { sigma: -1 })), 0, 1e-12);
    expectEnclosed(second(basis, pick(basis, 1, { sigma: -1 })), 0, 1e-12);
  });

  it("refuses C6: [C6, V] has norm √2", () => {
    const audit = auditCommutators({ h0, v, candidates: { C6, sigma } });
    const [finding] = audit.candidates;
    expect(finding).toMatchObject({ kind: "unitary", conserved: false, descriptive: true });
    expect(finding?.withPerturbations[0]?.verdict).toBe("broken");
    expectNear(finding?.withPerturbations[0]?.norm ?? 0, Math.SQRT2, 1e-12);
    expect(audit.sets).toEqual([["sigma"]]);
  });

  it("labels by C6 where V has its symmetry", () => {
    const next = hopping(
      6,
      Array.from({ length: 6 }, (_, i) => [i, (i + 2) % 6] as const),
    );
    const candidates = { C6: { operator: C6, label: { root: 6 } } } as const;
    const rotated = goodBasis({ h0, v: next, candidates }, { depth: "labels" });
    expectAllOrders(rotated.study);
    // Translation to the next atom has the eigenvalue exp(−2πik/6) on Σ exp(2πikj/6)|j⟩: both members of ±k.
    for (const [energy, k] of [
      [-2, 0],
      [-1, 1],
      [1, 2],
      [2, 3],
    ] as const) {
      for (const sign of k === 0 || k === 3 ? [1] : [1, -1]) {
        const angle = (2 * Math.PI * sign * k) / 6;
        const state = pick(rotated, energy, { C6: { re: Math.cos(angle), im: Math.sin(angle) } });
        expect(state.labels.C6.status).toBe("declared");
        expectEnclosed(shift(state), 2 * Math.cos((2 * Math.PI * 2 * k) / 6), 1e-10);
      }
    }
  });
});

// Coulson and Streitwieser (1965). Naphthalene 2.303, 1.618, 1.303, 1, 0.618 seen in a public copy; the others from memory.
describe("Hückel levels with reflection labels", () => {
  const golden = (1 + Math.sqrt(5)) / 2;

  it("butadiene: ±1.618, ±0.618", () => {
    const chain = hopping(4, [
      [0, 1],
      [1, 2],
      [2, 3],
    ]);
    const sigma = ketPermutation([3, 2, 1, 0]);
    const basis = solved(chain, { sigma });
    const energies = basis.states.map((state) => state.energy);
    expectValues(
      energies,
      [
        [golden, 1],
        [golden - 1, 1],
        [1 - golden, 1],
        [-golden, 1],
      ],
      1e-10,
    );
    // Even and odd alternate; the nodeless one is even.
    expect(basis.states.map((state) => state.labels.sigma.text)).toEqual(["−1", "+1", "−1", "+1"]);
  });

  it("cyclobutadiene: bond alternation splits the non-bonding pair by ±2", () => {
    const h0 = hopping(4, ring(4));
    const v = hopping(4, ring(4), [1, -1, 1, -1]);
    const candidates = { sigma: ketPermutation([1, 0, 3, 2]), C2: ketPermutation([2, 3, 0, 1]) };
    const basis = goodBasis({ h0, v, candidates }, { depth: "labels" });
    expectAllOrders(basis.study);
    expectValues(
      bruteForce(h0),
      [
        [2, 1],
        [0, 2],
        [-2, 1],
      ],
      1e-10,
    );
    expectValues(
      shifts(levelAt(basis, 0)),
      [
        [2, 1],
        [-2, 1],
      ],
      1e-10,
    );
  });

  it("naphthalene: ten levels, the top one (1 + √13)/2", () => {
    const h0 = hopping(10, [...ring(10), [0, 5]]);
    const candidates = { sx: cyclic(10, (i) => -i), sy: cyclic(10, (i) => 5 - i) };
    const basis = solved(h0, candidates);
    const root = Math.sqrt(13);
    const upper = [(1 + root) / 2, golden, (root - 1) / 2, 1, golden - 1];
    const thousandths = [2303, 1618, 1303, 1000, 618];
    upper.forEach((value, k) => {
      expectNear(1000 * value, thousandths[k] ?? 0, 0.5);
    });
    const energies = basis.states.map((state) => state.energy);
    expectValues(
      energies,
      upper.flatMap(
        (value) =>
          [
            [value, 1],
            [-value, 1],
          ] as const,
      ),
      1e-10,
    );
    expectNear(Math.max(...energies), (1 + root) / 2, 1e-11);
    for (const state of basis.states) {
      expect(["+1", "−1"]).toContain(state.labels.sx.text);
      expect(["+1", "−1"]).toContain(state.labels.sy.text);
    }
    // The top orbital is even under everything.
    expect(pick(basis, (1 + root) / 2, { sx: 1, sy: 1 }).index).toBe(9);
  });
});
