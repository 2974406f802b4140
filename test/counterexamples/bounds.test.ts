import { describe, expect, it } from "vitest";
import { auditCommutators, findGoodBasis, Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import {
  expectNear,
  expectValues,
  goodBasis,
  levelAt,
  second,
  shift,
  shifts,
  solved,
  weight,
} from "../published/support.js";

const exact = { uncertainty: "exact" } as const;

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

describe("the ± on a shift", () => {
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

  it.each([-1, -4, -8, -12, -16, -20, -24, -28, -30])(
    "covers the exact first order with a neighbour at 2^%d",
    (power) => {
      expect(relative(2 ** power)).toBeGreaterThan(0);
    },
  );

  it.each([-1, -4, -8, -12, -16, -20, -24, -28, -30])(
    "covers the exact second order with a neighbour at 2^%d",
    (power) => {
      const d = 2 ** power;
      const basis = goodBasis({ h0: rotated(diagonal([0, 0, d, 1])), v }, { lambda: d / 4 });
      // 30 Σ_k B_kμ²/(D_μ − D_k).
      const pair = 30 * (-1 / d - 1);
      const wanted = [pair, pair, 30 * (2 / d + 1 / (d - 1)), 30 * (2 + 1 / (1 - d))];
      for (const [k, state] of basis.states.entries()) {
        const { value, plusMinus } = second(basis, state);
        expect(Math.abs(value - (wanted[k] ?? Number.NaN))).toBeLessThanOrEqual(plusMinus);
      }
    },
  );
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
