import { describe, expect, it } from "vitest";
import type { PreparedProblem } from "../../src/audit/problem.js";
import { stackRows } from "../../src/numerics/stack.js";
import { Operator } from "../../src/operator/operator.js";
import { formLevels } from "../../src/refine/levels.js";
import { type Depth, type Leaf, type ResolvedLevel, resolveLevel } from "../../src/refine/resolve.js";
import { buildSectors } from "../../src/refine/sectors.js";
import { TreeBuilder, type TreeNode } from "../../src/refine/tree.js";
import { distance, naiveOf, naiveProduct } from "../operator/naive.js";
import {
  csr,
  hermitian,
  type naive,
  naiveOfCsr,
  operatorOf,
  prepare,
  random,
  residual,
  restricted,
  transposed,
} from "./support.js";

interface Resolved extends ResolvedLevel {
  readonly nodes: readonly TreeNode[];
  /** Vectors over the kets, leaf by leaf of every part. */
  readonly leaves: readonly { readonly leaf: Leaf; readonly vectors: ReturnType<typeof naive> }[];
}

function resolve(
  problem: PreparedProblem,
  depth: Depth,
  backbone: readonly number[] = [],
  others: readonly number[] = [],
  place = 0,
): Resolved {
  const tree = new TreeBuilder();
  // the other conserved candidates wait for the level where `others` says so
  const { sectors } = buildSectors(problem, backbone, [], tree);
  const levels = formLevels(sectors, 1e-9, "all");
  const level = levels.studied[place];
  if (level === undefined) throw new Error("no such level");
  const resolved = resolveLevel(problem, sectors, levels, level, others, depth, tree);
  const leaves = resolved.parts.flatMap((part) => {
    const frame = naiveOfCsr(sectors[part.sector]?.frame ?? csr([], problem.n));
    const own = [...part.indices].map((i) => frame[i] ?? []);
    return part.leaves.map((leaf) => ({ leaf, vectors: naiveProduct(naiveOfCsr(leaf.rows), own) }));
  });
  return { ...resolved, nodes: tree.nodes, leaves };
}

const sizes = ({ leaves }: Resolved): number[] => leaves.map(({ leaf }) => leaf.rows.rows);

/** The kinds of nodes from the root to a leaf. */
function path({ leaf }: { leaf: Leaf }, nodes: readonly TreeNode[]): string[] {
  const kinds: string[] = [];
  for (let at: Leaf["from"] | undefined = leaf.from; at !== undefined; at = nodes[at.node]?.from) {
    kinds.unshift(nodes[at.node]?.kind ?? "");
    expect(nodes[at.node]?.sizes[at.child]).toBeGreaterThanOrEqual(leaf.rows.rows);
  }
  return kinds;
}

// kets 0, 1, 2 at energy 0: V shifts the first, and couples the second to a distant ket
const three = prepare({
  h0: Operator.diagonal([0, 0, 0, 1, 2]),
  v: [
    [1, 0, 0, 0, 0],
    [0, 0, 0, 0.5, 0],
    [0, 0, 0, 0, 0],
    [0, 0.5, 0, 0, 0],
    [0, 0, 0, 0, 0],
  ],
});

