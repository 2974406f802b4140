import { describe, expect, it } from "vitest";
import { TreeBuilder } from "../../src/refine/tree.js";

describe("TreeBuilder", () => {
  it("numbers nodes in the order in which they come, and keeps what it is given", () => {
    const tree = new TreeBuilder();
    const root = {
      from: undefined,
      kind: "label",
      operator: "Jz",
      size: 3,
      values: [],
      spreads: [],
      sizes: [1, 2],
    } as const;
    const inner = {
      ...root,
      from: { node: 0, child: 1 },
      kind: "energy",
      operator: "H0",
      size: 2,
      sizes: [2],
      crossings: [0.5],
    } as const;
    expect([tree.add(root), tree.add(inner), tree.add(root)]).toEqual([0, 1, 2]);
    expect(tree.nodes).toEqual([
      { id: 0, ...root },
      { id: 1, ...inner },
      { id: 2, ...root },
    ]);
    expect(new TreeBuilder().nodes).toEqual([]);
  });
});
