import { describe, expect, it } from "vitest";
import { clusterSorted } from "../../src/numerics/cluster.js";

describe("clusterSorted", () => {
  it("joins neighbours within the tolerance, the tolerance itself included", () => {
    expect([...clusterSorted([0, 0.5, 1, 2.5, 3, 9], 0.5)]).toEqual([0, 3, 5, 6]);
    expect([...clusterSorted(Float64Array.of(-1, -1, -1 + 2 ** -50), 0)]).toEqual([0, 2, 3]);
  });

  it("lets a chain grow longer than the tolerance", () => {
    expect([...clusterSorted([0, 1, 2, 3], 1)]).toEqual([0, 4]);
  });

  it("handles lists of none and one", () => {
    expect([...clusterSorted([], 1)]).toEqual([0]);
    expect([...clusterSorted([4], 0)]).toEqual([0, 1]);
  });
});
