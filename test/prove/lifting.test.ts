// Two states coupled through a third: E = Δ/2 ∓ √(Δ²/4 + g1² + g2²) and 0, common practice. Three-level matrix:
// Griffiths and Schroeter (2018), problem 7.11 (from memory). Plane rotor: DLMF 28.6 with φ = 2z.
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { bonds, lines, problemOf, proved } from "./operators.js";

describe("a pair that is lifted at second order only", () => {
  const h0 = ExactOperator.diagonal([0, 0, 2]);
  const v = bonds(3, [
    [0, 2, "3/5"],
    [1, 2, "4/5"],
  ]);

  it("has a dark and a bright state by the dark-state projector", () => {
    const dark = ExactOperator.from([
      ["16/25", "-12/25", 0],
      ["-12/25", "9/25", 0],
      [0, 0, 0],
    ]);
    const proof = proved(problemOf(h0, v, { Pd: dark }));
    expect(lines(proof)).toEqual(["0; Pd 0; 0; -1/2", "0; Pd 1; 0; 0", "2; Pd 0; 0; 1/2"]);
    expect(proof.leaves.map(({ safe }) => safe.energies)).toEqual(["all", "all", "all"]);
  });

  it("finds both by the second-order operator, energies safe through the third order, states through none", () => {
    const proof = proved(problemOf(h0, v));
    expect(lines(proof)).toEqual(["0; ; 0; -1/2", "0; ; 0; 0", "2; ; 0; 1/2"]);
    expect(proof.leaves.map(({ safe }) => [safe.energies, safe.states])).toEqual([
      [3, 0],
      [3, 0],
      ["all", "all"],
    ]);
  });

  it("leaves them together where no second order is asked for", () => {
    const proof = proved(problemOf(h0, v), { depth: "first order" });
    expect(proof.leaves.map(({ kind, safe }) => [kind, safe.energies, safe.states])).toEqual([
      ["together", 1, "none"],
      ["state", "all", "all"],
    ]);
    expect(proof.levels.map(({ verdict }) => verdict)).toEqual(["good", "good"]);
  });
});

describe("a second-order operator that leaves the field", () => {
  it("leaves its states together, and the rest exact", () => {
    const cubic = ExactOperator.from([
      [0, 1, 0],
      [1, 0, 1],
      [0, 1, 1],
    ]);
    // V = [[0, C], [C, 0]]: W on the lower level is −C²/2
    const v = ExactOperator.from([
      [0, 1],
      [1, 0],
    ]).kron(cubic);
    const proof = proved(problemOf(ExactOperator.diagonal([0, 0, 0, 2, 2, 2]), v));
    expect(proof.status).toBe("bounded");
    expect(proof.leaves.map(({ kind, safe, second }) => [kind, safe.energies, safe.states, second])).toEqual([
      ["together", 1, "none", undefined],
      ["together", 1, "none", undefined],
    ]);
    expect(proof.levels.map(({ verdict }) => verdict)).toEqual(["good", "good"]);
    const node = proof.nodes.find(({ kind }) => kind === "second order");
    expect(node?.sentence).toContain("second-order operator has eigenvalues");
  });
});

describe("the three-level matrix with a doubly degenerate level", () => {
  const h0 = ExactOperator.diagonal([1, 1, 2]);
  const v = ExactOperator.from([
    [-1, 0, 0],
    [0, 0, 1],
    [0, 1, 0],
  ]);

  it("has E1 = −1, 0, 0 and E2 = 0, −1, 1", () => {
    const proof = proved(problemOf(h0, v, { A: ExactOperator.diagonal([1, 0, 0]) }));
    expect(lines(proof).sort()).toEqual(["1; A 0; 0; -1", "1; A 1; -1; 0", "2; A 0; 0; 1"]);
  });

  it("has its whole spectrum in the field at ε = 3/10", () => {
    const proof = proved(problemOf(h0.plus(v.scale("3/10")), ExactOperator.zero(3)));
    expect(lines(proof).map((line) => line.split(";")[0])).toEqual([
      "7/10",
      "3/2-1/5*sqrt(17/2)",
      "3/2+1/5*sqrt(17/2)",
    ]);
  });
});

describe("the plane rotor in a field", () => {
  const m = Array.from({ length: 9 }, (_, k) => 4 - k);
  const h0 = ExactOperator.diagonal(m.map((x) => x * x));
  const v = bonds(
    9,
    m.slice(1).map((_, k) => [k, k + 1, "1/2"] as const),
  );

  it("has 5/12 and −1/12 for m = ±1, with or without the reflection", () => {
    const flip = ExactOperator.permutation(m.map((_, k) => 8 - k));
    const named = proved(problemOf(h0, v, { flip }));
    expect(lines(named).filter((line) => line.startsWith("1;"))).toEqual([
      "1; flip −1; 0; -1/12",
      "1; flip +1; 0; 5/12",
    ]);
    const bare = proved(problemOf(h0, v));
    expect(lines(bare).filter((line) => line.startsWith("1;"))).toEqual(["1; ; 0; -1/12", "1; ; 0; 5/12"]);
    // m = ±2 stays together through the second order, with the number 1/30
    const two = bare.leaves.find(({ second, kind }) => kind === "together" && second?.[0]?.[0]?.text() === "1/30");
    expect([two?.safe.energies, two?.safe.states]).toEqual([2, "none"]);
  });
});
