import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { proveExactly } from "../../src/prove/prove.js";
import { isolate } from "../../src/prove/roots.js";
import { bonds, dot, leafOf, lines, problemOf, product, proved, type spin, squareOfSum, textOf } from "./operators.js";

const TINY = Surd.ratio(1n, 10n ** 30n);
const ring = (n: number): ExactOperator =>
  bonds(
    n,
    Array.from({ length: n }, (_, k) => [k, (k + 1) % n] as const),
  );
const map = (n: number, f: (k: number) => number): ExactOperator =>
  ExactOperator.permutation(Array.from({ length: n }, (_, k) => ((f(k) % n) + n) % n));
const impurity = (n: number): ExactOperator => ExactOperator.fromTriplets(n, [[0, 0, 1]]);

describe("what floating point cannot see", () => {
  it("finds a planted breaking of 1e-30 and names its elements", () => {
    const [l, s] = product(2, 1) as [ReturnType<typeof spin>, ReturnType<typeof spin>];
    const planted = bonds(6, [[0, 3, TINY]]);
    const jz = l.z.plus(s.z);
    const v = l.z.plus(s.z.scale(2)).plus(planted);
    const proof = proved(problemOf(dot(l, s), v, { Jz: jz }));
    const [finding] = proof.audit.candidates;
    expect(finding?.conserved).toBe(false);
    expect(finding?.withH0.vanishes).toBe(true);
    const [commutator] = finding?.withPerturbations ?? [];
    // ⟨0|[Jz, V]|3⟩ = (3/2 + 1/2) · 1e-30
    const m = (ket: number): Surd => jz.entry(ket, ket);
    expect(commutator?.elements.map(({ row, col }) => [row, col])).toEqual([
      [0, 3],
      [3, 0],
    ]);
    expect(commutator?.elements[0]?.value.equals(m(0).minus(m(3)).times(TINY))).toBe(true);
    expect(v.toFloating().csr.re.some((x) => x === 1e-30)).toBe(true);
  });

  it("finds a coupling of 1e-30 inside a level, which V then has to finish", () => {
    const v = ExactOperator.diagonal([1, 1, 0]).plus(bonds(3, [[0, 1, TINY]]));
    const proof = proved(problemOf(ExactOperator.diagonal([0, 0, 1]), v));
    expect(proof.leaves.slice(0, 2).map(({ shifts: [shift] }) => textOf(shift?.value))).toEqual(
      [Surd.one.minus(TINY), Surd.one.plus(TINY)].map((x) => x.text()),
    );
    const labels = proved(problemOf(ExactOperator.diagonal([0, 0, 1]), v), { depth: "labels" });
    expect(labels.levels[0]?.verdict).toBe("not good");
    expect(labels.levels[0]?.couplings[0]?.squaredModulus.equals(TINY.times(TINY))).toBe(true);
  });

  it("tells energies 1e-30 apart from equal ones, also where the guess takes them for one", () => {
    const h0 = ExactOperator.from([
      [2, 1, 1],
      [1, 2, 1],
      [1, 1, 2],
    ]).plus(
      ExactOperator.from([
        [1, -1, 0],
        [-1, 1, 0],
        [0, 0, 0],
      ]).scale(TINY.over(2)),
    );
    // eigenvalues 4, 1 and 1 + 1e-30: the doubles are 1 and 1
    const proof = proved(problemOf(h0, ExactOperator.zero(3)));
    expect(proof.status).toBe("exact");
    expect(proof.levels.map(({ degeneracy }) => degeneracy)).toEqual([1, 1, 1]);
    expect(proof.leaves.map(({ energy }) => textOf(energy))).toEqual(["1", Surd.one.plus(TINY).text(), "4"]);
  });

  it("puts energies of different sectors together only where they are equal", () => {
    const kets = [0, TINY, 0, 1];
    const a = ExactOperator.diagonal([1, 1, -1, -1]);
    const proof = proved(problemOf(ExactOperator.diagonal(kets), ExactOperator.zero(4), { A: a }));
    expect(proof.levels.map(({ degeneracy }) => degeneracy)).toEqual([2, 1, 1]);
  });
});

