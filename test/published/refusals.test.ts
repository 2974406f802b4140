import { describe, expect, it } from "vitest";
import {
  auditCommutators,
  type ErrorCode,
  findGoodBasis,
  GoodBasisError,
  Operator,
  type Problem,
} from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { perturb } from "../../src/perturb/perturb.js";
import {
  bruteForce,
  expectAllOrders,
  expectNear,
  expectValues,
  goodBasis,
  pick,
  shifts,
  symmetric,
} from "./support.js";

// The linear Stark effect of hydrogen, n = 2, kets 2s, 2p m = +1, 0, −1.
const stark = { h0: Operator.diagonal([-1 / 8, -1 / 8, -1 / 8, -1 / 8]), v: symmetric(4, [[0, 2, -3]]) };
const starkLz = { operator: Operator.diagonal([0, 1, 0, -1]), label: "m" } as const;

// [L², z] ≠ 0; common practice.
describe("L² with the linear Stark effect", () => {
  const L2 = Operator.diagonal([0, 2, 2, 2]);

  it("is a finding of the audit: [L², V] has norm 6√2", () => {
    const audit = auditCommutators({ ...stark, candidates: { L2, Lz: starkLz } });
    const [finding, other] = audit.candidates;
    expect(finding).toMatchObject({ name: "L2", conserved: false, descriptive: true });
    expect(finding?.withH0.verdict).toBe("commutes");
    const broken = finding?.withPerturbations[0];
    expect(broken).toMatchObject({ verdict: "broken", left: "L2", right: "V" });
    expectNear(broken?.norm ?? 0, 6 * Math.SQRT2, 1e-8);
    expect(broken?.largest.map(({ row, column, size }) => [row, column, size])).toEqual([
      [0, 2, 6],
      [2, 0, 6],
    ]);
    expect(finding?.reason).toContain("does not commute with V");
    expect(other?.conserved).toBe(true);
    expect(audit.sets).toEqual([["Lz"]]);
  });

  it("does not serve as evidence", () => {
    const outcome = findGoodBasis({ ...stark, candidates: { L2, Lz: starkLz } }, { depth: "labels" });
    expect(outcome.verdict).toBe("not good");
    for (const node of outcome.tree) expect(node.operator).not.toBe("L2");
  });
});

// [L_x, L_z] = −iL_y; common practice.
describe("L_x and L_z together", () => {
  const { x, z, squared } = angularMomentum(1);
  const problem = { h0: Operator.zero(3), v: Operator.identity(3).scale(0.1) };

  it("are each conserved but do not commute: a finding with norm √2 and the sets that can be used", () => {
    const audit = auditCommutators({ ...problem, candidates: { Lx: x, Lz: z } });
    expect(audit.candidates.map((finding) => finding.conserved)).toEqual([true, true]);
    expect(audit.pairs).toHaveLength(1);
    expect(audit.pairs[0]).toMatchObject({ left: "Lx", right: "Lz", verdict: "broken" });
    expectNear(audit.pairs[0]?.norm ?? 0, Math.SQRT2, 1e-12);
    expect(audit.remarks).toHaveLength(1);
    expect(audit.remarks[0]).toContain("do not commute");
    expect(audit.sets).toEqual([["Lx"], ["Lz"]]);
  });

  it("only one of them labels the basis", () => {
    const basis = goodBasis({ ...problem, candidates: { Lx: x, Lz: z } }, { depth: "labels" });
    expectAllOrders(basis.study);
    expect(basis.study.sets.map(({ names, chosen }) => [names, chosen])).toEqual([
      [["Lx"], true],
      [["Lz"], false],
    ]);
    for (const state of basis.states) expect(["declared", "proposed"]).toContain(state.labels.Lx.status);
    expect(basis.states.map((state) => state.labels.Lz.status)).toContain("not sharp");
  });

  it("L² and L_z are accepted as a pair", () => {
    const candidates = { L2: { operator: squared, label: "j" }, Lz: { operator: z, label: "m" } } as const;
    const audit = auditCommutators({ ...problem, candidates });
    expect(audit.sets).toEqual([["L2", "Lz"]]);
    const basis = goodBasis({ ...problem, candidates }, { depth: "labels" });
    expect(basis.states.map(({ labels: { L2, Lz } }) => `${L2.text},${Lz.text}`)).toEqual(["1,1", "1,0", "1,−1"]);
    expectAllOrders(basis.study);
  });
});

