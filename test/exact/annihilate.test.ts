import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { annihilates, projectorTraces, spectralPart } from "../../src/exact/annihilate.js";
import { exactKernel } from "../../src/exact/elimination.js";
import { orthogonalise } from "../../src/exact/gram-schmidt.js";
import { ExactOperator } from "../../src/exact/operator.js";
import { represent } from "../../src/exact/represent.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { smallSurd } from "./arbitrary.js";
import { coupled, vector } from "./matrices.js";

const units = (n: number): ExactVector[] => Array.from({ length: n }, (_, k) => ExactVector.unit(n, k));
const levels = (...twice: number[]): Surd[] => twice.map((twoJ) => Surd.ratio(BigInt(twoJ * (twoJ + 2)), 4n));

describe("annihilating products", () => {
  const { square, z } = coupled(3, 2);

  it("prove the eigenvalues of J² and say no to a missing or a wrong one", () => {
    expect(annihilates(square, levels(1, 3, 5), units(square.n))).toEqual({ kind: "annihilated" });
    const short = annihilates(square, levels(3, 5), units(square.n));
    expect(short.kind).toBe("left over");
    if (short.kind === "left over") {
      // what is left has j = 1/2
      expect(short.residual.isZero).toBe(false);
      expect(square.apply(short.residual).equals(short.residual.scale("3/4"))).toBe(true);
    }
    const near = [...levels(1, 3), Surd.from("35/4+10^-30")];
    expect(annihilates(square, near, units(square.n)).kind).toBe("left over");
    // a value too many does no harm here: whether it occurs is for the traces to say
    expect(annihilates(square, levels(1, 3, 5, 7), units(square.n)).kind).toBe("annihilated");
  });

  it("work on a part of the space", () => {
    const top = [ExactVector.unit(square.n, 0)];
    expect(annihilates(square, levels(5), top).kind).toBe("annihilated");
    expect(annihilates(square, levels(3), top)).toMatchObject({ kind: "left over", column: 0 });
    expect(annihilates(square, [], []).kind).toBe("annihilated");
    expect(annihilates(square, [], top).kind).toBe("left over");
  });

  it("give multiplicities as traces of projectors, 0 for a value that does not occur", () => {
    expect(projectorTraces(square, levels(1, 3, 5)).map(String)).toEqual(["2", "4", "6"]);
    expect(projectorTraces(square, levels(1, 3, 5, 7)).map(String)).toEqual(["2", "4", "6", "0"]);
    expect(
      projectorTraces(
        z,
        ["5/2", "3/2", "1/2", "-1/2", "-3/2", "-5/2"].map((x) => Surd.from(x)),
      ).map(String),
    ).toEqual(["1", "2", "3", "3", "2", "1"]);
    expect(() => projectorTraces(square, levels(1, 3, 1))).toThrow(expect.objectContaining({ code: "option" }));
  });

  it("project on eigenspaces", () => {
    const values = levels(1, 3, 5);
    fc.assert(
      fc.property(vector(square.n, smallSurd), (v) => {
        const parts = values.map((_, k) => spectralPart(square, values, k, v));
        expect(parts.reduce((sum, part) => sum.plus(part)).equals(v)).toBe(true);
        parts.forEach((part, k) => {
          expect(square.apply(part).equals(part.scale(values[k] ?? 0))).toBe(true);
        });
      }),
      { seed: 151, numRuns: 20 },
    );
    expect(() => spectralPart(square, values, 3, ExactVector.unit(12, 0))).toThrow(
      expect.objectContaining({ code: "option" }),
    );
    expect(() => spectralPart(square, levels(1, 1), 0, ExactVector.unit(12, 0))).toThrow(
      expect.objectContaining({ code: "option" }),
    );
  });

  it("stop within a budget", () => {
    expect(() => annihilates(square, levels(1, 3, 5), units(square.n), { steps: 3 })).toThrow(
      expect.objectContaining({ code: "budget" }),
    );
  });
});

describe("the matrix in an invariant space", () => {
  const { square, z, plus } = coupled(3, 2);
  const level = exactKernel(square.minus(ExactOperator.identity(12).scale("15/4")));
  const { vectors } = orthogonalise(level);

  it("has the traces and products of the operator there", () => {
    const [a, b] = [represent(z, vectors), represent(plus, vectors)];
    if (a.kind !== "invariant" || b.kind !== "invariant") throw new Error("the level is invariant");
    expect(a.matrix.trace().isZero).toBe(true);
    expect(a.matrix.times(a.matrix).trace().text()).toBe("5");
    expect(a.matrix.commutator(b.matrix).equals(b.matrix)).toBe(true);
    const j2 = represent(square, vectors);
    expect(j2.kind === "invariant" && j2.matrix.equals(ExactOperator.identity(4).scale("15/4"))).toBe(true);
  });

  it("says where an operator leaves the space", () => {
    const flip = ExactOperator.permutation([1, 0, ...Array.from({ length: 10 }, (_, k) => k + 2)]);
    const left = represent(flip, vectors);
    expect(left.kind).toBe("leaves");
    if (left.kind === "leaves") {
      for (const v of vectors) expect(v.inner(left.outside).isZero).toBe(true);
      expect(left.outside.isZero).toBe(false);
    }
  });

  it("asks for orthogonal vectors", () => {
    const [u, v] = [ExactVector.from([1, 0]), ExactVector.from([1, 1])];
    const two = ExactOperator.identity(2);
    expect(() => represent(two, [u, v])).toThrow(expect.objectContaining({ code: "option" }));
    expect(() => represent(two, [u, ExactVector.from([0, 0])])).toThrow(expect.objectContaining({ code: "option" }));
    expect(() => represent(two, [])).toThrow(expect.objectContaining({ code: "shape" }));
  });
});