describe("how far a level is resolved", () => {
  it("labels: the states stay together, as they were given", () => {
    const found = resolve(three, "labels");
    expect(sizes(found)).toEqual([3]);
    expect(found.leaves[0]?.leaf.second).toBeUndefined();
    expect(path(found.leaves[0] as Resolved["leaves"][0], found.nodes)).toEqual(["energy"]);
    expect(found.leaves[0]?.vectors).toEqual(naiveOf(Operator.identity(5)).slice(0, 3));
  });

  it("first order: V tells apart what it shifts differently, by descending shift", () => {
    const found = resolve(three, "first order");
    expect(sizes(found)).toEqual([1, 2]);
    expect(found.nodes.at(-1)).toMatchObject({ kind: "perturbation", operator: "V", size: 3, sizes: [1, 2] });
    expect(found.nodes.at(-1)?.values).toEqual([
      { re: 1, im: 0 },
      { re: 0, im: 0 },
    ]);
    expect(found.leaves.every(({ leaf }) => leaf.second === undefined)).toBe(true);
  });

  it("second order and full: W tells apart the rest, and only what is still together", () => {
    for (const depth of ["second order", "full"] as const) {
      const found = resolve(three, depth);
      expect(sizes(found)).toEqual([1, 1, 1]);
      expect(found.leaves.map(({ leaf }) => leaf.second)).toEqual([undefined, 0, -0.25]);
      expect(found.leaves.map((leaf) => path(leaf, found.nodes))).toEqual([
        ["energy", "perturbation"],
        ["energy", "perturbation", "second order"],
        ["energy", "perturbation", "second order"],
      ]);
      expect(found.nodes.filter(({ kind }) => kind === "second order")).toMatchObject([
        { operator: "W", size: 2, sizes: [1, 1] },
      ]);
    }
  });

  it("W is only asked for in the block where V is scalar, however the block's vectors came about", () => {
    for (let seed = 1; seed < 6; seed++) {
      const next = random(seed);
      const coupling = hermitian(8, next, seed % 2 === 0);
      const v = coupling.map((row, i) =>
        row.map((x, j) => (i < 5 && j < 5 ? { re: i === j && i < 2 ? 1 : 0, im: 0 } : x)),
      );
      const problem = prepare({ h0: Operator.diagonal([0, 0, 0, 0, 0, 1, 2, 4]), v: operatorOf(v) });
      const found = resolve(problem, "full");
      expect(sizes(found)).toEqual([1, 1, 1, 1, 1]);
      const w = naiveProduct(
        v.slice(0, 5).map((row) => row.slice(5).map((x, k) => ({ re: -x.re / 2 ** k, im: -x.im / 2 ** k }))),
        v.slice(5).map((row) => row.slice(0, 5)),
      );
      const vectors = found.leaves.map(({ vectors }) => (vectors[0] ?? []).slice(0, 5));
      const inside = restricted(w, vectors);
      const first = restricted(
        v.slice(0, 5).map((row) => row.slice(0, 5)),
        vectors,
      );
      for (let a = 0; a < 5; a++) {
        expect(first[a]?.[a]?.re).toBeCloseTo(a < 2 ? 1 : 0, 13);
        expect(inside[a]?.[a]?.re).toBeCloseTo(found.leaves[a]?.leaf.second ?? Number.NaN, 13);
        for (let b = 0; b < 5; b++) {
          if (a !== b) expect(Math.hypot(first[a]?.[b]?.re ?? 1, first[a]?.[b]?.im ?? 1)).toBeLessThan(1e-14);
          if (a !== b && a < 2 === b < 2)
            expect(Math.hypot(inside[a]?.[b]?.re ?? 1, inside[a]?.[b]?.im ?? 1)).toBeLessThan(1e-14);
        }
      }
    }
  });

  it("dark and bright states through a distant third: blank at first order, told apart at second", () => {
    const problem = prepare({
      h0: Operator.diagonal([0, 0, 2]),
      v: [
        [0, 0, 0.6],
        [0, 0, 0.8],
        [0.6, 0.8, 0],
      ],
    });
    expect(sizes(resolve(problem, "labels"))).toEqual([2]);
    const blank = resolve(problem, "first order");
    expect(sizes(blank)).toEqual([2]);
    // V is scalar there, so the kets themselves serve
    expect(
      distance(
        naiveProduct(transposed(blank.leaves[0]?.vectors ?? []), blank.leaves[0]?.vectors ?? []),
        naiveOf(Operator.diagonal([1, 1, 0])),
      ),
    ).toBeLessThan(1e-15);
    const found = resolve(problem, "second order");
    expect(sizes(found)).toEqual([1, 1]);
    expect(found.leaves[0]?.leaf.second).toBeCloseTo(0, 15);
    expect(found.leaves[1]?.leaf.second).toBeCloseTo(-0.5, 15);
    const [dark, bright] = found.leaves.map(({ vectors }) => vectors[0]?.map(({ re }) => re) ?? []);
    expect(Math.abs((dark?.[0] ?? 0) * 0.6 + (dark?.[1] ?? 0) * 0.8)).toBeLessThan(1e-15);
    expect(Math.abs((bright?.[0] ?? 0) * 0.6 + (bright?.[1] ?? 0) * 0.8)).toBeCloseTo(1, 15);
  });
});

