import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { proofBudget } from "../../src/prove/budget.js";
import { connectedParts } from "../../src/prove/connected.js";
import { Frame } from "../../src/prove/frame.js";
import { ValueGroups } from "../../src/prove/value-groups.js";

describe("Frame", () => {
  const frame = new Frame([ExactVector.from([1, 1, 0, 0]), ExactVector.from([0, 0, 1, 0])]);

  it("restricts an operator and sees whether it leads out", () => {
    const inside = ExactOperator.from([
      [0, 1, 1, 0],
      [1, 0, 1, 0],
      [1, 1, 0, 0],
      [0, 0, 0, 5],
    ]);
    const { matrix, invariant } = frame.matrix(inside, proofBudget());
    expect(invariant).toBe(true);
    expect(
      matrix.equals(
        ExactOperator.from([
          [1, 1],
          [2, 0],
        ]),
      ),
    ).toBe(true);
    const out = frame.matrix(inside.plus(ExactOperator.fromTriplets(4, [[0, 0, "1/1000000000000"]])), proofBudget());
    expect(out.invariant).toBe(false);
    expect(frame.matrix(ExactOperator.fromTriplets(4, [[3, 2, 1]]), proofBudget()).invariant).toBe(false);
  });

  it("finds the vectors that a vector meets, and its coefficients", () => {
    expect(frame.meeting(ExactVector.from([0, 1, 0, 1]))).toEqual([0]);
    const found = frame.coefficients(ExactVector.from([3, 1, 4, 9]));
    expect([...found].map(([k, x]) => [k, x.text()])).toEqual([
      [0, "2"],
      [1, "4"],
    ]);
  });
});

describe("connectedParts", () => {
  it("numbers parts by their first index", () => {
    const a = ExactOperator.fromTriplets(5, [
      [0, 3, 1],
      [3, 0, 1],
      [2, 4, 1],
      [4, 2, 1],
      [1, 1, 1],
    ]);
    expect(connectedParts(a)).toEqual([[0, 3], [1], [2, 4]]);
  });
});

describe("ValueGroups", () => {
  it("puts equal numbers together, however they were formed, and others apart, however close", () => {
    const groups = new ValueGroups<string>();
    groups.add(Surd.from("sqrt(6)"), "a");
    groups.add(Surd.from("sqrt(2)").times("sqrt(3)"), "b");
    groups.add(Surd.from("sqrt(6)").plus(Surd.ratio(1n, 10n ** 40n)), "c");
    expect(groups.list.map(({ items }) => items)).toEqual([["a", "b"], ["c"]]);
  });
});
