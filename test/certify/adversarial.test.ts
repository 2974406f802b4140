import { describe, expect, it } from "vitest";
import {
  angularMomentum,
  auditCommutators,
  findGoodBasis,
  Operator,
  type Outcome,
  perturb,
  type Uncertainty,
} from "../../src/index.js";

const exact = { uncertainty: "exact" } as const;
const h0 = Operator.diagonal([1, 1, 2], exact);
const v = Operator.from(
  [
    [-1, 0, 0],
    [0, 0, 1],
    [0, 1, 0],
  ],
  exact,
);
const A = Operator.diagonal([1, 0, 0], exact);
const ALL = { energies: "all", states: "all" };

function safes(outcome: Outcome): unknown[] {
  return outcome.states.map((state) => state.safe);
}

describe("trivial problems", () => {
  it("V = 0: good, every shift exactly zero; states that nothing tells apart are not safe beyond first order", () => {
    const named = findGoodBasis({ h0, v: Operator.zero(3), candidates: { A } });
    expect(named.verdict).toBe("good");
    expect(safes(named)).toEqual([ALL, ALL, ALL]);
    const bare = findGoodBasis({ h0, v: Operator.zero(3) });
    expect(bare.verdict).toBe("good");
    expect(safes(bare)).toEqual([{ energies: 1, states: "none" }, { energies: 1, states: "none" }, ALL]);
    for (const { shifts } of [...named.states, ...bare.states]) {
      expect(shifts[0]?.value).toBe(0);
      expect(shifts[0]?.plusMinus).toBeLessThan(1e-14);
    }
    expect(named.levels[0]?.guard.radius).toEqual([null]);
  });

  it("H0 = 0: one level, V and the labels do everything", () => {
    const outcome = findGoodBasis({ h0: Operator.zero(3), v, candidates: { A } });
    expect(outcome.verdict).toBe("good");
    expect(outcome.levels.map((level) => level.degeneracy)).toEqual([3]);
    expect(outcome.levels[0]).toMatchObject({ energy: 0, gapBelow: null, gapAbove: null, tilt: 0 });
    expect(outcome.states.map((state) => Math.round(state.shifts[0]?.value ?? Number.NaN)).sort()).toEqual([-1, -1, 1]);
    if (outcome.verdict !== "good") return;
    // no other level: the second order is exactly nothing
    for (const state of perturb(outcome.basis).states)
      expect(state.second?.[0]?.[0]).toEqual({ value: 0, plusMinus: 0 });
  });

  it("everything zero, and one ket", () => {
    expect(
      findGoodBasis({ h0: Operator.zero(2), v: Operator.zero(2), candidates: { Z: Operator.zero(2) } }).verdict,
    ).toBe("good");
    for (const [e, w, a] of [
      [2, 3, 5],
      [0, 0, 0],
      [-1e-30, 1e30, 1],
    ] as const) {
      const one = findGoodBasis({ h0: [[e]], v: [[w]], candidates: { A: [[a]] } });
      expect(one.verdict).toBe("good");
      expect(one.states[0]).toMatchObject({ energy: e, safe: ALL });
      expect(one.states[0]?.labels.A.re).toBe(a);
      expect(one.states[0]?.shifts[0]?.value).toBe(w);
    }
  });

  it("the identity and zero as candidates say nothing and harm nothing", () => {
    const bare = findGoodBasis({ h0, v });
    const { states, verdict, levels } = findGoodBasis({
      h0,
      v,
      candidates: { one: Operator.identity(3), none: Operator.zero(3) },
    });
    expect(verdict).toBe(bare.verdict);
    expect(states.map((state) => state.safe)).toEqual(safes(bare));
    expect(levels.flatMap((level) => level.evidence.nodes.filter((node) => node.kind === "label"))).toEqual([]);
    for (const { labels } of states) expect([labels.one.re, labels.none.re]).toEqual([1, 0]);
  });

  it("H0 and V themselves as candidates", () => {
    const outcome = findGoodBasis({ h0, v, candidates: { E: h0, X: v } });
    expect(outcome.verdict).toBe("good");
    // V does not conserve H0, nor H0 V
    expect(outcome.states.map(({ labels }) => labels.E.role)).toEqual(["descriptive", "descriptive", "descriptive"]);
    expect(outcome.states.map(({ labels }) => labels.X.role)).toEqual(["broken", "broken", "broken"]);
    expect(outcome.states.map(({ labels }) => labels.E.text)).toEqual(["1", "1", "2"]);
    const diagonal = Operator.diagonal([3, 4, 5], exact);
    const both = findGoodBasis({ h0, v: diagonal, candidates: { E: h0, X: diagonal } });
    expect(both.verdict).toBe("good");
    expect(safes(both)).toEqual([ALL, ALL, ALL]);
  });

  it("one candidate three times over is one candidate", () => {
    const once = findGoodBasis({ h0, v, candidates: { A } });
    const thrice = findGoodBasis({ h0, v, candidates: { A, B: A, C: A.scale(-2) } });
    expect(thrice.verdict).toBe(once.verdict);
    expect(safes(thrice)).toEqual(safes(once));
    expect(thrice.states.map((state) => state.vector)).toEqual(once.states.map((state) => state.vector));
    for (const { labels } of thrice.states) {
      expect(labels.B.re).toBe(labels.A.re);
      expect(labels.C.re).toBe(-2 * labels.A.re + 0);
    }
  });
});

