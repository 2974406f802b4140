import { describe, expect, it } from "vitest";
import { exactEigenspace } from "../../src/exact/eigenspace.js";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { coupled } from "./matrices.js";

const units = (n: number): ExactVector[] => Array.from({ length: n }, (_, k) => ExactVector.unit(n, k));

describe("exact eigenspaces", () => {
  const { square, z } = coupled(3, 2);

  it("fill the space, are orthogonal, and hold eigenvectors", () => {
    const all = [1, 3, 5].flatMap((twoJ) => {
      const value = Surd.ratio(BigInt(twoJ * (twoJ + 2)), 4n);
      const vectors = exactEigenspace(square, value, units(12));
      expect(vectors).toHaveLength(twoJ + 1);
      for (const v of vectors) expect(square.apply(v).equals(v.scale(value))).toBe(true);
      return vectors;
    });
    all.forEach((a, j) => {
      for (const b of all.slice(0, j)) expect(a.inner(b).isZero).toBe(true);
    });
  });

  it("of one operator inside those of another are coupled states", () => {
    const level = exactEigenspace(square, "3/4", units(12));
    const [state, ...none] = exactEigenspace(z, "1/2", level);
    // ⟨3/2 3/2 1 −1|1/2 1/2⟩ = √(1/2), −√(1/3), √(1/6): Condon and Shortley's values, from memory
    expect(none).toEqual([]);
    expect(state?.normalised()?.values.map((x) => x.text({ underRoot: true }))).toEqual([
      "sqrt(1/2)",
      "-sqrt(1/3)",
      "sqrt(1/6)",
    ]);
    expect(exactEigenspace(z, "5/2", level)).toEqual([]);
  });

  it("ask for an invariant space and take no false value", () => {
    expect(exactEigenspace(square, "3/4+10^-30", units(12))).toEqual([]);
    const flip = ExactOperator.from([
      [0, 1],
      [1, 0],
    ]);
    expect(() => exactEigenspace(flip, 1, [ExactVector.unit(2, 0)])).toThrow(
      expect.objectContaining({ code: "option" }),
    );
    expect(() => exactEigenspace(flip, 1, [])).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => exactEigenspace(square, "3/4", units(12), { steps: 5 })).toThrow(
      expect.objectContaining({ code: "budget" }),
    );
    expect(() => ExactVector.combination(units(2), ExactVector.unit(3, 0))).toThrow(
      expect.objectContaining({ code: "shape" }),
    );
  });

  it("are complex where they must be", () => {
    const turn = ExactOperator.permutation([1, 2, 0]);
    const [v] = exactEigenspace(turn, "-1/2+i*sqrt(3)/2", units(3));
    expect(v?.normalised()?.values.map(String)).toEqual(["1/sqrt(3)", "-1/(2*sqrt(3))-i/2", "-1/(2*sqrt(3))+i/2"]);
  });
});