describe("several perturbations", () => {
  const h0 = Operator.diagonal([0, 0, 0, 5]);
  const [a, b] = [
    Operator.diagonal([1, 1, 0, 0]),
    Operator.from([
      [0, 1, 0, 0],
      [1, 0, 0, 0],
      [0, 0, 0, 1],
      [0, 0, 1, 0],
    ]),
  ];

  it("each refines what those before it left, and W is left alone", () => {
    const found = resolve(prepare({ h0, v: { a, b } }), "full");
    expect(sizes(found)).toEqual([1, 1, 1]);
    expect(found.leaves.map((leaf) => path(leaf, found.nodes))).toEqual(
      new Array(3).fill(["energy", "perturbation", "perturbation"]),
    );
    expect(
      found.nodes
        .slice(1)
        .map(({ operator, size, values }) => [operator, size, values.map(({ re }) => +re.toFixed(12))]),
    ).toEqual([
      ["a", 3, [1, 0]],
      ["b", 2, [1, -1]],
      ["b", 1, [0]],
    ]);
    expect(found.parts[0]?.outward).toHaveLength(2);
    expect(found.parts[0]?.outward[1]?.first).toEqual({ ratio: 0.2, level: 1 });
    expect(found.leaves.every(({ leaf }) => leaf.second === undefined)).toBe(true);
  });

  it("what they leave together stays together", () => {
    const pull = Operator.from([
      [0, 0, 0, 1],
      [0, 0, 0, 0],
      [0, 0, 0, 0],
      [1, 0, 0, 0],
    ]);
    const found = resolve(prepare({ h0, v: { pull, none: Operator.zero(4) } }), "full");
    expect(sizes(found)).toEqual([3]);
    expect(found.nodes.some(({ kind }) => kind === "second order")).toBe(false);
    expect(sizes(resolve(prepare({ h0, v: pull }), "full"))).toEqual([2, 1]);
  });

  it("in the order in which they were given", () => {
    const found = resolve(prepare({ h0, v: { b, a } }), "full");
    expect(found.nodes.slice(1).map(({ operator, sizes: list }) => [operator, list])).toEqual([
      ["b", [1, 1, 1]],
      ["a", [1]],
      ["a", [1]],
      ["a", [1]],
    ]);
  });
});

