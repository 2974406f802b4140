// Clebsch–Gordan coefficients: Particle Data Group, Review of Particle Physics, table "Clebsch-Gordan coefficients,
// spherical harmonics, and d functions" (tables from memory), closed form DLMF 34.2.4. Recoupling: DLMF 34.4.2 and
// Edmonds, Angular Momentum in Quantum Mechanics (1957).
import { describe, expect, it } from "vitest";
import { Surd } from "../../src/exact/surd.js";
import type { ExactProof } from "../../src/prove/proof.js";
import { components, dot, leafOf, problemOf, product, proved, squareOfSum, textOf } from "./operators.js";

/** J, M, E1, then components by ket |m1 m2⟩, both descending, the first one slowest. */
type Row = readonly [j: string, m: string, shift: string, parts: Readonly<Record<number, string>>];

const TABLES: readonly (readonly [twoJ1: number, rows: readonly Row[]])[] = [
  [
    1,
    [
      ["1", "0", "1/4", { 1: "sqrt(1/2)", 2: "sqrt(1/2)" }],
      ["0", "0", "-3/4", { 1: "sqrt(1/2)", 2: "-sqrt(1/2)" }],
    ],
  ],
  [
    2,
    [
      ["3/2", "1/2", "1/2", { 1: "sqrt(1/3)", 2: "sqrt(2/3)" }],
      ["1/2", "1/2", "-1", { 1: "sqrt(2/3)", 2: "-sqrt(1/3)" }],
      ["3/2", "-1/2", "1/2", { 3: "sqrt(2/3)", 4: "sqrt(1/3)" }],
      ["1/2", "-1/2", "-1", { 3: "sqrt(1/3)", 4: "-sqrt(2/3)" }],
    ],
  ],
  [
    3,
    [
      ["2", "1", "3/4", { 1: "1/2", 2: "sqrt(3/4)" }],
      ["1", "1", "-5/4", { 1: "sqrt(3/4)", 2: "-1/2" }],
      ["2", "0", "3/4", { 3: "sqrt(1/2)", 4: "sqrt(1/2)" }],
      ["1", "0", "-5/4", { 3: "sqrt(1/2)", 4: "-sqrt(1/2)" }],
    ],
  ],
];

describe("coupling of an angular momentum with spin 1/2", () => {
  it.each(TABLES)("gives the tabulated coefficients for 2 j1 = %i, exactly and as text", (twoJ1, rows) => {
    const [a, b] = product(twoJ1, 1);
    if (a === undefined || b === undefined) throw new Error("two factors");
    const proof = proved(problemOf(a.z.plus(b.z), dot(a, b), { J2: squareOfSum(a, b) }));
    expect(proof.status).toBe("exact");
    for (const [j, m, shift, parts] of rows) {
      const leaf = leafOf(proof, m, { J2: j });
      expect(textOf(leaf.shifts[0]?.value)).toBe(shift);
      expect(leaf.safe).toEqual({ energies: "all", states: "all", limitedBy: "" });
      const found = components(leaf);
      const flip = found[Number(Object.keys(parts)[0])]?.startsWith("-") === true;
      const wanted = Object.entries(parts).map(([ket, text]) => [
        ket,
        flip ? Surd.from(text).negate() : Surd.from(text),
      ]);
      for (const [ket, value] of wanted as [string, Surd][]) {
        expect(found[Number(ket)]).toBe(value.text({ underRoot: true }));
      }
      expect(Object.keys(found)).toEqual(Object.keys(parts));
    }
  });

  it("couples j1 = j2 = 5/2 with the sums of squares that Clebsch–Gordan coefficients must have", () => {
    const [a, b] = product(5, 5);
    if (a === undefined || b === undefined) throw new Error("two factors");
    const proof = proved(problemOf(a.z.plus(b.z), dot(a, b), { J2: squareOfSum(a, b) }));
    expect(proof.leaves).toHaveLength(36);
    for (let ket = 0; ket < 36; ket++) {
      const sum = proof.leaves.reduce((total, { vectors: [q] }) => {
        return q === undefined ? total : total.plus(q.component(ket).squaredModulus().over(q.squaredNorm));
      }, Surd.zero);
      expect(sum.text()).toBe("1");
    }
  });
});

describe("recoupling of three spins 1/2", () => {
  const [a, b, c] = product(1, 1, 1);
  if (a === undefined || b === undefined || c === undefined) throw new Error("three factors");
  const total = squareOfSum(a, b, c);
  const basis = (pair: typeof total): ExactProof =>
    proved(problemOf(a.z.plus(b.z).plus(c.z), pair.plus(total.scale("0.37")), { S2: total, pair }));
  const [left, right] = [basis(squareOfSum(a, b)), basis(squareOfSum(b, c))];

  it.each([
    ["0", "0", "1/2"],
    ["0", "1", "sqrt(3)/2"],
    ["1", "0", "sqrt(3)/2"],
    ["1", "1", "1/2"],
  ])("has the overlap of J12 = %s with J23 = %s at J = M = 1/2", (j12, j23, overlap) => {
    const [q] = leafOf(left, "1/2", { S2: "1/2", pair: j12 }).vectors;
    const [r] = leafOf(right, "1/2", { S2: "1/2", pair: j23 }).vectors;
    if (q === undefined || r === undefined) throw new Error("a state without a vector");
    const square = q.inner(r).squaredModulus().over(q.squaredNorm).over(r.squaredNorm);
    expect(Surd.sqrt(square)?.equals(overlap)).toBe(true);
  });
});
