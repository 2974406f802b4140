// Asymmetric rotor: King, Hainer and Cross, J. Chem. Phys. 11, 27 (1943); Landau and Lifshitz, Quantum Mechanics
// (closed forms from memory). Linear rotor in a field: Kronig, Proc. Natl. Acad. Sci. 12, 488 (1926); Townes and
// Schawlow, Microwave Spectroscopy (1955).
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { bonds, leafOf, problemOf, proved, spin, textOf } from "./operators.js";

describe("the asymmetric rotor of water", () => {
  const [a, b, c] = ["27.877", "14.512", "9.285"].map((text) => Surd.from(text)) as [Surd, Surd, Surd];
  const rotor = (j: number): { h0: ExactOperator; v: ExactOperator; ra: ExactOperator; rb: ExactOperator } => {
    const { z, plus, square } = spin(2 * j);
    const mean = b.plus(c).over(2);
    const up = plus.times(plus);
    // exp(−iπ Ja) is (−1)^K; exp(−iπ Jb) sends K to −K with (−1)^J
    const ra = ExactOperator.diagonal(Array.from({ length: 2 * j + 1 }, (_, k) => ((j - k) % 2 === 0 ? 1 : -1)));
    const sign = j % 2 === 0 ? 1 : -1;
    const rb = ExactOperator.permutation(
      Array.from({ length: 2 * j + 1 }, (_, k) => 2 * j - k),
      Array.from({ length: 2 * j + 1 }, () => sign),
    );
    return {
      h0: square.scale(mean).plus(z.times(z).scale(a.minus(mean))),
      v: up.plus(up.adjoint()).scale(b.minus(c).over(4)),
      ra,
      rb,
    };
  };

  it.each([
    ["+1", "−1", "23.797"],
    ["−1", "+1", "37.162"],
    ["−1", "−1", "42.389"],
  ])("has J = 1 of species (%s, %s) at %s cm⁻¹, to the last decimal", (ra, rb, energy) => {
    const { h0, v, ra: first, rb: second } = rotor(1);
    const proof = proved(problemOf(h0, v, { Ra: first, Rb: second }));
    const leaf = proof.leaves.find(({ labels: [x, y] }) => x?.text === ra && y?.text === rb);
    const [shift] = leaf?.shifts ?? [];
    if (leaf?.energy.kind !== "value" || shift?.value.kind !== "value") throw new Error("not exact");
    expect(leaf.energy.value.plus(shift.value.value).equals(energy)).toBe(true);
  });

  it("has the K = 1 pair of J = 2 to first order, and 2_20 and 2_02 with their root from the whole matrix", () => {
    const { h0, v, ra, rb } = rotor(2);
    const proof = proved(problemOf(h0, v, { Ra: ra, Rb: rb }));
    const sums = proof.leaves.flatMap(({ energy, shifts: [shift] }) =>
      energy.kind === "value" && shift?.value.kind === "value" ? [energy.value.plus(shift.value.value)] : [],
    );
    for (const energy of ["79.529", "95.21"]) expect(sums.some((sum) => sum.equals(energy))).toBe(true);
    const whole = proved(problemOf(h0.plus(v), ExactOperator.zero(5), { Ra: ra, Rb: rb }));
    const root = Surd.sqrt(
      b
        .minus(c)
        .power(2)
        .plus(a.minus(c).times(a.minus(b))),
    );
    const middle = a.plus(b).plus(c).times(2);
    const energies = whole.leaves.map(({ energy }) => textOf(energy));
    for (const sign of [2, -2]) expect(energies).toContain(middle.plus(root?.times(sign) ?? 0).text());
    expect(middle.plus(root?.times(2) ?? 0).toNumber()).toBeCloseTo(136.562671999, 9);
  });
});

describe("the linear rotor in a field", () => {
  const most = 8;
  const kets = Array.from({ length: most + 1 }, (_, j) =>
    Array.from({ length: 2 * j + 1 }, (_, k) => [j, j - k] as const),
  ).flat();
  const place = (j: number, m: number): number => kets.findIndex(([a, b]) => a === j && b === m);
  const v = bonds(
    kets.length,
    kets.flatMap(([j, m]) => {
      if (j === 0 || Math.abs(m) > j - 1) return [];
      const square = Surd.ratio(BigInt(j * j - m * m), BigInt((2 * j - 1) * (2 * j + 1)));
      return [[place(j - 1, m), place(j, m), Surd.sqrt(square)?.negate() ?? 0] as const];
    }),
  );
  const h0 = ExactOperator.diagonal(kets.map(([j]) => j * (j + 1)));
  const proof = proved(problemOf(h0, v, { Jz: ExactOperator.diagonal(kets.map(([, m]) => m)) }));

  it("has the second-order Stark effect as fractions, J = 0 … 4", () => {
    for (let j = 0; j <= 4; j++) {
      for (let m = 0; m <= j; m++) {
        const closed =
          j === 0
            ? Surd.from("-1/6")
            : Surd.from(j * (j + 1) - 3 * m * m).over(2 * j * (j + 1) * (2 * j - 1) * (2 * j + 3));
        const leaf = leafOf(proof, String(j * (j + 1)), { Jz: String(m) });
        expect(leaf.second?.[0]?.[0]?.equals(closed), `J = ${j}, M = ${m}`).toBe(true);
        expect(leaf.safe).toEqual({ energies: "all", states: "all", limitedBy: "" });
      }
    }
  });
});