describe("conserved candidates inside a level", () => {
  // x and z of a spin do not commute with each other, but all of H0 = 0 and V = 0 conserves them
  const reflection = Operator.permutation([1, 0, 2, 4, 3]);
  const problem = (v: Operator): PreparedProblem =>
    prepare({
      h0: Operator.diagonal([0, 0, 0, 1, 1]),
      v,
      candidates: {
        reflection,
        tilt: Operator.from([
          [1, 1, 0, 0, 0],
          [1, 1, 0, 0, 0],
          [0, 0, 2, 0, 0],
          [0, 0, 0, 0, 0],
          [0, 0, 0, 0, 0],
        ]),
        leaky: Operator.permutation([3, 1, 2, 0, 4]),
      },
    });

  it("refine what they map into itself, before V, and become labels of the states", () => {
    const found = resolve(
      problem(
        Operator.from([
          [2, 1, 0, 0, 0],
          [1, 2, 0, 0, 0],
          [0, 0, 7, 0, 0],
          [0, 0, 0, 0, 0],
          [0, 0, 0, 0, 0],
        ]),
      ),
      "first order",
      [],
      [0, 1, 2],
    );
    expect(sizes(found)).toEqual([1, 1, 1]);
    expect(
      found.leaves.map(({ leaf }) => leaf.labels.map(({ candidate, value }) => [candidate, +value.re.toFixed(12) + 0])),
    ).toEqual([
      [
        [0, 1],
        [1, 2],
      ],
      [
        [0, 1],
        [1, 2],
      ],
      [[0, -1]],
    ]);
    expect(found.leaves.map((leaf) => path(leaf, found.nodes))).toEqual([
      ["energy", "label", "label", "perturbation"],
      ["energy", "label", "label", "perturbation"],
      ["energy", "label", "perturbation"],
    ]);
    found.leaves.forEach(({ leaf, vectors }) => {
      for (const { candidate, value } of leaf.labels) {
        expect(
          residual(
            naiveOf(problem(Operator.zero(5)).candidates[candidate]?.operator ?? Operator.zero(5)),
            vectors,
            value,
          ),
        ).toBeLessThan(1e-15);
      }
    });
  });

  it("nothing is refined by them where the block is a single state, or already carries the label", () => {
    const single = resolve(problem(Operator.zero(5)), "labels", [0], [0, 1, 2], 0);
    expect(single.nodes.filter(({ operator }) => operator === "reflection")).toHaveLength(1);
    expect(single.leaves.map(({ leaf }) => leaf.labels.map(({ candidate }) => candidate))).toEqual([[0, 1], [0]]);
    expect(sizes(single)).toEqual([2, 1]);
  });

  it("a block that stays whole keeps its vectors", () => {
    const whole = prepare({
      h0: Operator.zero(2),
      v: Operator.zero(2),
      candidates: {
        scalar: Operator.from([
          [3, 2 ** -40],
          [2 ** -40, 3],
        ]),
      },
    });
    const found = resolve(whole, "full", [], [0]);
    expect(sizes(found)).toEqual([2]);
    expect(found.leaves[0]?.vectors).toEqual(naiveOf(Operator.identity(2)));
    expect(found.leaves[0]?.leaf.labels).toEqual([{ candidate: 0, value: { re: 3, im: 0 } }]);
    expect(found.nodes.map(({ kind, sizes: list }) => [kind, list])).toEqual([
      ["energy", [2]],
      ["label", [2]],
      ["perturbation", [2]],
      ["second order", [2]],
    ]);
    expect(found.leaves[0]?.leaf.second).toBe(0);
  });
});

describe("several sectors", () => {
  it("each is refined on its own, and all states of the level come out once", () => {
    const next = random(9);
    const block = hermitian(3, next, true);
    const v = operatorOf(
      naiveOf(Operator.identity(6)).map((row, i) =>
        row.map((_, j) =>
          Math.floor(i / 3) === Math.floor(j / 3) ? (block[i % 3]?.[j % 3] ?? { re: 0, im: 0 }) : { re: 0, im: 0 },
        ),
      ),
    );
    const problem = prepare({
      h0: Operator.diagonal([0, 0, 1, 0, 0, 1]),
      v,
      candidates: { side: Operator.diagonal([1, 1, 1, -1, -1, -1]) },
    });
    const found = resolve(problem, "full", [0]);
    expect(found.parts.map(({ sector, indices }) => [sector, [...indices]])).toEqual([
      [0, [0, 1]],
      [1, [0, 1]],
    ]);
    expect(sizes(found)).toEqual([1, 1, 1, 1]);
    const all = stackRows(
      found.leaves.map(({ vectors }) => csr(vectors)),
      6,
    );
    const inside = restricted(naiveOf(v), naiveOfCsr(all));
    inside.forEach((row, i) => {
      row.forEach((x, j) => {
        if (i !== j) expect(Math.hypot(x.re, x.im)).toBeLessThan(1e-15);
      });
    });
    // the same block twice: the same shifts
    expect(inside[0]?.[0]?.re).toBeCloseTo(inside[2]?.[2]?.re ?? Number.NaN, 14);
    expect(inside[0]?.[0]?.re).toBeGreaterThan(inside[1]?.[1]?.re ?? Number.NaN);
  });
});
