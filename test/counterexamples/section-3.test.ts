import { describe, expect, it } from "vitest";
import { auditCommutators, findGoodBasis, Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { ketPermutation, reflection, translation } from "../../src/models/permutations.js";
import { spinChain } from "../../src/models/spin-chain.js";
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

const exact = { uncertainty: "exact" } as const;
const unsafe = expect.objectContaining({ code: "unsafe-order" });

describe("what a bounded commutator is worth", () => {
  // The pair (0, 1) is told apart by σz, which V breaks by 1e-15: the true states are equal mixtures at every λ.
  const h0 = Operator.diagonal([0, 0, 1], exact);
  const sigma = Operator.diagonal([1, -1, 0], exact);

  it("energies lie within η0 + λη of the model's, and nothing sharper is claimed", () => {
    const v = Operator.from(
      [
        [0, 1e-15, 0],
        [1e-15, 0, 0],
        [0, 0, 1],
      ],
      exact,
    );
    const basis = goodBasis({ h0, v, candidates: { sigma } }, { depth: "labels" });
    const { eta0, eta } = basis.study.whole.nearby;
    expect(eta[0]).toBeGreaterThanOrEqual(1e-15);
    expect(eta[0]).toBeLessThan(1e-12);
    for (const [k, state] of levelAt(basis, 0).entries()) {
      // The model's state is a ket; the given matrices' own shifts are ±1e-15.
      expectNear(weight(state, k), 1, 1e-15);
      const { value, plusMinus } = shift(state);
      for (const truth of [1e-15, -1e-15]) {
        expect(Math.abs(value - truth)).toBeLessThanOrEqual(plusMinus);
        expect(Math.abs(value - truth)).toBeLessThanOrEqual(eta0 + (eta[0] ?? 0));
      }
    }
    const bounds = basis.levels[0]?.evidence;
    expect(bounds?.offDiagonal[0]).toBeGreaterThanOrEqual(1e-15);
    expect(bounds?.largest[0]).toBeGreaterThanOrEqual(1e-15);
  });

  it("where 1e-15 is all of V, σz is broken and the mixtures are found", () => {
    const v = Operator.from(
      [
        [0, 1e-15, 0],
        [1e-15, 0, 0],
        [0, 0, 0],
      ],
      exact,
    );
    const [finding] = auditCommutators({ h0, v, candidates: { sigma } }).candidates;
    expect(finding?.withPerturbations[0]?.verdict).toBe("broken");
    // Whether the level is narrow enough for such a V may stay open; that the kets are its states may not be said.
    const outcome = findGoodBasis({ h0, v, candidates: { sigma } });
    expect(outcome.verdict).not.toBe("not good");
    const pair = outcome.states.slice(0, 2);
    expectValues(
      shifts(pair),
      [
        [1e-15, 1],
        [-1e-15, 1],
      ],
      1e-28,
    );
    for (const state of pair) {
      expectNear(weight(state, 0), 0.5, 1e-12);
      expect(state.safe).toEqual({ energies: 2, states: 0 });
      expect(state.labels.sigma).toMatchObject({ role: "descriptive", status: "not sharp" });
    }
  });
});

describe("levels 1e-10 apart that V couples by 1e-12", () => {
  const v = Operator.from(
    [
      [0, 1e-12, 0],
      [1e-12, 0, 0],
      [0, 0, 0],
    ],
    exact,
  );
  const diagonal = Operator.diagonal([0, 1e-10, 1], exact);
  // The states mix by 1 %: weights 0.9999 and 0.0001.
  const truth = 0.5 + 0.5 / Math.sqrt(1 + 0.04 ** 2);

  function neverEqualMixtures(h0: Operator, options: Parameters<typeof findGoodBasis>[1]): string {
    const outcome = findGoodBasis({ h0, v }, options);
    if (outcome.verdict === "good") {
      for (const state of outcome.states)
        expect(Math.max(weight(state, 0), weight(state, 1), weight(state, 2))).toBeGreaterThan(0.99);
    }
    return outcome.verdict;
  }

  it("the truth is nearly the kets", () => {
    expect(truth).toBeGreaterThan(0.999);
    const [lowest] = solved(diagonal.plus(v.scale(2))).states;
    expect(lowest === undefined ? 0 : weight(lowest, 0)).toBeGreaterThan(0.999);
  });

  it("as it comes: the kets", () => {
    expect(neverEqualMixtures(diagonal, {})).toBe("good");
  });

  it.each([
    { how: "merged", options: { levelWidth: 1e-9 } },
    { how: "merged with λ = 1", options: { levelWidth: 1e-9, lambda: 1 } },
    { how: "merged with λ = 10", options: { levelWidth: 1e-9, lambda: 10 } },
  ])("$how: undecided, since the width is not far below what V tells apart", ({ options }) => {
    expect(neverEqualMixtures(diagonal, options)).toBe("undecided");
    const codes = findGoodBasis({ h0: diagonal, v }, options).levels[0]?.questions.map((question) => question.code);
    expect(codes).toContain("ambiguous-level");
  });

  it("with energies known to 1e-10 only: undecided", () => {
    expect(neverEqualMixtures(Operator.diagonal([0, 1e-10, 1], { uncertainty: { absolute: 1e-10 } }), {})).toBe(
      "undecided",
    );
  });

  it("energies are clustered by their gaps, not by their digits", () => {
    // 0.5 lies between the two: rounding to any number of digits would part them.
    const h0 = Operator.diagonal([0.5 - 4e-14, 0.5 + 4e-14, 2], exact);
    const found = findGoodBasis({ h0, v: Operator.diagonal([1, -1, 0], exact) });
    expect(found.levels.map((level) => level.degeneracy)).toEqual([2, 1]);
    // The residual block of H0 inside the level counts in every ±.
    for (const state of found.states.slice(0, 2)) expect(shift(state).plusMinus).toBeGreaterThanOrEqual(4e-14);
  });
});

describe("the ± on a first-order shift", () => {
  // H0 = Q D Qᵀ and V = Q B Qᵀ with an integer Q of orthogonal columns, QᵀQ = 30: exact in binary for dyadic D, B.
  const q = [
    [1, -2, -3, -4],
    [2, 1, -4, 3],
    [3, 4, 1, -2],
    [4, -3, 2, 1],
  ];
  function rotated(b: readonly (readonly number[])[]): Operator {
    const at = (m: readonly (readonly number[])[], i: number, j: number): number => m[i]?.[j] ?? 0;
    const all = [0, 1, 2, 3];
    return Operator.from(
      all.map((i) =>
        all.map((j) =>
          all.reduce((sum, k) => all.reduce((s, l) => s + at(q, i, k) * at(b, k, l) * at(q, j, l), sum), 0),
        ),
      ),
      exact,
    );
  }
  const diagonal = (d: readonly number[]): number[][] => d.map((x, i) => d.map((_, j) => (i === j ? x : 0)));
  const v = rotated([
    [1, 0, 1, 1],
    [0, 2, -1, 1],
    [1, -1, 0, 1],
    [1, 1, 1, -1],
  ]);
  const relative = (neighbour: number): number => {
    // λ stays small against the distance to the neighbour, which V couples too.
    const basis = goodBasis({ h0: rotated(diagonal([0, 0, neighbour, 1])), v }, { lambda: neighbour / 4 });
    const level = levelAt(basis, 0);
    expect(level).toHaveLength(2);
    const exactShifts = [30, 60];
    for (const [k, state] of [...level].sort((a, b) => shift(a).value - shift(b).value).entries()) {
      const { value, plusMinus } = shift(state);
      expect(Math.abs(value - (exactShifts[k] ?? Number.NaN))).toBeLessThanOrEqual(plusMinus);
    }
    return Math.max(...level.map((state) => shift(state).plusMinus)) / v.norm;
  };

  it("pays for a neighbouring level 1e-6 away: about 1e-9, and 1e-13 without one", () => {
    const near = relative(2 ** -20); // 1e-6 of the norm of H0
    expect(near).toBeGreaterThan(1e-11);
    expect(near).toBeLessThan(1e-7);
    expect(relative(0.5)).toBeLessThan(1e-12);
  });

  it("covers the exact shifts of many such problems", () => {
    for (const power of [-8, -12, -16, -20, -24, -28, -30]) expect(relative(2 ** power)).toBeGreaterThan(0);
  });
});

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

describe("three verdicts", () => {
  const h0 = Operator.diagonal([0, 0, 1], exact);

  it("a huge bound is not good", () => {
    const v = Operator.from(
      [
        [1, 0, 0],
        [0, -1, 0],
        [0, 0, 0],
      ],
      { uncertainty: { absolute: 1 } },
    );
    const outcome = findGoodBasis({ h0, v });
    expect(outcome.verdict).toBe("undecided");
    expect(outcome.levels[0]?.questions.map((question) => question.code)).toContain("coupling-undecided");
  });

  it("a commutator is undecided where the entries do not say", () => {
    const v = Operator.from(
      [
        [1, 0, 0],
        [0, -1, 0],
        [0, 0, 0],
      ],
      exact,
    );
    const A = Operator.from(
      [
        [1, 1e-9, 0],
        [1e-9, -1, 0],
        [0, 0, 0],
      ],
      { uncertainty: { absolute: 2e-9 } },
    );
    const [finding] = auditCommutators({ h0, v, candidates: { A } }).candidates;
    expect(finding?.withPerturbations[0]?.verdict).toBe("undecided");
    expect(finding).toMatchObject({ conserved: false, descriptive: true });
    expect(finding?.reason).toContain("undecided");
  });

  it("operators carry radii through sums: a computed J² is not correctly rounded", () => {
    let largest = 0;
    for (let twice = 1; twice <= 12; twice++) {
      const { x, y, z, squared } = angularMomentum(twice / 2);
      const sum = Operator.sum(x.times(x), y.times(y), z.times(z));
      const off = sum.minus(squared).norm;
      expect(off).toBeLessThanOrEqual(sum.error);
      expect(sum.error).toBeLessThan(1e-12);
      largest = Math.max(largest, off);
    }
    expect(largest).toBeGreaterThan(0);
  });
});

describe("degeneracy", () => {
  it("conserved operators that do not commute are no protection: two copies of one irreducible space still split", () => {
    const { x, z } = angularMomentum(0.5);
    const two = Operator.identity(2);
    const v = two.kron(Operator.diagonal([1, -1]));
    const problem = { h0: Operator.zero(4), v, candidates: { Sx: x.kron(two), Sz: z.kron(two) } };
    const audit = auditCommutators(problem);
    expect(audit.candidates.map((finding) => finding.conserved)).toEqual([true, true]);
    expect(audit.remarks).toHaveLength(1);
    const basis = goodBasis(problem);
    expectValues(
      shifts(basis.states),
      [
        [1, 2],
        [-1, 2],
      ],
      1e-14,
    );
    for (const state of basis.states) expect(state.safe).toEqual({ energies: 2, states: 0 });
    expect(findGoodBasis(problem, { depth: "labels" }).verdict).not.toBe("good");
  });

  it("translation and reflection of a ring do not commute, but reflection refines k = 0 and π", () => {
    const ring = spinChain(4);
    const bonds = [0, 1, 2, 3].map((i) => [i, (i + 1) % 4] as const);
    const problem = {
      h0: Operator.sum(...bonds.map(([i, k]) => ring.szsz(i, k))),
      v: Operator.sum(...bonds.map(([i, k]) => ring.exchange(i, k))),
      candidates: {
        Sz: { operator: ring.totalSz, label: "m" },
        T: { operator: translation(4, 2), label: { root: 4 } },
        R: { operator: reflection(4, 2), label: "parity" },
      },
    } as const;
    const audit = auditCommutators(problem);
    expect(audit.candidates.map((finding) => finding.conserved)).toEqual([true, true, true]);
    expect(audit.sets).toEqual([
      ["Sz", "T"],
      ["Sz", "R"],
    ]);
    expect(audit.remarks).toHaveLength(1);
    const basis = goodBasis(problem);
    expect(basis.study.sets.find((set) => set.chosen)?.names).toEqual(["Sz", "T"]);
    for (const state of basis.states) {
      const turning = Math.abs(state.labels.T.im) > 0.5;
      if (turning) expect(state.labels.R.status).toBe("not sharp");
      else expect(state.labels.R).toMatchObject({ status: "declared", role: "conserved" });
    }
    expect(basis.states.some((state) => state.labels.R.text === "−1" && Math.abs(state.labels.T.im) < 0.5)).toBe(true);
  });
});

describe("runaway denominators", () => {
  it("are measured blockwise: levels 1e-9 apart that couple only through a third", () => {
    const h0 = Operator.diagonal([0, 1e-9, 1]);
    const v = symmetric(3, [
      [0, 2, 0.1],
      [1, 2, 0.1],
    ]);
    // The short second order gives −0.01 twice; the truth is −0.02 and 0 (to higher orders in 0.1).
    expectNear(-(0.1 ** 2), -0.01, 1e-15);
    const [low, middle] = bruteForce(h0.plus(v)).sort((a, b) => a - b);
    expectNear(low ?? 0, (1 - Math.sqrt(1.08)) / 2, 1e-8);
    expectNear(middle ?? 1, 5e-10, 1e-11);
    for (const options of [{}, { lambda: 1 }, { levelWidth: 1e-12 }]) {
      const outcome = findGoodBasis({ h0, v }, options);
      expect(outcome.verdict).toBe("undecided");
      for (const level of outcome.levels.slice(0, 2)) {
        expect(level.questions.map((question) => question.code)).toContain("near-degenerate");
        const [sector] = level.guard.sectors;
        expectNear(sector?.first.ratio ?? 1, 0.1, 1e-8); // the largest single ratio looks harmless
        expectNear((sector?.second.ratio ?? 0) / 1e7, 1, 1e-6);
      }
    }
  });

  it("many small elements add up where each alone is below the threshold", () => {
    // Two levels of 64 states, 1 apart; V couples every state of one to every state of the other by 1/16.
    const n = 64;
    const h0 = Operator.diagonal(Array.from({ length: 2 * n }, (_, k) => (k < n ? 0 : 1)));
    const v = symmetric(
      2 * n,
      Array.from({ length: n * n }, (_, k) => [Math.floor(k / n), n + (k % n), 1 / 16] as const),
    );
    const { levels } = findGoodBasis({ h0, v }, { lambda: 1, depth: "first order" });
    for (const level of levels) {
      expectNear(level.guard.sectors[0]?.first.ratio ?? 0, 4, 1e-9);
      expect(level.questions.map((question) => question.code)).toContain("near-degenerate");
    }
  });

  it("Kato's bound d/2‖V‖ does not exceed the radius of convergence", () => {
    // ½ ± √(¼ + λ²) branches at λ = ±i/2.
    const basis = goodBasis({ h0: Operator.diagonal([0, 1]), v: symmetric(2, [[0, 1, 1]]) });
    for (const level of basis.levels) {
      const radius = level.guard.radius[0] ?? 0;
      expect(radius).toBeLessThanOrEqual(0.5);
      expect(radius).toBeGreaterThan(0.4999);
    }
  });

  it("inside the level: W against the splitting by V", () => {
    // V parts the pair by 2e-3 only, W couples it by 0.35.
    const h0 = Operator.diagonal([0, 0, 1]);
    const v = symmetric(3, [
      [0, 0, 1e-3],
      [1, 1, -1e-3],
      [0, 2, 0.5],
      [1, 2, 0.7],
    ]);
    const outcome = findGoodBasis({ h0, v }, { lambda: 1 });
    expect(outcome.verdict).toBe("undecided");
    expectNear(outcome.levels[0]?.guard.inside ?? 0, 175, 1e-6);
    expect(outcome.levels[0]?.questions.map((question) => question.code)).toContain("strong-mixing");
  });
});

describe("labels", () => {
  const h0 = Operator.zero(2);
  const v = Operator.diagonal([1, -1]);

  it("snap only where the enclosure allows one member of the family", () => {
    const of = (values: readonly number[], absolute?: number) => {
      const A = Operator.diagonal(values, absolute === undefined ? {} : { uncertainty: { absolute } });
      const outcome = findGoodBasis({ h0, v, candidates: { A: { operator: A, label: "m" } } });
      return outcome.states.map((state) => state.labels.A);
    };
    expect(of([0.5, -0.5]).map(({ text, status }) => [text, status])).toEqual([
      ["1/2", "declared"],
      ["−1/2", "declared"],
    ]);
    for (const label of of([0.5 + 1e-6, -0.5])) expect(label.status).toBe(label.re > 0 ? "measured" : "declared");
    // Known to 0.3 only, 0.5 may be 0, 1/2 or, nearly, 1.
    for (const label of of([0.5, -0.5], 0.3)) expect(label.status).not.toBe("declared");
  });

  it("are proposals where nothing was declared", () => {
    const outcome = findGoodBasis({ h0, v, candidates: { A: Operator.diagonal([0.5, -0.5]) } });
    expect(outcome.states.map((state) => state.labels.A.status)).toEqual(["proposed", "proposed"]);
  });

  it("of unitary candidates separate by either part: e^{±2πi/3} share the real one", () => {
    const C3 = { operator: ketPermutation([1, 2, 0]), label: { root: 3 } } as const;
    const ring = symmetric(3, [
      [0, 1, 1],
      [1, 2, 1],
      [0, 2, 1],
    ]);
    const current = C3.operator.minus(C3.operator.adjoint()).scale({ re: 0, im: 1 });
    const basis = goodBasis({ h0: ring, v: current, candidates: { C3 } }, { depth: "labels" });
    expectValues(
      shifts(levelAt(basis, -1)),
      [
        [Math.sqrt(3), 1],
        [-Math.sqrt(3), 1],
      ],
      1e-12,
    );
    for (const state of basis.states) expect(state.safe).toEqual({ energies: "all", states: "all" });
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

describe("determinism", () => {
  it("the same input gives the same vectors, phases included", () => {
    const { h0, v } = (() => {
      const chain = spinChain(3);
      const dot = (i: number, k: number): Operator => chain.szsz(i, k).plus(chain.exchange(i, k));
      return { h0: Operator.sum(dot(0, 1), dot(1, 2), dot(0, 2)), v: dot(0, 1).plus(chain.sz(2)) };
    })();
    const once = findGoodBasis({ h0, v });
    const again = findGoodBasis({ h0, v });
    expect(again.states).toEqual(once.states);
    for (const { vector } of once.states) {
      const sizes = [...vector.re].map((re, k) => Math.hypot(re, vector.im?.[k] ?? 0));
      const first = sizes.findIndex((size) => size >= 0.987 * Math.max(...sizes));
      expect(vector.re[first]).toBeGreaterThan(0);
      expect(vector.im?.[first] ?? 0).toBe(0);
    }
  });
});