describe("roots of unity that leave the field", () => {
  it("separates the translations of a ten-site ring by T^10 = 1 and commutation alone", () => {
    const proof = proved(problemOf(ring(10), ring(10).times(ring(10)), { T: map(10, (k) => k + 1) }));
    expect(proof.audit.candidates[0]?.order).toBe(10);
    expect(proof.status).toBe("separated");
    const [node] = proof.nodes;
    expect(node?.status).toBe("separated");
    expect(node?.children.map(({ size }) => size).reduce((a, b) => a + b)).toBe(10);
    expect(proof.leaves.map(({ kind, labels: [t] }) => `${kind}: ${t?.text}`).sort()).toEqual([
      "separated: exp(2πi·3/5) | exp(2πi·2/5)",
      "separated: exp(2πi·4/5) | exp(2πi·1/5)",
      "separated: exp(2πi·7/10) | exp(2πi·3/10)",
      "separated: exp(2πi·9/10) | exp(2πi·1/10)",
      "state: +1",
      "state: −1",
    ]);
    // both states of a pair have the exact energy and shift, and safe orders by their labels
    for (const leaf of proof.leaves) {
      expect(leaf.energy.kind).toBe("value");
      expect(leaf.shifts[0]?.value.kind).toBe("value");
      expect(leaf.safe).toEqual({ energies: "all", states: "all", limitedBy: "" });
    }
    expect(proof.levels.every(({ verdict }) => verdict === "good")).toBe(true);
  });

  it("has exact vectors again where the reflection takes the pairs apart", () => {
    const problem = problemOf(ring(10), ring(10).times(ring(10)), {
      T: map(10, (k) => k + 1),
      R: map(10, (k) => -k),
    });
    const proof = proved(problem);
    expect(proof.leaves.map(({ kind }) => kind)).toEqual(new Array(10).fill("state"));
    expect(proof.audit.pairs.map(({ vanishes }) => vanishes)).toEqual([false]);
  });

  it("keeps the exact vectors of the translations that the field holds: all of an eight-site ring", () => {
    const proof = proved(problemOf(ring(8), ring(8).times(ring(8)), { T: map(8, (k) => k + 1) }));
    expect(proof.status).toBe("exact");
    expect(proof.leaves.map(({ kind }) => kind)).toEqual(new Array(8).fill("state"));
  });
});