describe("candidates in any unit", () => {
  it.each([1.0545718e-34, 1e-150, 1e-300, 1e34, 1e150])("A in units of %d separates all the same", (unit) => {
    const outcome = findGoodBasis({ h0, v, candidates: { A: A.scale(unit) } });
    expect(outcome.verdict).toBe("good");
    expect(safes(outcome)).toEqual([ALL, ALL, ALL]);
    expect(outcome.states[0]?.labels.A.re).toBe(unit);
    for (const { labels } of outcome.states) {
      const near = Math.min(Math.abs(labels.A.re), Math.abs(labels.A.re - unit));
      expect(near).toBeLessThanOrEqual(labels.A.radius);
      expect(labels.A.radius).toBeLessThan(1e-13 * unit);
    }
  });

  it.each([1e-34, 1e-150, 1e-300, 1e150])("a broken candidate in units of %d is broken", (unit) => {
    const X = Operator.from(
      [
        [0, 1, 0],
        [1, 0, 1],
        [0, 1, 0],
      ],
      exact,
    ).scale(unit);
    const [finding] = auditCommutators({ h0, v, candidates: { X } }).candidates;
    expect(finding).toMatchObject({ conserved: false, descriptive: false });
    expect(finding?.withH0.verdict).toBe("broken");
    expect(finding?.withH0.atLeast).toBeGreaterThan(0.9 * unit);
    expect(finding?.withH0.bound).toBeGreaterThanOrEqual(unit);
  });
});

describe("conserved operators that do not commute with each other", () => {
  const { x, y, z, squared } = angularMomentum(1);

  it("are both reported, one set carries the basis, and no label claims the other", () => {
    const outcome = findGoodBasis({ h0: squared, v: squared, candidates: { Jx: x, Jy: y, Jz: z } });
    expect(outcome.verdict).toBe("good");
    expect(outcome.audit.sets).toEqual([["Jx"], ["Jy"], ["Jz"]]);
    expect(outcome.audit.remarks).toHaveLength(3);
    expect(outcome.sets.filter((set) => set.chosen)).toHaveLength(1);
    const [chosen] = outcome.sets.filter((set) => set.chosen);
    for (const state of outcome.states) {
      const sharp = Object.entries(state.labels).filter(([, label]) => label.status !== "not sharp");
      expect(sharp.map(([name]) => name)).toContain(chosen?.names[0]);
    }
    const texts = outcome.states.map((state) => Object(state.labels)[chosen?.names[0] ?? ""].text);
    expect(texts).toEqual(["1", "0", "−1"]);
  });
});

describe("labels that V breaks describe and never prove", () => {
  // 2P: l = 1, s = 1/2, split by L·S; the magnetic field Lz + 2 Sz breaks J².
  const l = angularMomentum(1);
  const s = angularMomentum(1 / 2);
  const one = Operator.identity(2);
  const three = Operator.identity(3);
  const L = [l.x.kron(one), l.y.kron(one), l.z.kron(one)] as const;
  const S = [three.kron(s.x), three.kron(s.y), three.kron(s.z)] as const;
  const J = [L[0].plus(S[0]), L[1].plus(S[1]), L[2].plus(S[2])] as const;
  const J2 = Operator.sum(...J.map((j) => j.times(j)));
  const LS = Operator.sum(...L.map((part, k) => part.times(S[k] ?? part)));
  const zeeman = L[2].plus(S[2].scale(2));
  const candidates = {
    J2: { operator: J2, label: "j" },
    Jz: { operator: J[2], label: "m" },
    Sz: { operator: S[2], label: "m" },
  } as const;

  it("J of the 2P levels is sharp, descriptive, and in no node of the tree", () => {
    const outcome = findGoodBasis({ h0: LS, v: zeeman, candidates });
    expect(outcome.verdict).toBe("good");
    expect(outcome.levels.map((level) => level.degeneracy)).toEqual([2, 4]);
    expect(outcome.states.map((state) => state.labels.J2.text)).toEqual(["1/2", "1/2", "3/2", "3/2", "3/2", "3/2"]);
    for (const { labels, safe } of outcome.states) {
      expect(labels.J2).toMatchObject({ role: "descriptive", status: "declared" });
      expect(labels.Jz).toMatchObject({ role: "conserved", status: "declared" });
      expect(labels.Sz.role).toBe("broken");
      expect(safe).toEqual(ALL);
    }
    expect(outcome.tree.some((node) => node.operator === "J2" || node.operator === "Sz")).toBe(false);
    // Sz is a mixture except in the stretched states
    expect(outcome.states.filter((state) => state.labels.Sz.status === "not sharp")).toHaveLength(4);
    // the Landé factors 4/3 and 2/3
    const g = outcome.states.map((state) => (state.shifts[0]?.value ?? 0) / state.labels.Jz.re);
    for (const [k, value] of g.entries()) expect(value).toBeCloseTo(k < 2 ? 2 / 3 : 4 / 3, 12);
  });

  it("alone it proves nothing: with J² only, V itself has to part the states", () => {
    const outcome = findGoodBasis({ h0: LS, v: zeeman, candidates: { J2: candidates.J2 } });
    expect(outcome.verdict).toBe("good");
    for (const { safe } of outcome.states) expect(safe).toEqual({ energies: 2, states: 0 });
    expect(
      findGoodBasis({ h0: LS, v: zeeman, candidates: { J2: candidates.J2 } }, { depth: "labels" }).verdict,
    ).not.toBe("good");
  });
});

