// d orbitals: Bethe, Ann. Phys. 3, 133 (1929); Ballhausen, Introduction to Ligand Field Theory (1962); 6 and −4 Dq, and
// −2.67 and 1.78 Dq for the tetrahedron, seen in a public copy of Day and Selbin, Theoretical Inorganic Chemistry
// (1962); the cube from memory. Zero-field splitting: Abragam and Bleaney, Electron Paramagnetic Resonance of
// Transition Ions (1970), from memory.
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { components, leafOf, lines, problemOf, proved, spin } from "./operators.js";

const OCTAHEDRON = ExactOperator.from([
  [1, 0, 0, 0, 5],
  [0, -4, 0, 0, 0],
  [0, 0, 6, 0, 0],
  [0, 0, 0, -4, 0],
  [5, 0, 0, 0, 1],
]);

describe("a d electron in cubic fields", () => {
  const k = ExactOperator.diagonal([-2, 0, 2, 0, -2]);
  const c2x = ExactOperator.permutation([4, 3, 2, 1, 0]);
  const h0 = ExactOperator.zero(5);

  it.each([
    ["octahedron", "1", "6", "-4"],
    ["tetrahedron", "-4/9", "-8/3", "16/9"],
    ["cube", "-8/9", "-16/3", "32/9"],
  ])("has the levels of the %s by the labels of K and C2x", (_, ratio, e, t) => {
    const proof = proved(problemOf(h0, OCTAHEDRON.scale(ratio), { K: k, C2x: c2x }));
    expect(lines(proof).sort()).toEqual(
      [
        `0; K −2, C2x −1; ${t}; 0`,
        `0; K −2, C2x +1; ${e}; 0`,
        `0; K 0, C2x −1; ${t}; 0`,
        `0; K 0, C2x +1; ${t}; 0`,
        `0; K 2, C2x +1; ${e}; 0`,
      ].sort(),
    );
    expect(proof.leaves.every(({ safe }) => safe.energies === "all" && safe.states === "all")).toBe(true);
    const xy = leafOf(proof, "0", { K: "−2", C2x: "−1" });
    expect(components(xy)).toEqual({ 0: "sqrt(1/2)", 4: "-sqrt(1/2)" });
  });

  it("finds that Lz is broken by 20√2 in all, and which elements do it", () => {
    const proof = proved(problemOf(h0, OCTAHEDRON, { Lz: ExactOperator.diagonal([2, 1, 0, -1, -2]) }));
    const [commutator] = proof.audit.candidates[0]?.withPerturbations ?? [];
    expect(commutator?.elements.map(({ row, col, value }) => [row, col, value.text()])).toEqual([
      [0, 4, "20"],
      [4, 0, "-20"],
    ]);
  });
});

describe("zero-field splitting of spin 1", () => {
  const { x, y, z } = spin(2);
  const axial = z.times(z).minus(ExactOperator.identity(3).scale("2/3"));
  const rhombic = x.times(x).minus(y.times(y)).scale("1/10");

  it("splits m = ±1 into D/3 ± E by the two-fold rotation about x", () => {
    // exp(−iπ Sx) = 1 − 2 Sx² for spin 1
    const c2x = ExactOperator.identity(3).minus(x.times(x).scale(2));
    const proof = proved(problemOf(axial, rhombic, { C2x: c2x }));
    expect(lines(proof)).toEqual(["-2/3; C2x −1; 0; 0", "1/3; C2x −1; 1/10; 0", "1/3; C2x +1; -1/10; 0"]);
    // T_x, with Sx T_x = 0, has D/3 − E
    const [tx] = leafOf(proof, "1/3", { C2x: "+1" }).vectors;
    expect(tx !== undefined && x.apply(tx).isZero).toBe(true);
  });

  it("has E2 = ±1/(2E) in a field along z", () => {
    const proof = proved(problemOf(axial.plus(rhombic), z));
    expect(lines(proof)).toEqual(["-2/3; ; 0; 0", "7/30; ; 0; -5", "13/30; ; 0; 5"]);
    expect(proof.leaves[2]?.energy).toMatchObject({ kind: "value", value: Surd.from("1/3+1/10") });
  });

  it("is not told apart by Sz² alone: V has to finish", () => {
    const proof = proved(problemOf(axial, rhombic, { Sz2: z.times(z) }));
    expect(proof.leaves.map(({ safe }) => safe.energies)).toEqual(["all", 2, 2]);
    const labels = proved(problemOf(axial, rhombic, { Sz2: z.times(z) }), { depth: "labels" });
    expect(labels.levels.map(({ verdict }) => verdict)).toEqual(["good", "not good"]);
    expect(labels.levels[1]?.couplings.map(({ squaredModulus }) => squaredModulus.text())).toEqual(["1/100"]);
  });
});