// Distinct eigenvalues are needed; common practice.
describe("L_z alone for the n = 2 Stark effect", () => {
  it("is refused with labels: 2s and 2p0 share m = 0 and are coupled by 3", () => {
    const outcome = findGoodBasis(
      { ...stark, candidates: { Lz: starkLz }, kets: ["2s", "2p+1", "2p0", "2p−1"] },
      { depth: "labels" },
    );
    expect(outcome.verdict).toBe("not good");
    if (outcome.verdict !== "not good") return;
    expect(outcome.couplings).toHaveLength(1);
    const [coupling] = outcome.couplings;
    expectNear(coupling?.size ?? 0, 3, 1e-8);
    expectNear(Math.SQRT2 * (coupling?.size ?? 0), 4.242640687, 1e-8); // Frobenius norm of the block
    expect(coupling?.atLeast).toBeLessThanOrEqual(3);
    expect(coupling?.atMost).toBeGreaterThanOrEqual(3);
    for (const index of coupling?.states ?? []) expect(outcome.states[index]?.labels.Lz.text).toBe("0");
    const kets = (coupling?.states ?? []).flatMap((index) => [...(outcome.states[index]?.vector.kets ?? [])]);
    expect(kets.sort()).toEqual([0, 2]);
  });

  it("is good at full depth, V telling the pair apart, with energies safe through 2", () => {
    const basis = goodBasis({ ...stark, candidates: { Lz: starkLz } });
    expectValues(
      shifts(basis.states),
      [
        [3, 1],
        [0, 2],
        [-3, 1],
      ],
      1e-9,
    );
    for (const state of basis.states) {
      const own = state.labels.Lz.text === "0" ? { energies: 2, states: 0 } : { energies: "all", states: "all" };
      expect(state.safe).toEqual(own);
    }
    expect(() => perturb(basis, { states: 1 })).toThrow(expect.objectContaining({ code: "unsafe-order" }));
    const safe = basis.states.filter((state) => state.safe.energies === "all").map((state) => state.index);
    expect(perturb(basis, { states: 1, select: safe }).states).toHaveLength(2);
  });
});

// Elementary closed form; common practice.
describe("levels 1e-9 apart that V couples by 1e-3", () => {
  const h0 = Operator.diagonal([0, 1e-9, 1]);
  const v = symmetric(3, [
    [0, 1, 1e-3],
    [1, 2, 0.1],
  ]);

  it("the naive second order is −1000 where the truth is ±1e-3", () => {
    expectNear(-(v.entry(0, 1).re ** 2) / 1e-9, -1000, 1e-6);
    const corner = symmetric(2, [
      [1, 1, 1e-9],
      [0, 1, 1e-3],
    ]);
    expectValues(
      bruteForce(corner),
      [
        [1e-3, 1],
        [-1e-3, 1],
      ],
      1e-8,
    );
  });

  it.each([
    { how: "as it comes", options: {} },
    { how: "as separate levels", options: { levelWidth: 1e-12 } },
    { how: "with λ = 1", options: { lambda: 1 } },
    { how: "as separate levels with λ = 1", options: { levelWidth: 1e-12, lambda: 1 } },
  ])("is not good $how: near-degenerate, a ratio of 1e6", ({ options }) => {
    for (const depth of ["labels", "first order", "second order", "full"] as const) {
      const outcome = findGoodBasis({ h0, v }, { ...options, depth });
      expect(outcome.verdict).toBe("undecided");
      for (const level of outcome.levels.slice(0, 2)) {
        expect(level.questions.map((question) => question.code)).toContain("near-degenerate");
        const first = Math.max(...level.guard.sectors.map((sector) => sector.first.ratio)) / level.guard.lambda;
        expectNear(first, 1e6, 1);
      }
    }
  });

  it("merged into one level, its labels do not suffice: the block has norm √2 · 1e-3", () => {
    const outcome = findGoodBasis({ h0, v }, { levelWidth: 1e-7, depth: "labels" });
    expect(outcome.verdict).toBe("not good");
    if (outcome.verdict !== "not good") return;
    expect(outcome.levels[0]?.degeneracy).toBe(2);
    expectNear(Math.SQRT2 * (outcome.couplings[0]?.size ?? 0), 0.001414213562, 1e-9);
  });

  it("merged and left to V: undecided without a stated λ, since the spread is real", () => {
    const outcome = findGoodBasis({ h0, v }, { levelWidth: 1e-7 });
    expect(outcome.verdict).toBe("undecided");
    expect(outcome.levels[0]?.questions.map((question) => question.code)).toContain("merged-level");
  });

  it.each([{ lambda: 1 }, {}])("merged with %o it is never good, at any depth", (options) => {
    for (const depth of ["labels", "first order", "second order", "full"] as const) {
      expect(findGoodBasis({ h0, v }, { levelWidth: 1e-7, depth, ...options }).verdict).not.toBe("good");
    }
  });
});