describe("λ and refuseAbove", () => {
  const close = {
    h0: Operator.diagonal([0, 1e-9, 1], exact),
    v: Operator.from(
      [
        [0, 0, 0.1],
        [0, 0, 0.1],
        [0.1, 0.1, 0],
      ],
      exact,
    ),
  };

  it("a λ that makes the neighbour's second-order coupling larger than the gap is refused, a small one is not", () => {
    const refused = findGoodBasis(close, { lambda: 1 });
    expect(refused.verdict).toBe("undecided");
    expect(refused.levels[0]?.questions.map((question) => question.code)).toContain("near-degenerate");
    expect(refused.levels[0]?.guard).toMatchObject({ lambda: 1, stated: true, refuseAbove: 1 });
    expect(findGoodBasis(close, { lambda: 1e-6 }).verdict).toBe("good");
  });

  it("refuseAbove moves the line, and only that", () => {
    const allowed = findGoodBasis(close, { lambda: 1, refuseAbove: 1e12 });
    expect(allowed.verdict).toBe("good");
    const strict = findGoodBasis(close, { lambda: 1e-6, refuseAbove: 1e-9 });
    expect(strict.verdict).toBe("undecided");
    expect(allowed.states.map((state) => state.shifts)).toEqual(strict.states.map((state) => state.shifts));
  });

  it("merged as the question proposes, the truth −0.02 and 0 comes out", () => {
    const merged = findGoodBasis(close, { lambda: 1, levelWidth: 1e-8 });
    expect(merged.levels[0]?.degeneracy).toBe(2);
    if (merged.verdict !== "good") throw new Error(merged.levels[0]?.questions[0]?.message);
    const pair = perturb(merged.basis, { select: [0, 1] }).states.map((state) => state.second?.[0]?.[0]);
    const values = pair.map((second) => second?.value ?? Number.NaN).sort((a, b) => a - b);
    expect(values[0]).toBeCloseTo(-0.02, 9);
    expect(values[1]).toBeCloseTo(0, 9);
  });
});

describe("Kato's radius is a lower bound", () => {
  // H0 = ±d/2, V = t + [[a, b], [b*, −a]]: the two energies meet at |λ| = d / (2 √(a² + |b|²)).
  const cases: readonly (readonly [d: number, t: number, a: number, re: number, im: number])[] = [
    [1, 0, 0, 1, 0],
    [1, 0, 1, 0, 0],
    [2, 0, 0.3, 0.4, 0],
    [2, 5, 0.3, 0.4, 0],
    [1e-6, 0, 0, 1, 1],
    [1e6, -3, 2, 0.001, 7],
    [1e-30, 0, 1e20, 1e20, 1e20],
    [1, 1e-9, 1e-150, 1e-150, 0],
  ];
  it.each(cases)("d = %d, t = %d, a = %d, b = %d + %di", (d, t, a, re, im) => {
    const outcome = findGoodBasis({
      h0: Operator.diagonal([-d / 2, d / 2], exact),
      v: Operator.from(
        {
          re: [
            [t + a, re],
            [re, t - a],
          ],
          im: [
            [0, im],
            [-im, 0],
          ],
        },
        exact,
      ),
    });
    const scale = Math.max(Math.abs(a), Math.abs(re), Math.abs(im));
    const meet = d / (2 * scale * Math.hypot(a / scale, re / scale, im / scale));
    for (const level of outcome.levels) {
      const [radius] = level.guard.radius;
      expect(radius).toBeLessThanOrEqual(meet);
      if (t === 0) expect(radius).toBeGreaterThan(meet / 2);
    }
  });

  it("the uncertainty of H0 and V is taken off", () => {
    const told = (uncertainty: Uncertainty) =>
      findGoodBasis({
        h0: Operator.diagonal([1, 2], { uncertainty }),
        v: Operator.from(
          [
            [0, 1],
            [1, 0],
          ],
          { uncertainty },
        ),
      }).levels[0]?.guard.radius[0];
    expect(told("exact")).toBeGreaterThan(0.499999);
    expect(told("exact")).toBeLessThanOrEqual(0.5);
    // the gap may be 0.98 and V as large as 1.01
    expect(told({ absolute: 0.01 })).toBeLessThanOrEqual(0.98 / 2.02);
    expect(told({ absolute: 0.01 })).toBeGreaterThan(0.4);
  });
});
