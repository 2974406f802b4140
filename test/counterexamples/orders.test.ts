import { describe, expect, it } from "vitest";
import { auditCommutators, findGoodBasis, Operator } from "../../src/index.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { perturb } from "../../src/perturb/perturb.js";
import {
  bruteForce,
  coefficient,
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
  weight,
} from "../published/support.js";

const unsafe = expect.objectContaining({ code: "unsafe-order" });
const exact = { uncertainty: "exact" } as const;

describe("through which order the short formulas are safe", () => {
  const rotor = (most: number) => {
    const kets = Array.from({ length: 2 * most + 1 }, (_, k) => k);
    return {
      h0: Operator.diagonal(kets.map((k) => (most - k) ** 2)),
      v: symmetric(
        kets.length,
        kets.slice(1).map((k) => [k - 1, k, 0.5]),
      ),
      candidates: { R: ketPermutation([...kets].reverse()) },
    };
  };

  it("plane rotor, m = ±1: 5/12 and −1/12, where the formula on the kets gives 1/6 twice", () => {
    const { h0, v, candidates } = rotor(6);
    // ⟨m|W|m⟩ = Σ_k |V_km|²/(E_m − E_k) over the kets 0 and 2.
    expectNear(0.25 / (1 - 0) + 0.25 / (1 - 4), 1 / 6, 1e-15);
    const labelled = goodBasis({ h0, v, candidates }, { depth: "labels" });
    expectNear(second(labelled, pick(labelled, 1, { R: 1 })).value, 5 / 12, 1e-12);
    expectNear(second(labelled, pick(labelled, 1, { R: -1 })).value, -1 / 12, 1e-12);
    const bare = goodBasis({ h0, v });
    const found = levelAt(bare, 1);
    for (const state of found) expect(state.safe).toEqual({ energies: 3, states: 0 });
    expectValues(
      found.map((state) => second(bare, state).value),
      [
        [5 / 12, 1],
        [-1 / 12, 1],
      ],
      1e-12,
    );
    // V alone does not settle them: the short second order is refused.
    const first = goodBasis({ h0, v }, { depth: "first order" });
    const pair = levelAt(first, 1);
    for (const { safe, index } of pair) {
      expect(safe).toEqual({ energies: 1, states: "none" });
      expect(() => perturb(first, { order: 2, select: [index] })).toThrow(unsafe);
      expect(perturb(first, { order: 1, select: [index] }).states).toHaveLength(1);
    }
  });

  it("V parts the pair: W mixes it at first order already, so states are safe through 0 and energies through 2", () => {
    const h0 = Operator.diagonal([0, 0, 1]);
    const v = symmetric(3, [
      [0, 0, 1],
      [1, 1, -1],
      [0, 2, 0.5],
      [1, 2, 0.7],
    ]);
    const basis = goodBasis({ h0, v });
    const state = levelAt(basis, 0).find((s) => shift(s).value > 0);
    if (state === undefined) throw new Error("no state shifts up");
    expect(state.safe).toEqual({ energies: 2, states: 0 });
    const e2 = second(basis, state).value;
    expectNear(e2, -0.25, 1e-12);
    expect(() => perturb(basis, { order: 2, states: 1, select: [state.index] })).toThrow(unsafe);
    // c = W_νμ/(E1_μ − E1_ν) with W_νμ = 0.7 · 0.5/(0 − 1).
    const w = -0.35;
    const c = w / 2;
    const lambda = 1e-4;
    const solvedAt = solved(h0.plus(v.scale(lambda)));
    const true_ = solvedAt.states.reduce((a, b) => (weight(a, 0) > weight(b, 0) ? a : b));
    const ratio = coefficient(true_, 1).re / coefficient(true_, 0).re;
    expectNear(ratio / lambda, c, 1e-3);
    // Short third order: V R V R V − E1 V R² V = 0 − 0.25; the truth adds |W|²/(E1_μ − E1_ν).
    const third = (true_.energy - lambda - e2 * lambda ** 2) / lambda ** 3;
    expectNear(third, -0.25 + (w * w) / 2, 2e-3);
    expect(Math.abs(third - -0.25)).toBeGreaterThan(0.05);
  });

  describe("dark and bright states with a spectator", () => {
    // Kets 0, 1 couple to 2; ket 3 belongs to their level.
    const h0 = Operator.diagonal([0, 0, 2, 0]);
    const coupled = [
      [0, 2, 0.6],
      [1, 2, 0.8],
    ] as const;
    const spectator = Operator.diagonal([0, 0, 0, 1]);

    it("uncoupled: nothing tells it from the dark state, the bright one keeps its own safe orders", () => {
      const basis = goodBasis({ h0, v: symmetric(4, coupled) });
      const bright = levelAt(basis, 0).filter((state) => weight(state, 0) > 0.3 && weight(state, 1) > 0.6);
      expect(bright.map((state) => state.safe)).toEqual([{ energies: 3, states: 0 }]);
      const rest = levelAt(basis, 0).filter((state) => state !== bright[0]);
      expect(rest.map((state) => state.safe)).toEqual([
        { energies: 1, states: "none" },
        { energies: 1, states: "none" },
      ]);
      expectNear(second(basis, bright[0] ?? pick(basis, 2)).value, -0.5, 1e-12);
      expect(() => perturb(basis)).toThrow(unsafe);
      expect(basis.levels.find((level) => level.degeneracy === 3)?.safe).toEqual({ energies: 1, states: "none" });
    });

    it("shifted by V: V parts it from the pair, which W parts; the weaker link counts for each state", () => {
      const basis = goodBasis({ h0, v: symmetric(4, [...coupled, [3, 3, 1]]) });
      for (const state of levelAt(basis, 0)) expect(state.safe).toEqual({ energies: 2, states: 0 });
      expectValues(
        levelAt(basis, 0).map((state) => second(basis, state).value),
        [
          [-0.5, 1],
          [0, 2],
        ],
        1e-12,
      );
    });

    it("labelled: it is safe at all orders, the pair through the third", () => {
      const basis = goodBasis({ h0, v: symmetric(4, coupled), candidates: { spectator } });
      expect(pick(basis, 0, { spectator: 1 }).safe).toEqual({ energies: "all", states: "all" });
      for (const state of levelAt(basis, 0)) {
        if (state.labels.spectator.text === "0") expect(state.safe).toEqual({ energies: 3, states: 0 });
      }
    });
  });
});

