import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { connectedComponents } from "../../src/refine/components.js";
import { csr } from "./support.js";

/** Part of each index by spreading from every start, the slow and obvious way. */
function spread(edges: readonly (readonly [number, number])[], n: number): number[] {
  const part = new Array<number>(n).fill(-1);
  let count = 0;
  for (let start = 0; start < n; start++) {
    if (part[start] !== -1) continue;
    const open = [start];
    while (open.length > 0) {
      const at = open.pop() as number;
      if (part[at] !== -1) continue;
      part[at] = count;
      for (const [i, j] of edges) {
        if (i === at) open.push(j);
        if (j === at) open.push(i);
      }
    }
    count++;
  }
  return part;
}

describe("connectedComponents", () => {
  it("finds the parts of random patterns, directions forgotten", () => {
    const graph = fc.integer({ min: 1, max: 12 }).chain((n) => {
      const index = fc.integer({ min: 0, max: n - 1 });
      return fc.record({ n: fc.constant(n), edges: fc.array(fc.tuple(index, index), { maxLength: 14 }) });
    });
    fc.assert(
      fc.property(graph, ({ n, edges }) => {
        const rows = Array.from({ length: n }, () => new Array<number>(n).fill(0));
        for (const [i, j] of edges) (rows[i] as number[])[j] = 1;
        const { count, part, members, starts } = connectedComponents(csr(rows), 0);
        const truth = spread(edges, n);
        expect([...part]).toEqual(truth);
        expect(count).toBe(Math.max(...truth) + 1);
        const listed = Array.from({ length: count }, (_, c) => truth.flatMap((p, i) => (p === c ? [i] : [])));
        expect([...members]).toEqual(listed.flat());
        expect(starts[0]).toBe(0);
        expect([...starts].slice(1).map((end, c) => end - (starts[c] ?? 0))).toEqual(listed.map((list) => list.length));
      }),
      { seed: 21, numRuns: 200 },
    );
  });

  it("takes entries of modulus up to the noise as absent, and no larger ones", () => {
    const parts = (entry: number | { re: number; im: number }, noise: number): number =>
      connectedComponents(
        csr([
          [9, entry],
          [0, 9],
        ]),
        noise,
      ).count;
    expect(parts(0.5, 0.5)).toBe(2);
    expect(parts(-0.5, 0.5)).toBe(2);
    expect(parts(0.5 * (1 + 2 ** -52), 0.5)).toBe(1);
    expect(parts({ re: 0, im: 0.75 }, 0.5)).toBe(1);
    expect(parts({ re: 0.45, im: 0.45 }, 0.5)).toBe(1);
    expect(parts({ re: 0.3, im: -0.4 }, 0.5)).toBe(2);
  });

  it("neither loses entries whose squares vanish nor drowns those whose squares overflow", () => {
    for (const unit of [1e-300, 1e-170, 1, 1e170, 1e300]) {
      const matrix = csr([
        [unit, unit / 4],
        [unit / 4, unit],
      ]);
      expect(connectedComponents(matrix, 2 ** -43 * unit).count).toBe(1);
      expect(connectedComponents(matrix, unit).count).toBe(2);
      expect(connectedComponents(matrix, 0).count).toBe(1);
    }
  });
});