describe("a block that leaves the field", () => {
  const problem = problemOf(ring(7), impurity(7), { R: map(7, (k) => -k) });
  const proof = proved(problem);

  it("is marked and kept apart from the rest, which stays exact", () => {
    // 2 cos(2πk/7) are roots of x³ + x² − 2x − 1
    expect(proof.status).toBe("bounded");
    expect(
      proof.leaves.map(({ labels: [r], energy, status }) => `${r?.text} ${textOf(energy)} ${status}`).sort(),
    ).toEqual(["+1 2 exact", "+1 roots bounded", "−1 roots bounded"]);
    const sentence = proof.nodes.find(({ status }) => status === "bounded")?.sentence;
    expect(sentence).toContain("x^3 + x^2 - 2 x - 1");
    const exact = leafOf(proof, "2");
    // Σ_k 1/(4 sin²(πk/n)) over k = 1 … n − 1 is (n² − 1)/12, so E2 = 4/49
    expect([textOf(exact.shifts[0]?.value), exact.second?.[0]?.[0]?.text()]).toEqual(["1/7", "4/49"]);
  });

  it("has levels that are equal across sectors by the shared factor, all good by their labels", () => {
    expect(proof.levels.map(({ degeneracy, verdict }) => `${degeneracy} ${verdict}`)).toEqual([
      "2 good",
      "2 good",
      "2 good",
      "1 good",
    ]);
    const [lowest] = proof.levels;
    if (lowest?.energy.kind !== "root") throw new Error("expected a root");
    const bounds = lowest.energy.roots.intervals[lowest.energy.place];
    expect(bounds?.low.toNumber()).toBeCloseTo(2 * Math.cos((6 * Math.PI) / 7), 14);
    for (const leaf of proof.leaves) expect(leaf.safe.energies).toBe("all");
  });

  it("leaves a level undecided where V's block in it leaves the field too", () => {
    const cubic = ExactOperator.from([
      [0, 1, 0],
      [1, 0, 1],
      [0, 1, 1],
    ]);
    const twice = ExactOperator.identity(2).kron(cubic);
    const hidden = proved(problemOf(twice, ExactOperator.diagonal([1, 0, 0, 0, 0, 0])));
    expect(hidden.levels.map(({ verdict, degeneracy }) => [verdict, degeneracy])).toEqual([
      ["undecided", 2],
      ["undecided", 2],
      ["undecided", 2],
    ]);
    const shifted = proved(problemOf(ExactOperator.zero(3), cubic));
    expect(shifted.leaves.map(({ kind, safe }) => [kind, safe.energies, safe.states])).toEqual([["shifted", 2, 0]]);
    expect(shifted.levels[0]?.verdict).toBe("good");
  });

  it("uses another sector's exact energy to split a polynomial it is a root of", () => {
    // √2 + √3 + √5 has degree eight and no simple form; the second sector knows it by name
    const x = Surd.from("sqrt(2)+sqrt(3)+sqrt(5)");
    const h0 = ExactOperator.fromTriplets(3, [
      [0, 1, x],
      [1, 0, x],
      [2, 2, x],
    ]);
    const both = proved(problemOf(h0, ExactOperator.zero(3), { A: ExactOperator.diagonal([1, 1, -1]) }));
    expect(both.levels.map(({ degeneracy, energy }) => [degeneracy, energy.kind])).toEqual([
      [1, "value"],
      [2, "value"],
    ]);
  });
});

describe("choices", () => {
  const [a, b] = product(2, 2) as [ReturnType<typeof spin>, ReturnType<typeof spin>];
  const jz = a.z.plus(b.z);

  it("follows Condon and Shortley where a ladder is given", () => {
    const plus = a.plus.plus(b.plus);
    const problem = problemOf(squareOfSum(a, b), jz, { Jz: { operator: jz, label: "m", ladder: plus } });
    const proof = proved(problem);
    for (const j of ["2", "6"]) {
      const rungs = proof.leaves.filter(({ energy }) => textOf(energy) === j);
      for (const [k, upper] of rungs.entries()) {
        const lower = rungs[k - 1];
        const [q, r] = [upper.vectors[0], lower?.vectors[0]];
        if (q === undefined || r === undefined) continue;
        expect(q.inner(plus.apply(r)).sign()).toBe(1);
      }
    }
  });

  it("studies the levels asked for and keeps the others as background", () => {
    const problem = problemOf(jz, dot(a, b), { J2: squareOfSum(a, b) });
    const proof = proved(problem, { isStudied: (energy) => energy === 0 });
    expect(proof.levels.map(({ place, degeneracy }) => [place, degeneracy])).toEqual([[2, 3]]);
    expect(proof.levelCount).toBe(5);
    expect(proof.leaves).toHaveLength(3);
    expect(proof.background.reduce((sum, { vectors }) => sum + vectors.length, 0)).toBe(6);
  });

  it("takes several perturbations one after the other, with mixed second orders", () => {
    const h0 = ExactOperator.diagonal([0, 0, 2]);
    const [v, w] = [bonds(3, [[0, 2, 1]]), bonds(3, [[1, 2, 1]])];
    const proof = proved({
      h0,
      perturbations: [
        { name: "V", operator: v.plus(ExactOperator.diagonal([1, -1, 0])) },
        { name: "W", operator: w },
      ],
      candidates: [],
    });
    expect(lines(proof)).toEqual(["0; ; -1, 0; 0 0 / 0 -1/2", "0; ; 1, 0; -1/2 0 / 0 0", "2; ; 0, 0; 1/2 0 / 0 1/2"]);
    // W alone does not tell the pair apart
    expect(proof.leaves.map(({ safe }) => safe.energies)).toEqual([1, 1, "all"]);
    const clash = proved({
      h0: ExactOperator.zero(2),
      perturbations: [
        { name: "V", operator: ExactOperator.diagonal([1, -1]) },
        { name: "W", operator: bonds(2, [[0, 1, "1/3"]]) },
      ],
      candidates: [],
    });
    expect(clash.levels.map(({ verdict }) => verdict)).toEqual(["not good"]);
    expect(
      clash.levels[0]?.couplings.map(({ perturbation, squaredModulus }) => [perturbation, squaredModulus.text()]),
    ).toEqual([["W", "1/9"]]);
  });

  it("uses a candidate in the blocks that it maps into themselves", () => {
    const problem = problemOf(ring(6), impurity(6), { R: map(6, (k) => -k) });
    expect(proved(problem).leaves.every(({ kind }) => kind === "state")).toBe(true);
    const both = problemOf(ring(6), ring(6).times(ring(6)), { T: map(6, (k) => k + 1), R: map(6, (k) => -k) });
    const texts = proved(both).leaves.map(({ labels }) =>
      labels.map(({ candidate, text }) => `${candidate} ${text}`).join(", "),
    );
    expect(texts).toContain("T +1, R +1");
    expect(texts).toContain("T exp(2πi·1/6)");
  });
});

