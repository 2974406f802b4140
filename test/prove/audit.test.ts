import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { auditCommutators, Operator } from "../../src/index.js";
import { exactAudit } from "../../src/prove/audit.js";
import { smallSurd } from "../exact/arbitrary.js";
import { matrix } from "../exact/matrices.js";
import { bonds, problemOf } from "./operators.js";

describe("exactAudit", () => {
  it("agrees with the floating commutators of random surd matrices", () => {
    const hermitian = (n: number): fc.Arbitrary<ExactOperator> => matrix(n, smallSurd).map((a) => a.plus(a.adjoint()));
    const floating = (operator: ExactOperator): Operator => {
      const { csr, radius } = operator.toFloating();
      return Operator.fromCsr(csr, radius);
    };
    fc.assert(
      fc.property(
        fc.integer({ min: 2, max: 5 }).chain((n) => fc.tuple(hermitian(n), hermitian(n), hermitian(n))),
        ([h0, v, a]) => {
          const [exact] = exactAudit(problemOf(h0, v, { A: a })).candidates;
          const [found] = auditCommutators({
            h0: floating(h0),
            v: floating(v),
            candidates: { A: floating(a) },
          }).candidates;
          if (exact === undefined || found === undefined) throw new Error("one candidate");
          for (const [left, right] of [
            [exact.withH0, found.withH0],
            [exact.withPerturbations[0], found.withPerturbations[0]],
          ] as const) {
            if (left === undefined || right === undefined) throw new Error("one commutator");
            if (left.vanishes) expect(right.verdict).not.toBe("broken");
            if (right.verdict === "broken") expect(left.vanishes).toBe(false);
            const norm = Math.sqrt(
              left.elements.reduce((sum, { value }) => sum + value.squaredModulus().toNumber(), 0),
            );
            expect(Math.abs(norm - right.norm)).toBeLessThan(1e-12 * (1 + norm));
          }
        },
      ),
      { seed: 44, numRuns: 60 },
    );
  });

  it("lists elements by exact size where their doubles are equal", () => {
    const h0 = ExactOperator.diagonal([0, 1, "2", "3"]);
    const tiny = "1/10000000000000000000000000";
    const v = bonds(4, [
      [0, 1, 1],
      [2, 3, `1+${tiny}`],
    ]);
    const [finding] = exactAudit(problemOf(h0, v, { A: h0 })).candidates;
    expect(finding?.withPerturbations[0]?.elements.map(({ row, col }) => [row, col])).toEqual([
      [2, 3],
      [3, 2],
      [0, 1],
      [1, 0],
    ]);
    expect(finding?.withPerturbations[0]?.count).toBe(4);
  });

  it("knows kinds, orders and what is no candidate", () => {
    const one = ExactOperator.identity(3);
    const turn = ExactOperator.permutation([1, 2, 0]);
    const { candidates, pairs } = exactAudit(
      problemOf(one, one, {
        hermitian: turn.plus(turn.adjoint()),
        unitary: turn,
        normal: turn.scale(2),
        raising: ExactOperator.fromTriplets(3, [[0, 1, 1]]),
        rotation: ExactOperator.diagonal(["3/5+4/5*i", 1, 1]),
      }),
    );
    expect(candidates.map(({ kind, order, conserved }) => [kind, order, conserved])).toEqual([
      ["hermitian", undefined, true],
      ["unitary", 3, true],
      ["normal", undefined, true],
      ["general", undefined, false],
      ["unitary", undefined, true],
    ]);
    expect(pairs.map(({ left, right, vanishes }) => `${left} ${right} ${vanishes}`)).toEqual([
      "hermitian unitary true",
      "hermitian normal true",
      "hermitian rotation false",
      "unitary normal true",
      "unitary rotation false",
      "normal rotation false",
    ]);
  });
});
