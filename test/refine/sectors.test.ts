import { describe, expect, it } from "vitest";
import type { PreparedProblem } from "../../src/audit/problem.js";
import type { Csr } from "../../src/numerics/csr.js";
import { stackRows } from "../../src/numerics/stack.js";
import { Operator } from "../../src/operator/operator.js";
import { descentStep } from "../../src/refine/descent.js";
import { splitIntoEigenspaces } from "../../src/refine/eigenspaces.js";
import { buildSectors, energyTolerance, inSpace, type Sectors } from "../../src/refine/sectors.js";
import { TreeBuilder } from "../../src/refine/tree.js";
import { distance, naiveOf } from "../operator/naive.js";
import { adjoint, double, identity, minus, norm2, product, spectralRadius } from "../support/fixed.js";
import { fixedColumns, fixedOperator } from "../support/oracle.js";
import {
  csr,
  hermitian,
  naiveOfCsr,
  operatorOf,
  orthonormal,
  prepare,
  random,
  residual,
  restricted,
  ringHopping,
  ringReflection,
  ringTranslation,
  withEigenvalues,
} from "./support.js";

interface Built extends Sectors {
  readonly tree: TreeBuilder;
}

function build(
  problem: PreparedProblem,
  backbone: readonly number[],
  others: readonly number[] = [],
  withH0 = true,
): Built {
  const tree = new TreeBuilder();
  return { ...buildSectors(problem, backbone, others, tree, withH0), tree };
}

/** Everything that sectors promise, whatever the problem. */
function check(problem: PreparedProblem, { sectors, defect, tree }: Built, tolerance: number, withH0 = true): void {
  const { n } = problem;
  const h0 = naiveOf(problem.h0);
  const all = stackRows(
    sectors.map((sector) => sector.frame),
    n,
  );
  expect(all.rows).toBe(n);
  const columns = fixedColumns(all);
  const exact = double(spectralRadius(minus(product(adjoint(columns), columns), identity(n))));
  expect(defect).toBeGreaterThanOrEqual(exact);
  expect(defect).toBeLessThanOrEqual(1e3 * n * n * 2 ** -53);
  sectors.forEach((sector, s) => {
    const frame = naiveOfCsr(sector.frame);
    const d = frame.length;
    expect(sector.energies).toHaveLength(d);
    expect([...sector.energies]).toEqual([...sector.energies].sort((a, b) => a - b));
    if (withH0) {
      frame.forEach((row, k) => {
        expect(residual(h0, [row], { re: sector.energies[k] ?? 0, im: 0 })).toBeLessThanOrEqual(tolerance);
      });
      problem.perturbations.forEach(({ operator }, p) => {
        const stated = naiveOfCsr(sector.perturbations[p] as Csr);
        expect(distance(stated, restricted(naiveOf(operator), frame))).toBeLessThanOrEqual(tolerance);
      });
    }
    const labelled = naiveOfCsr(sector.labelFrame);
    for (const { candidate, value } of sector.labels) {
      const a = naiveOf(problem.candidates[candidate]?.operator as Operator);
      expect(residual(a, frame, value), `sector ${s}, label ${candidate}`).toBeLessThanOrEqual(tolerance);
      expect(residual(a, labelled, value)).toBeLessThanOrEqual(tolerance);
    }
    const node = tree.nodes[sector.energyNode];
    expect([node?.kind, node?.operator, node?.size]).toEqual(["energy", "H0", d]);
    expect(node?.from).toEqual(sector.from);
    expect([...sector.energyChild].map((child) => node?.values[child]?.re)).toEqual([...sector.energies]);
    expect(node?.sizes.map((_, child) => sector.energyChild.filter((c) => c === child).length)).toEqual(node?.sizes);
    // the labels are those of the nodes on the way
    const path: string[] = [];
    for (let at = sector.from; at !== undefined; at = tree.nodes[at.node]?.from) {
      const step = tree.nodes[at.node];
      path.unshift(`${step?.operator} = ${step?.values[at.child]?.re}, ${step?.values[at.child]?.im}`);
    }
    expect(sector.labels.map((l) => `${problem.candidates[l.candidate]?.name} = ${l.value.re}, ${l.value.im}`)).toEqual(
      path,
    );
  });
  for (const node of tree.nodes) {
    expect(node.sizes.reduce((a, b) => a + b, 0)).toBe(node.size);
    expect(node.values).toHaveLength(node.sizes.length);
    expect(node.spreads).toHaveLength(node.sizes.length);
    if (node.from !== undefined) expect(tree.nodes[node.from.node]?.sizes[node.from.child]).toBe(node.size);
  }
}