describe("evidence by kind of separator", () => {
  it("V itself and the second-order operator give no selection rule, a label does", () => {
    const h0 = Operator.diagonal([0, 0, 2, 0]);
    const v = symmetric(4, [
      [0, 2, 0.6],
      [1, 2, 0.8],
      [3, 3, 1],
    ]);
    const bare = goodBasis({ h0, v });
    const kinds = bare.levels[0]?.evidence.nodes ?? [];
    expect(kinds.map((node) => node.kind).sort()).toEqual(["perturbation", "second order"]);
    for (const node of kinds) {
      for (const bound of node.couplings) {
        expect(bound.selectionRule).toBe(Number.POSITIVE_INFINITY);
        expect(bound.direct).toBeLessThan(1e-13);
        expect(bound.counted).toBe(bound.direct);
      }
    }
    const spectator = Operator.diagonal([0, 0, 0, 1], exact);
    const labelled = goodBasis({ h0, v, candidates: { spectator } }, { levels: { lowest: 1 } });
    const label = labelled.levels[0]?.evidence.nodes.find((node) => node.kind === "label");
    expect(label?.couplings[0]?.selectionRule).toBeLessThan(1e-13);
  });

  it("a pair is classed by its strongest separator: a label beats V", () => {
    const h0 = Operator.diagonal([0, 0, 1]);
    const v = symmetric(3, [
      [0, 0, 1],
      [1, 1, -1],
      [1, 2, 0.5],
    ]);
    const basis = goodBasis({ h0, v, candidates: { A: Operator.diagonal([1, 0, 0]) } });
    for (const state of levelAt(basis, 0)) expect(state.safe).toEqual({ energies: "all", states: "all" });
  });
});

