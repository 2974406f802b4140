import { describe, expect, it } from "vitest";
import { type Audit, auditCommutators, auditPrepared, type CandidateFinding } from "../../src/audit/audit.js";
import { prepareProblem } from "../../src/audit/problem.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { Operator } from "../../src/operator/operator.js";
import { ringHopping, ringReflection, ringTranslation } from "../refine/support.js";

const exact = { uncertainty: "exact" } as const;
const named = (audit: Audit, name: string): CandidateFinding => {
  const found = audit.candidates.find((candidate) => candidate.name === name);
  if (found === undefined) throw new Error(`no finding of ${name}`);
  return found;
};

describe("auditCommutators", () => {
  it("a ring: translation and reflection are conserved, do not commute, and make two sets", () => {
    const audit = auditCommutators({
      h0: ringHopping(6),
      v: ringHopping(6, 2),
      candidates: {
        T: ringTranslation(6),
        R: ringReflection(6),
        T2: ringTranslation(6).times(ringTranslation(6)),
        one: Operator.identity(6),
      },
    });
    expect(
      audit.candidates.map(({ name, kind, conserved, descriptive, reason }) => [
        name,
        kind,
        conserved,
        descriptive,
        reason,
      ]),
    ).toEqual([
      ["T", "unitary", true, false, ""],
      ["R", "hermitian", true, false, ""],
      ["T2", "unitary", true, false, ""],
      ["one", "hermitian", true, false, ""],
    ]);
    expect(audit.pairs.map(({ left, right, verdict }) => [left, right, verdict])).toEqual([
      ["T", "R", "broken"],
      ["T", "T2", "commutes"],
      ["T", "one", "commutes"],
      ["R", "T2", "broken"],
      ["R", "one", "commutes"],
      ["T2", "one", "commutes"],
    ]);
    expect(audit.sets).toEqual([
      ["T", "T2", "one"],
      ["R", "one"],
    ]);
    expect(audit.setsComplete).toBe(true);
    expect(audit.remarks).toHaveLength(2);
    expect(audit.remarks[0]).toMatch(
      /^T and R are both conserved but do not commute: ‖\[T, R\]‖ = 3\.46410 \(Frobenius\), 2-norm at most \d/,
    );
    expect(audit.remarks[1]).toMatch(/^R and T2 are both conserved but do not commute/);
  });

  it("a strong field: J² is described, not conserved, with its size and kets", () => {
    const [l, s] = [angularMomentum(1), angularMomentum(0.5)];
    const both = (a: Operator, b: Operator): Operator =>
      a.kron(Operator.identity(2)).plus(Operator.identity(3).kron(b));
    const [x, y, z] = [both(l.x, s.x), both(l.y, s.y), both(l.z, s.z)];
    const j2 = Operator.sum(x.times(x), y.times(y), z.times(z));
    const spinOrbit = Operator.sum(l.x.kron(s.x), l.y.kron(s.y), l.z.kron(s.z));
    const zeeman = l.z.kron(Operator.identity(2)).plus(Operator.identity(3).kron(s.z).scale(2));
    const kets = ["1 0 −1"].flatMap((list) => list.split(" ")).flatMap((m) => ["↑", "↓"].map((up) => `${m}${up}`));
    const audit = auditCommutators({
      h0: spinOrbit,
      v: { spinOrbit, zeeman },
      candidates: { J2: j2, Jz: z, Lz: l.z.kron(Operator.identity(2)) },
      kets,
    });
    expect(audit.candidates.map(({ conserved, descriptive }) => [conserved, descriptive])).toEqual([
      [false, true],
      [true, false],
      [false, false],
    ]);
    const found = named(audit, "J2");
    expect(found.withH0.verdict).toBe("commutes");
    expect(found.withPerturbations.map(({ left, right, verdict }) => [left, right, verdict])).toEqual([
      ["J2", "spinOrbit", "commutes"],
      ["J2", "zeeman", "broken"],
    ]);
    expect(found.withPerturbations[1]?.norm).toBeCloseTo(Math.sqrt(8), 12);
    expect(found.reason).toMatch(
      /^does not commute with zeeman: ‖\[J2, zeeman\]‖ = 2\.82843 \(Frobenius\), 2-norm at most 1\.4e\+0, largest element 1\.414 at ⟨(1↓|0↑|0↓|−1↑)\|…\|(1↓|0↑|0↓|−1↑)⟩$/,
    );
    expect(named(audit, "Lz").reason).toMatch(/^does not commute with H0: .*; does not commute with spinOrbit: /);
    expect(audit.sets).toEqual([["Jz"]]);
    expect(audit.pairs).toEqual([]);
    expect(audit.remarks).toEqual([]);
  });

  it("what the entries do not decide is undecided, and says what would decide it", () => {
    const unsure = Operator.from(
      [
        [1, 1e-30],
        [1e-30, -1],
      ],
      { uncertainty: { relative: 0, absolute: 1e-6 } },
    );
    const z = Operator.diagonal([1, -1], exact);
    const inV = auditCommutators({ h0: z, v: unsure, candidates: { z } });
    expect(named(inV, "z")).toMatchObject({ conserved: false, descriptive: true });
    expect(named(inV, "z").reason).toMatch(
      /^whether it commutes with V is undecided: .*; smaller entry uncertainties or a coarser resolution would decide it$/,
    );
    const coarse = auditCommutators({ h0: z, v: unsure, candidates: { z } }, { resolution: 1e-3 });
    expect(named(coarse, "z").conserved).toBe(true);
    const between = auditCommutators({ h0: Operator.zero(2), v: Operator.zero(2), candidates: { z, unsure } });
    expect(between.sets).toEqual([["z"], ["unsure"]]);
    expect(between.remarks).toHaveLength(1);
    expect(between.remarks[0]).toMatch(
      /^z and unsure are both conserved; whether they commute is undecided: ‖\[z, unsure\]‖/,
    );
  });

  it("a candidate broken by H0 alone describes nothing", () => {
    const z = Operator.diagonal([1, -1], exact);
    const x = Operator.from(
      [
        [0, 1],
        [1, 0],
      ],
      exact,
    );
    expect(named(auditCommutators({ h0: x, v: z, candidates: { z } }), "z")).toMatchObject({
      conserved: false,
      descriptive: false,
    });
    expect(named(auditCommutators({ h0: z, v: x, candidates: { z } }), "z")).toMatchObject({
      conserved: false,
      descriptive: true,
    });
    expect(
      named(auditCommutators({ h0: z, v: { z2: z, x }, candidates: { A: z } }), "A").withPerturbations.map(
        ({ verdict }) => verdict,
      ),
    ).toEqual(["commutes", "broken"]);
  });

  it("two spins at zero field: every set, whatever the order of the candidates", () => {
    const one = Operator.identity(2);
    const [x, z] = [
      Operator.from(
        [
          [0, 1],
          [1, 0],
        ],
        exact,
      ),
      Operator.diagonal([1, -1], exact),
    ];
    const all = { "1x": x.kron(one), "2z": one.kron(z), "1z": z.kron(one), "2x": one.kron(x) };
    const sets = (names: readonly (keyof typeof all)[]): string[] =>
      auditCommutators({
        h0: Operator.zero(4),
        v: Operator.zero(4),
        candidates: Object.fromEntries(names.map((name) => [`s${name}`, all[name]])),
      })
        .sets.map((set) => [...set].sort().join(" "))
        .sort();
    const wanted = ["s1x s2x", "s1x s2z", "s1z s2x", "s1z s2z"];
    expect(sets(["1x", "2z", "1z", "2x"])).toEqual(wanted);
    expect(sets(["2x", "1z", "2z", "1x"])).toEqual(wanted);
    expect(sets(["1x", "1z", "2x", "2z"])).toEqual(wanted);
  });

  it("points out an edge in the reason", () => {
    const n = 12;
    const number = Operator.diagonal(
      Array.from({ length: n }, (_, k) => k),
      exact,
    );
    const v = Operator.fromTriplets(
      n,
      [
        [n - 1, n - 2, 1],
        [n - 2, n - 1, 1],
      ],
      exact,
    );
    expect(named(auditCommutators({ h0: number, v, candidates: { number } }), "number").reason).toContain(
      "likely edge of a truncated space",
    );
    const inner = Operator.fromTriplets(
      n,
      [
        [0, 1, 1],
        [1, 0, 1],
      ],
      exact,
    );
    expect(named(auditCommutators({ h0: number, v: inner, candidates: { number } }), "number").reason).not.toContain(
      "edge",
    );
  });

  it("no candidates, the zero operator, one ket", () => {
    expect(
      auditCommutators({
        h0: [
          [1, 0],
          [0, 1],
        ],
        v: [
          [0, 1],
          [1, 0],
        ],
      }),
    ).toEqual({ candidates: [], pairs: [], sets: [], setsComplete: true, remarks: [] });
    const zero = auditCommutators({
      h0: Operator.zero(3),
      v: Operator.zero(3),
      candidates: { A: Operator.zero(3), B: ringTranslation(3) },
    });
    expect(zero.sets).toEqual([["A", "B"]]);
    expect(auditCommutators({ h0: [[1]], v: [[2]], candidates: { A: [[3]] } }).sets).toEqual([["A"]]);
  });

  it("refuses a resolution outside 0 to 1", () => {
    for (const resolution of [0, 1, Number.NaN, -1]) {
      expect(() => auditCommutators({ h0: [[1]], v: [[1]] }, { resolution })).toThrow(
        expect.objectContaining({ code: "option", details: { resolution } }),
      );
    }
  });
});

describe("auditPrepared", () => {
  it("is the same for a problem that has been read, at the resolution given", () => {
    const problem = {
      h0: ringHopping(5),
      v: ringHopping(5, 2),
      candidates: { T: ringTranslation(5), R: ringReflection(5) },
    };
    expect(auditPrepared(prepareProblem(problem), 1e-10)).toEqual(auditCommutators(problem));
    expect(auditPrepared(prepareProblem(problem), 1e-4).pairs[0]?.threshold).toBeCloseTo(
      (auditCommutators(problem).pairs[0]?.threshold ?? 0) * 1e6,
      10,
    );
  });
});