const byLabel = ({ sectors }: Sectors): string[] =>
  sectors.map(({ labels }) =>
    labels.map(({ value }) => [value.re, value.im].map((x) => +x.toFixed(9) + 0).join(" ")).join(" | "),
  );

const exact = { uncertainty: "exact" } as const;

/** A ring of six sites with an s and a p orbital on each; the reflection changes the sign of p. */
function twoOrbitalRing(sites: number): { h0: Operator; v: Operator; translation: Operator; reflection: Operator } {
  const one = Operator.identity(2);
  const forward = ringTranslation(sites);
  const raise = Operator.fromTriplets(2, [[1, 0, 1]], exact);
  const leap = forward.minus(forward.adjoint()).kron(raise);
  return {
    h0: ringHopping(sites)
      .kron(Operator.diagonal([1, 0.5], exact))
      .plus(Operator.identity(sites).kron(Operator.diagonal([0, 3], exact))),
    v: leap.plus(leap.adjoint()),
    translation: forward.kron(one),
    reflection: ringReflection(sites).kron(Operator.diagonal([1, -1], exact)),
  };
}

describe("buildSectors", () => {
  it("a ring of six: the reflection refines momenta 0 and π, and no others", () => {
    const { h0, v, translation, reflection } = twoOrbitalRing(6);
    const problem = prepare({ h0, v, candidates: { translation, reflection } });
    const built = build(problem, [0], [1]);
    check(problem, built, 3e-15);
    const h = Math.sqrt(0.75).toFixed(9);
    expect(byLabel(built)).toEqual([
      "1 0 | 1 0",
      "1 0 | -1 0",
      `0.5 ${h}`,
      `-0.5 ${h}`,
      "-1 0 | 1 0",
      "-1 0 | -1 0",
      `-0.5 -${h}`,
      `0.5 -${h}`,
    ]);
    expect(built.sectors.map(({ frame }) => frame.rows)).toEqual([1, 1, 2, 2, 1, 1, 2, 2]);
    expect(built.sectors.map(({ labels }) => labels.map(({ candidate }) => candidate))).toEqual([
      [0, 1],
      [0, 1],
      [0],
      [0],
      [0, 1],
      [0, 1],
      [0],
      [0],
    ]);
    // the other way round translation maps neither parity into itself: nothing more is found
    const turned = build(problem, [1], [0]);
    check(problem, turned, 3e-15);
    expect(turned.sectors.map(({ labels }) => labels.length)).toEqual([1, 1]);
    expect(turned.sectors.map(({ frame }) => frame.rows)).toEqual([6, 6]);
  });

  it("a candidate that leaves a block may refine what another one leaves of it", () => {
    const problem = prepare({
      h0: Operator.zero(5),
      v: Operator.zero(5),
      candidates: {
        D: Operator.diagonal([1, 1, 1, 1, 2], exact),
        A: Operator.permutation([1, 0, 2, 4, 3]),
        B: Operator.diagonal([0, 0, 0, 1, 0], exact),
      },
    });
    const built = build(problem, [0], [1, 2]);
    check(problem, built, 1e-15);
    expect(built.sectors.map(({ labels }) => labels.map(({ candidate, value }) => [candidate, value.re]))).toEqual([
      [[0, 2]],
      [
        [0, 1],
        [2, 1],
      ],
      [
        [0, 1],
        [2, 0],
        [1, 1],
      ],
      [
        [0, 1],
        [2, 0],
        [1, -1],
      ],
    ]);
    expect(built.sectors.map(({ frame }) => frame.rows)).toEqual([1, 1, 2, 1]);
  });

  it("takes the cheapest operator first: diagonal, then monomial, then sparse, then filled", () => {
    const filled = operatorOf(
      withEigenvalues(
        orthonormal(4, 4, random(5), false),
        [1, 1, 1, 1].map((re) => ({ re, im: 0 })),
      ).map((row, i) => row.map((x, j) => (i === j ? x : { re: x.re + 1e-18, im: 0 }))),
    );
    const sparse = Operator.from([
      [2, 0, 0, 0],
      [0, 2, 0, 0],
      [0, 0, 3, 1],
      [0, 0, 1, 3],
    ]);
    const monomial = Operator.permutation([1, 0, 2, 3]);
    const diagonal = Operator.diagonal([1, 1, 0, 0], exact);
    const problem = prepare({
      h0: Operator.zero(4),
      v: Operator.zero(4),
      candidates: { filled, sparse, monomial, diagonal },
    });
    const built = build(problem, [0, 1, 2, 3]);
    check(problem, built, 1e-14);
    expect(built.sectors).toHaveLength(4);
    for (const { labels } of built.sectors) expect(labels.map(({ candidate }) => candidate)).toEqual([3, 2, 1, 0]);
    expect(built.tree.nodes.slice(0, 4).map(({ operator }) => operator)).toEqual([
      "diagonal",
      "monomial",
      "sparse",
      "filled",
    ]);
  });

  it("labels by unitary operators that are neither Hermitian nor monomial", () => {
    const n = 6;
    const rows = orthonormal(n, n, random(17), true);
    const angles = [0, 1, 1, 2, 2, 2].map((k) => (2 * Math.PI * k) / 3);
    const u = operatorOf(
      withEigenvalues(
        rows,
        angles.map((a) => ({ re: Math.cos(a), im: Math.sin(a) })),
      ),
    );
    const h0 = operatorOf(
      withEigenvalues(
        rows,
        [0, 0, 1, 2, 2, 3].map((re) => ({ re, im: 0 })),
      ),
    );
    const v = operatorOf(
      withEigenvalues(
        rows,
        [1, 2, 3, 4, 5, 6].map((re) => ({ re, im: 0 })),
      ),
    );
    const problem = prepare({ h0, v, candidates: { u } });
    expect(problem.candidates[0]?.kind).toBe("unitary");
    const built = build(problem, [0]);
    check(problem, built, 2e-14);
    expect(built.sectors.map(({ frame }) => frame.rows)).toEqual([1, 2, 3]);
    expect(built.sectors.map(({ energies }) => [...energies].map(Math.round).map((x) => x + 0))).toEqual([
      [0],
      [0, 1],
      [2, 2, 3],
    ]);
  });

  it("bounds the departure from orthonormality after several filled steps, and the errors of the vectors", () => {
    for (let seed = 1; seed < 6; seed++) {
      const n = 8;
      const rows = orthonormal(n, n, random(seed), true);
      const of = (values: readonly number[]): Operator =>
        operatorOf(
          withEigenvalues(
            rows,
            values.map((re) => ({ re, im: 0 })),
          ),
        );
      const problem = prepare({
        h0: of([1, 2, 3, 4, 5, 6, 7, 8]),
        v: of([3, 1, 4, 1, 5, 9, 2, 6]),
        candidates: { A: of([0, 0, 0, 0, 1, 1, 1, 1]), B: of([0, 0, 1, 1, 0, 0, 1, 1]) },
      });
      const built = build(problem, [0, 1]);
      check(problem, built, 1e-13);
      expect(built.sectors).toHaveLength(4);
      for (const { rowError } of built.sectors) {
        // three steps of at most 8, 4 and 2 terms
        expect(rowError).toBeGreaterThan(3 * 5 * 2 ** -53);
        expect(rowError).toBeLessThan(1e4 * 2 ** -53);
      }
    }
  });

  it("adds up the eigensolver's defect and the rounding of the vectors made from it", () => {
    const rows = orthonormal(6, 6, random(23), true);
    const a = operatorOf(
      withEigenvalues(
        rows,
        [0, 0, 1, 1, 2, 2].map((re) => ({ re, im: 0 })),
      ),
    );
    const problem = prepare({ h0: Operator.zero(6), v: Operator.zero(6), candidates: { a } });
    const operator = problem.candidates[0]?.operator ?? a;
    const split = splitIntoEigenspaces(operator.csr, {
      hermitian: true,
      noise: 2 ** -43 * operator.norm,
      cluster: 2 ** -36 * operator.norm,
    });
    const { compositionError } = descentStep(split, { frame: Operator.identity(6).csr });
    const { defect } = build(problem, [0]);
    expect(defect).toBeGreaterThanOrEqual(split.defect + 2 * compositionError);
    expect(defect).toBeLessThan((split.defect + 2 * compositionError) * 1.001);
    // two blocks at the same depth: their rounding errors add up in squares, the worse defect counts
    const twice = prepare({
      h0: Operator.zero(12),
      v: Operator.zero(12),
      candidates: {
        a: a.kron(Operator.identity(2)),
        side: Operator.identity(6).kron(Operator.diagonal([1, 0], exact)),
      },
    });
    const both = build(twice, [0, 1]).defect;
    expect(both).toBeGreaterThanOrEqual(split.defect + 2 * Math.SQRT2 * compositionError);
    expect(both).toBeLessThan((split.defect + 2 * Math.SQRT2 * compositionError) * 1.001);
    // one step after the other: defects add up
    const b = operatorOf(
      withEigenvalues(
        rows,
        [0, 1, 0, 1, 0, 1].map((re) => ({ re, im: 0 })),
      ),
    );
    const steps = prepare({ h0: Operator.zero(6), v: Operator.zero(6), candidates: { a, b } });
    const [first, whole] = [build(steps, [0]).defect, build(steps, [0, 1]).defect];
    // the second step works on pairs only, so by itself it is far smaller than the first
    expect(whole).toBeGreaterThan(first * 1.1);
    // a smaller one beside it, before or after, hides nothing
    const small = Operator.from([
      [0, 1],
      [1, 0.5],
    ]);
    for (const above of [1, -1]) {
      const entries = [0, 1, 2, 3, 4, 5].flatMap((i) =>
        [0, 1, 2, 3, 4, 5].map((j) => [i, j, a.entry(i, j).re, a.entry(i, j).im] as const),
      );
      const corner = [0, 1].flatMap((i) => [0, 1].map((j) => [6 + i, 6 + j, small.entry(i, j).re] as const));
      const side = Operator.diagonal([...new Array<number>(6).fill(above), 0, 0], exact);
      const mixed = prepare({
        h0: Operator.zero(8),
        v: Operator.zero(8),
        candidates: { a: Operator.fromTriplets(8, [...entries, ...corner]), side },
      });
      expect(build(mixed, [0, 1]).defect).toBeGreaterThanOrEqual(split.defect + 2 * compositionError);
    }
  });

  it("bounds V between the children of a node, also where V does not conserve the label", () => {
    for (let seed = 1; seed < 6; seed++) {
      const next = random(seed);
      const n = 6;
      const rows = orthonormal(n, n, next, seed % 2 === 0);
      const of = (values: readonly number[]): Operator =>
        operatorOf(
          withEigenvalues(
            rows,
            values.map((re) => ({ re, im: 0 })),
          ),
        );
      const v1 = operatorOf(hermitian(n, next, true), "exact");
      const v2 = operatorOf(
        hermitian(n, next, true).map((row) => row.map((x) => ({ re: 1e3 * x.re, im: 1e3 * x.im }))),
        "exact",
      );
      const problem = prepare({
        h0: of([1, 2, 3, 4, 5, 6]),
        v: { v1, v2 },
        candidates: { A: of([0, 0, 1, 1, 2, 2]), B: of([0, 1, 0, 1, 0, 1]) },
      });
      const built = build(problem, [0, 1]);
      const labels = built.tree.nodes.filter((node) => node.kind === "label");
      expect(labels).toHaveLength(4);
      for (const node of labels) {
        const inside = built.sectors.map((sector) => {
          for (let at = sector.from; at !== undefined; at = built.tree.nodes[at.node]?.from)
            if (at.node === node.id) return at.child;
          return -1;
        });
        [v1, v2].forEach((v, p) => {
          const whole = (child: number): ReturnType<typeof fixedColumns> =>
            fixedColumns(
              stackRows(
                built.sectors.filter((_, s) => inside[s] === child).map(({ frame }) => frame),
                n,
              ),
            );
          const truths = node.values.flatMap((_, a) =>
            node.values
              .slice(0, a)
              .map((__, b) => double(norm2(product(adjoint(whole(a)), product(fixedOperator(v), whole(b)))))),
          );
          const bound = node.crossings?.[p] ?? Number.NaN;
          expect(bound).toBeGreaterThanOrEqual(Math.max(...truths) * (1 - 1e-13));
          expect(bound).toBeLessThanOrEqual(n * Math.max(...truths));
        });
      }
      expect(
        built.tree.nodes.filter((node) => node.kind === "energy").every((node) => node.crossings === undefined),
      ).toBe(true);
    }
  });

  it("nothing to refine by: H0 alone makes one sector", () => {
    const problem = prepare({
      h0: [
        [1, 1, 0],
        [1, 1, 0],
        [0, 0, 5],
      ],
      v: [
        [0, 0, 1],
        [0, 0, 1],
        [1, 1, 0],
      ],
    });
    const built = build(problem, []);
    check(problem, built, 1e-15);
    expect(built.sectors.map(({ energies, labels }) => [[...energies].map((x) => +x.toFixed(12) + 0), labels])).toEqual(
      [[[0, 2, 5], []]],
    );
    expect(built.sectors[0]?.from).toBeUndefined();
    // the labels are judged on the vectors before H0 was diagonalised: here the kets
    expect(naiveOfCsr(built.sectors[0]?.labelFrame as Csr)).toEqual(naiveOf(Operator.identity(3)));
    expect(built.tree.nodes).toHaveLength(1);
  });

  it("H0 = 0, V = 0 and a candidate that is a multiple of 1 leave the kets as they are", () => {
    const problem = prepare({
      h0: Operator.zero(3),
      v: Operator.zero(3),
      candidates: { one: Operator.identity(3).scale(2) },
    });
    const built = build(problem, [0]);
    check(problem, built, 0);
    expect(built.defect).toBe(0);
    expect(built.sectors).toHaveLength(1);
    expect(built.sectors[0]?.labels).toEqual([{ candidate: 0, value: { re: 2, im: 0 } }]);
    expect(naiveOfCsr(built.sectors[0]?.frame as Csr)).toEqual(naiveOf(Operator.identity(3)));
    expect([...(built.sectors[0]?.energyChild ?? [])]).toEqual([0, 0, 0]);
    expect(built.sectors[0]?.rowError).toBe(0);
  });

  it("a single ket", () => {
    const problem = prepare({ h0: [[-3]], v: [[2]], candidates: { phase: { re: [[0]], im: [[1]] }, m: [[0.5]] } });
    const built = build(problem, [0, 1]);
    check(problem, built, 0);
    expect(built.sectors.map(({ energies, labels }) => [[...energies], labels.map(({ value }) => value)])).toEqual([
      [
        [-3],
        [
          { re: 0, im: 1 },
          { re: 0.5, im: 0 },
        ],
      ],
    ]);
  });

  it("diagonal operators choose kets without a rounding, in ascending order of energy", () => {
    const problem = prepare({
      h0: Operator.diagonal([2, 1, 0, 1], exact),
      v: [
        [0, 1, 0, 0],
        [1, 0, 0, 0],
        [0, 0, 7, 0],
        [0, 0, 0, 8],
      ],
      candidates: { m: Operator.diagonal([1, 1, -1, -1], exact) },
    });
    const built = build(problem, [0]);
    check(problem, built, 0);
    expect(built.defect).toBe(0);
    expect(built.sectors.map(({ frame, energies, rowError }) => [[...frame.col], [...energies], rowError])).toEqual([
      [[1, 0], [1, 2], 0],
      [[2, 3], [0, 1], 0],
    ]);
    expect(built.tree.nodes[0]?.crossings).toEqual([0]);
    expect(naiveOfCsr(built.sectors[0]?.perturbations[0] as Csr)[0]?.[1]).toEqual({ re: 1, im: 0 });
  });

  it("without H0 it stops at the labels", () => {
    const { h0, v, translation, reflection } = twoOrbitalRing(6);
    const problem = prepare({ h0, v, candidates: { translation, reflection } });
    const built = build(problem, [0], [1], false);
    check(problem, built, 1e-14, false);
    expect(built.sectors.map(({ frame }) => frame.rows)).toEqual([1, 1, 2, 2, 1, 1, 2, 2]);
    for (const { energies } of built.sectors) expect(energies.every((energy) => energy === 0)).toBe(true);
    expect(built.tree.nodes.every((node) => node.crossings === undefined)).toBe(true);
  });
});