describe("only the level under study must be resolved", () => {
  it("repeated labels elsewhere do no harm", () => {
    // The upper level holds a coupled pair with equal labels; the lower one is labelled.
    const h0 = Operator.diagonal([0, 0, 1, 1]);
    const v = symmetric(4, [
      [0, 2, 0.1],
      [1, 3, 0.2],
      [2, 3, 0],
    ]).plus(symmetric(4, [[0, 3, 0.3]]));
    const A = Operator.diagonal([1, 2, 1, 1]);
    const broken = { h0, v, candidates: { A } };
    expect(auditCommutators(broken).candidates[0]?.conserved).toBe(false);
    const separate = {
      h0,
      v: symmetric(4, [
        [0, 2, 0.1],
        [0, 3, 0.3],
        [2, 3, 0.5],
      ]),
      candidates: { A },
    };
    expect(findGoodBasis(separate, { depth: "labels" }).verdict).toBe("not good");
    const basis = goodBasis(separate, { depth: "labels", levels: { lowest: 1 } });
    expect(basis.states).toHaveLength(2);
    for (const state of basis.states) expect(state.safe).toEqual({ energies: "all", states: "all" });
    expectNear(second(basis, pick(basis, 0, { A: 1 })).value, -0.1, 1e-12);
    expectNear(second(basis, pick(basis, 0, { A: 2 })).value, 0, 1e-12);
    for (const node of basis.study.tree) expect(node.kind).not.toBe("perturbation");
  });
});

describe("several perturbations", () => {
  const h0 = Operator.diagonal([0, 0, 1]);
  const sx = symmetric(3, [[0, 1, 1]]);
  const sz = Operator.diagonal([1, -1, 0]);

  it("±√(λ1² + λ2²) has no mixed series: no basis is good for both", () => {
    const outcome = findGoodBasis({ h0, v: { one: sx, two: sz } });
    expect(outcome.verdict).toBe("not good");
    if (outcome.verdict === "not good") expect(outcome.couplings[0]?.size).toBeCloseTo(1, 12);
    for (const [l1, l2] of [
      [0.1, 0],
      [0.03, 0.04],
      [0, -0.2],
    ] as const) {
      const root = Math.hypot(l1, l2);
      expectValues(
        bruteForce(h0.plus(sx.scale(l1)).plus(sz.scale(l2))),
        [
          [root, 1],
          [-root, 1],
          [1, 1],
        ],
        1e-13,
      );
    }
  });

  it("along one ray it is good", () => {
    const basis = goodBasis({ h0, v: sx.scale(0.6).plus(sz.scale(0.8)) });
    expectValues(
      shifts(levelAt(basis, 0)),
      [
        [1, 1],
        [-1, 1],
      ],
      1e-13,
    );
  });

  it("a label conserved by both isolates: the mixed second order is the sum over both", () => {
    const A = Operator.diagonal([1, 0, 0]);
    const one = symmetric(3, [
      [0, 0, 1],
      [1, 2, 0.3],
    ]);
    const two = symmetric(3, [
      [1, 1, 1],
      [1, 2, 0.5],
    ]);
    const basis = goodBasis({ h0, v: { one, two }, candidates: { A } }, { depth: "labels" });
    const state = pick(basis, 0, { A: 0 });
    expect(state.safe).toEqual({ energies: "all", states: "all" });
    const matrix = perturb(basis, { order: 2, select: [state.index] }).states[0]?.second ?? [];
    const wanted = [
      [-0.09, -0.15],
      [-0.15, -0.25],
    ];
    wanted.forEach((row, p) => {
      row.forEach((value, q) => {
        expectNear(matrix[p]?.[q]?.value ?? Number.NaN, value, 1e-12);
      });
    });
    // Against diagonalising along a ray.
    const [l1, l2] = [1e-3, -2e-3];
    const energies = bruteForce(h0.plus(one.scale(l1)).plus(two.scale(l2)));
    const series = l2 + -0.09 * l1 * l1 + 2 * -0.15 * l1 * l2 + -0.25 * l2 * l2;
    expect(Math.min(...energies.map((energy) => Math.abs(energy - series)))).toBeLessThan(2e-9);
  });
});