// Common practice.
describe("bad input", () => {
  function refusal(problem: Problem): GoodBasisError {
    for (const verb of [findGoodBasis, auditCommutators]) {
      try {
        verb(problem);
      } catch (error) {
        if (!(error instanceof GoodBasisError)) throw error;
        if (verb === auditCommutators) return error;
        continue;
      }
      throw new Error("nothing was refused");
    }
    throw new Error("nothing was refused");
  }
  const one = Operator.identity(2);
  const { plus } = angularMomentum(1);
  const cases: { what: string; problem: Problem; code: ErrorCode; size?: number }[] = [
    {
      what: "V not Hermitian",
      problem: {
        h0: one,
        v: [
          [0, 1],
          [0, 0],
        ],
      },
      code: "not-hermitian",
      size: Math.SQRT2,
    },
    {
      what: "H0 symmetric but not Hermitian",
      problem: {
        h0: {
          re: [
            [0, 0],
            [0, 0],
          ],
          im: [
            [0, 1],
            [1, 0],
          ],
        },
        v: one,
      },
      code: "not-hermitian",
      size: 2 * Math.SQRT2,
    },
    {
      what: "L₊ as a candidate",
      problem: { h0: Operator.zero(3), v: Operator.zero(3), candidates: { Lplus: plus } },
      code: "not-normal",
      size: 2 * Math.SQRT2,
    },
    {
      what: "a 2 × 2 candidate with a 3 × 3 H0",
      problem: { h0: Operator.zero(3), v: Operator.zero(3), candidates: { A: one } },
      code: "shape",
    },
    { what: "V of another size", problem: { h0: Operator.zero(3), v: one }, code: "shape" },
    {
      what: "NaN in V",
      problem: {
        h0: one,
        v: [
          [0, Number.NaN],
          [Number.NaN, 0],
        ],
      },
      code: "not-finite",
    },
    {
      what: "an infinite entry in a candidate",
      problem: { h0: one, v: one, candidates: { A: { diagonal: [1, Number.POSITIVE_INFINITY] } } },
      code: "not-finite",
    },
  ];

  it.each(cases)("$what: $code", ({ problem, code, size }) => {
    const error = refusal(problem);
    expect(error.code).toBe(code);
    if (size !== undefined) expectNear(Number(error.details["size"]), size, 1e-12);
  });

  it("a unitary rotation by a quarter turn is accepted", () => {
    const C4z = ketPermutation([0, 1, 2], [{ re: 0, im: -1 }, 1, { re: 0, im: 1 }]);
    const audit = auditCommutators({ h0: Operator.zero(3), v: Operator.diagonal([1, 2, 1]), candidates: { C4z } });
    expect(audit.candidates[0]).toMatchObject({ kind: "unitary", conserved: true });
    const basis = goodBasis(
      { h0: Operator.zero(3), v: Operator.diagonal([1, 2, 1]), candidates: { C4z } },
      { depth: "labels" },
    );
    expect(pick(basis, 0, { C4z: { re: 0, im: 1 } }).vector.kets).toEqual(Int32Array.of(2));
  });
});
