import { describe, expect, it } from "vitest";
import { sortedGroups } from "../../src/refine/groups.js";

const of = (re: readonly number[], im: readonly number[], cluster: number) =>
  sortedGroups(Float64Array.from(re), Float64Array.from(im), { hermitian: false, cluster });

describe("sortedGroups", () => {
  it("real values: by descending value, or ascending where asked", () => {
    const values = Float64Array.of(1, 3, 1.05, -2, 3);
    const zero = new Float64Array(5);
    const down = sortedGroups(values, zero, { hermitian: true, cluster: 0.1 });
    expect(down.map((group) => group.pairs)).toEqual([[1, 4], [0, 2], [3]]);
    expect(down[1]?.value.re).toBeCloseTo(1.025, 15);
    expect(down[1]?.spread).toBeCloseTo(0.025, 15);
    const up = sortedGroups(values, zero, { hermitian: true, cluster: 0.1, ascending: true });
    expect(up.map((group) => group.pairs)).toEqual([[3], [0, 2], [1, 4]]);
  });

  it("values linked only by others in between are told apart by the other part, and get their own middles", () => {
    // one chain of real parts; imaginary parts divide it, after which the real parts of the first three no longer link
    const groups = of([0, 0.1, 0.2, 0.1, 0], [1, -1, 1, -1, -1], 0.15);
    expect(groups.map((group) => group.pairs)).toEqual([[2], [0], [1, 3, 4]]);
    expect(groups.map(({ value }) => [value.re, value.im])).toEqual([
      [0.2, 1],
      [0, 1],
      [0.05, -1],
    ]);
    expect(groups.map(({ spread }) => spread)).toEqual([0, 0, 0.05]);
  });

  it("complex values by angle from 0", () => {
    const groups = of([0, -1, 2, 0, 1], [-1, 0, 0, 1, -1e-13], 1e-12);
    expect(groups.map((group) => group.pairs)).toEqual([[2], [4], [3], [1], [0]]);
  });
});