describe("energyTolerance", () => {
  it("grows with H0's norm and uncertainty, and with the solver where one is needed", () => {
    const of = (h0: Operator): PreparedProblem => prepare({ h0, v: Operator.zero(h0.n) });
    const plain = Operator.diagonal([4, 0], exact);
    expect(energyTolerance(of(plain), 2)).toBeCloseTo(2 ** -40, 20);
    expect(energyTolerance(of(plain), 100)).toBe(energyTolerance(of(plain), 2));
    expect(
      energyTolerance(of(Operator.diagonal([4, 0], { uncertainty: { relative: 0, absolute: 0.01 } })), 2),
    ).toBeGreaterThan(0.32);
    const filled = of(
      Operator.from(
        [
          [0, 4],
          [4, 0],
        ],
        exact,
      ),
    );
    expect(energyTolerance(filled, 16) - energyTolerance(of(plain), 1)).toBeCloseTo(8 * 4 * 2 ** -53 * 4, 20);
  });
});

describe("inSpace", () => {
  it("gives the elements u_i† B u_j, and picks rows and columns where the space is made of kets", () => {
    const next = random(3);
    const b = hermitian(4, next, true);
    const u = orthonormal(2, 4, next, true);
    expect(
      distance(naiveOfCsr(inSpace({ rows: csr(u), indices: undefined }, operatorOf(b).csr)), restricted(b, u)),
    ).toBeLessThan(1e-15);
    const picked = inSpace(
      {
        rows: csr([
          [0, 0, 1, 0],
          [1, 0, 0, 0],
        ]),
        indices: Int32Array.of(2, 0),
      },
      operatorOf(b).csr,
    );
    expect(naiveOfCsr(picked)).toEqual([
      [b[2]?.[2], b[2]?.[0]],
      [b[0]?.[2], b[0]?.[0]],
    ]);
  });
});
