// Stark effect: Griffiths and Schroeter, Introduction to Quantum Mechanics (2018), ch. 7; Bethe and Salpeter, Quantum
// Mechanics of One- and Two-Electron Atoms (1957): (3/2) n (n1 − n2) (from memory). Landé factors: Landé (1921); Condon
// and Shortley, The Theory of Atomic Spectra (1935). Strong field: the same, a mL mS, common practice.
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { bonds, components, dot, leafOf, lines, problemOf, product, proved, squareOfSum, textOf } from "./operators.js";

describe("hydrogen in an electric field, n = 2", () => {
  const h0 = ExactOperator.identity(4).scale("-1/8");
  const z = bonds(4, [[0, 2, -3]]);
  const a = bonds(4, [[0, 2, 1]]);
  const lz = ExactOperator.diagonal([0, 1, 0, -1]);

  it("splits into 3, 0, 0, −3 by Lz and the Runge–Lenz operator, good at all orders", () => {
    const proof = proved(problemOf(h0, z, { Lz: lz, Az: a }));
    expect(lines(proof).sort()).toEqual([
      "-1/8; Lz 0, Az 1; -3; 0",
      "-1/8; Lz 0, Az −1; 3; 0",
      "-1/8; Lz 1, Az 0; 0; 0",
      "-1/8; Lz −1, Az 0; 0; 0",
    ]);
    expect(components(leafOf(proof, "-1/8", { Az: "−1" }))).toEqual({ 0: "sqrt(1/2)", 2: "-sqrt(1/2)" });
    expect(proof.levels.map(({ verdict, degeneracy }) => [verdict, degeneracy])).toEqual([["good", 4]]);
  });

  it("finds that z breaks L² and lists the two elements ∓6", () => {
    const proof = proved(problemOf(h0, z, { L2: ExactOperator.diagonal([0, 2, 2, 2]), Lz: lz }));
    const [finding] = proof.audit.candidates;
    expect(finding?.conserved).toBe(false);
    expect(finding?.descriptive).toBe(true);
    const elements = finding?.withPerturbations[0]?.elements.map(({ row, col, value }) => [row, col, value.text()]);
    expect(elements).toEqual([
      [0, 2, "6"],
      [2, 0, "-6"],
    ]);
    // V finishes what Lz leaves together
    expect(leafOf(proof, "-1/8", { Lz: "1" }).safe.energies).toBe("all");
    const byV = proof.leaves.filter(({ shifts: [shift] }) => textOf(shift?.value) === "3");
    expect(byV.map(({ safe }) => [safe.energies, safe.states])).toEqual([[2, 0]]);
  });
});

describe("terms of light atoms in a magnetic field", () => {
  const terms: readonly (readonly [name: string, l: number, s: number, factors: Readonly<Record<string, string>>])[] = [
    ["²P", 2, 1, { "1/2": "2/3", "3/2": "4/3" }],
    ["³P", 2, 2, { "1": "3/2", "2": "3/2" }],
    ["²D", 4, 1, { "3/2": "4/5", "5/2": "6/5" }],
    ["²F", 6, 1, { "5/2": "6/7", "7/2": "8/7" }],
  ];

  it.each(terms)("has the Landé factors of %s as fractions", (_, twoL, twoS, factors) => {
    const [l, s] = product(twoL, twoS);
    if (l === undefined || s === undefined) throw new Error("two factors");
    const [jz, j2] = [l.z.plus(s.z), squareOfSum(l, s)];
    const proof = proved(problemOf(dot(l, s), l.z.plus(s.z.scale(2)), { Jz: jz, J2: j2 }));
    expect(proof.status).toBe("exact");
    expect(proof.audit.candidates.map(({ conserved }) => conserved)).toEqual([true, false]);
    for (const [j, factor] of Object.entries(factors)) {
      const found = proof.leaves.filter(({ vectors: [q], labels: [m] }) => {
        const square = q === undefined ? undefined : j2.apply(q).inner(q).over(q.squaredNorm);
        const [up, down] = j.split("/").map(Number);
        const value = (up ?? 0) / (down ?? 1);
        return square?.equals(value * (value + 1)) === true && m?.text === j;
      });
      expect(found).toHaveLength(1);
      const [shift] = found[0]?.shifts ?? [];
      expect(shift?.value.kind === "value" && shift.value.value.over(Surd.from(j)).text()).toBe(factor);
    }
  });

  it("lists [J², V] of ²P, of Frobenius norm 2√2", () => {
    const [l, s] = product(2, 1);
    if (l === undefined || s === undefined) throw new Error("two factors");
    const v = l.z.plus(s.z.scale(2));
    const proof = proved(problemOf(dot(l, s), v, { J2: squareOfSum(l, s) }));
    const { elements } = proof.audit.candidates[0]?.withPerturbations[0] ?? { elements: [] };
    const square = elements.reduce((sum, { value }) => sum.plus(value.squaredModulus()), Surd.zero);
    expect(square.text()).toBe("8");
  });

  it("has the strong-field shifts of ²P to second order", () => {
    const [l, s] = product(2, 1);
    if (l === undefined || s === undefined) throw new Error("two factors");
    const proof = proved(problemOf(l.z.plus(s.z.scale(2)), dot(l, s), { Jz: l.z.plus(s.z) }));
    expect(lines(proof)).toEqual([
      "-2; Jz −3/2; 1/2; 0",
      "-1; Jz −1/2; 0; -1/2",
      "0; Jz −1/2; -1/2; 1/2",
      "0; Jz 1/2; -1/2; -1/2",
      "1; Jz 1/2; 0; 1/2",
      "2; Jz 3/2; 1/2; 0",
    ]);
  });
});