describe("misuse and budgets", () => {
  it("refuses operators that do not fit", () => {
    const one = ExactOperator.identity(2);
    const code = (run: () => unknown): string => {
      try {
        run();
      } catch (error) {
        return (error as { code: string }).code;
      }
      return "none";
    };
    expect(code(() => proveExactly(problemOf(one, ExactOperator.identity(3))))).toBe("shape");
    expect(
      code(() =>
        proveExactly(
          problemOf(
            one,
            ExactOperator.from([
              [0, 1],
              [0, 0],
            ]),
          ),
        ),
      ),
    ).toBe("not-hermitian");
    expect(code(() => proveExactly(problemOf(one, one, { V: one })))).toBe("name");
    expect(code(() => proveExactly(problemOf(one, one), { work: 0 }))).toBe("option");
  });

  it("says what was not proved within the budget, and is right about the rest", () => {
    const n = 12;
    const dense = ExactOperator.from(
      Array.from({ length: n }, (_, j) => Array.from({ length: n }, (_, k) => ((j * k) % 5) + ((j + k) % 3))),
    );
    const h0 = ExactOperator.from([[3]]);
    const both = ExactOperator.fromTriplets(n + 1, [
      ...[...dense.elements()].map(({ row, col, value }) => [row, col, value] as const),
      [n, n, h0.entry(0, 0)],
    ]);
    const parity = ExactOperator.diagonal([...new Array(n).fill(1), -1]);
    const proof = proved(problemOf(both, ExactOperator.zero(n + 1), { P: parity }), { work: 20_000 });
    expect(proof.status).toBe("bounded");
    expect(proof.levelCount).toBeUndefined();
    expect(proof.undecided).toHaveLength(1);
    expect(proof.nodes.find(({ status }) => status === "bounded")?.sentence).toContain("not proved within the budget");
    expect(leafOf(proof, "3", { P: "−1" }).status).toBe("exact");
    expect(proof.levels.map(({ verdict }) => verdict)).toEqual(["good"]);
  });

  it("isolates no roots of a polynomial beyond its budget", () => {
    const p = Array.from({ length: 70 }, (_, k) => Surd.from(k === 69 ? 1 : k === 0 ? -2 : 0));
    expect(() => isolate(p)).toThrow(/degree 69/);
  });
});
