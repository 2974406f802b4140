import fc from "fast-check";
import { expect, test } from "vitest";
import type { Csr } from "../../src/numerics/csr.js";
import {
  add,
  apply,
  commutator,
  frobenius,
  fromDense,
  fromTriplets,
  kron,
  multiply,
  norm1,
  normInf,
  selectRows,
  submatrix,
  toDense,
  transpose,
} from "../../src/numerics/sparse.js";

const SEED = { seed: 44, numRuns: 80 };
const whole = fc.oneof(
  { weight: 3, arbitrary: fc.constant(0) },
  { weight: 2, arbitrary: fc.integer({ min: -9, max: 9 }) },
);

/** A real rows × cols matrix of small whole numbers, on which all arithmetic is exact. */
const matrix = (rows: number, cols: number): fc.Arbitrary<number[][]> =>
  fc.array(fc.array(whole, { minLength: cols, maxLength: cols }), { minLength: rows, maxLength: rows });
const size = fc.integer({ min: 1, max: 40 });
const csrOf = (rows: number[][]): Csr => fromDense(rows.length, rows[0]?.length ?? 0, rows.flat());
const rowsOf = (a: Csr): number[][] => {
  const { re } = toDense(a);
  return Array.from({ length: a.rows }, (_, r) => Array.from(re.slice(r * a.cols, (r + 1) * a.cols), (x) => x + 0));
};
const product = (a: number[][], b: number[][]): number[][] =>
  a.map((row) => (b[0] ?? []).map((_, j) => row.reduce((sum, x, k) => sum + x * (b[k]?.[j] ?? 0), 0) + 0));
const flip = (a: number[][]): number[][] => (a[0] ?? []).map((_, j) => a.map((row) => row[j] ?? 0));

test("rectangular products, transposes, Kronecker products, vectors", () => {
  const triple = fc.tuple(size, size, size).chain(([p, q, r]) => fc.tuple(matrix(p, q), matrix(q, r)));
  fc.assert(
    fc.property(triple, ([a, b]) => {
      expect(rowsOf(multiply(csrOf(a), csrOf(b)))).toEqual(product(a, b));
      expect(rowsOf(transpose(csrOf(a)))).toEqual(flip(a));
      const x = Float64Array.from(a[0] ?? [], (_, k) => k - 3);
      const y = new Float64Array(a.length);
      apply(csrOf(a), x, undefined, y, undefined);
      expect([...y].map((v) => v + 0)).toEqual(
        product(
          a,
          [...x].map((v) => [v]),
        ).flat(),
      );
    }),
    SEED,
  );
  const a = [
    [1, 2],
    [0, 3],
  ];
  const b = [[0, 5, 1]];
  expect(rowsOf(kron(csrOf(a), csrOf(b)))).toEqual([
    [0, 5, 1, 0, 10, 2],
    [0, 0, 0, 0, 15, 3],
  ]);
});

test("commutators, with and without a diagonal factor", () => {
  const square = size.chain((n) => fc.tuple(matrix(n, n), matrix(n, n)));
  fc.assert(
    fc.property(square, ([a, b]) => {
      const d = a.map((row, i) => row.map((x, j) => (i === j ? x : 0)));
      for (const [x, y] of [
        [a, b],
        [d, b],
        [b, d],
      ] as const) {
        const yx = product(y, x);
        const truth = product(x, y).map((row, i) => row.map((v, j) => v - (yx[i]?.[j] ?? 0) + 0));
        expect(rowsOf(commutator(csrOf(x), csrOf(y)))).toEqual(truth);
      }
    }),
    SEED,
  );
});

test("sums with complex factors", () => {
  const a = csrOf([
    [1, 0],
    [2, 3],
  ]);
  const b = csrOf([
    [0, 4],
    [1, 0],
  ]);
  const sum = toDense(add({ re: 0, im: 2 }, a, { re: 1, im: -1 }, b));
  expect([...sum.re].map((x) => x + 0)).toEqual([0, 4, 1, 0]);
  expect([...(sum.im ?? [])]).toEqual([2, -4, 3, 6]);
  expect(add(1, a, -1, a).col.length).toBe(3); // cancelled entries stay
});

test("triplets are sorted, duplicates summed, vanishing imaginary parts dropped", () => {
  const a = fromTriplets(2, 3, [1, 0, 1, 1], [2, 1, 0, 2], [1, 2, 3, 4], [1, 0, 0, -1]);
  expect([...a.ptr]).toEqual([0, 1, 3]);
  expect([...a.col]).toEqual([1, 0, 2]);
  expect([...a.re]).toEqual([2, 3, 5]);
  expect(a.im).toBeUndefined();
  expect([...fromTriplets(3, 3, [], [], []).ptr]).toEqual([0, 0, 0, 0]);
});

test("rows and submatrices, in any order", () => {
  fc.assert(
    fc.property(
      fc.integer({ min: 2, max: 9 }).chain((n) =>
        fc.tuple(
          matrix(n, n),
          fc.shuffledSubarray(
            Array.from({ length: n }, (_, k) => k),
            { minLength: 1 },
          ),
        ),
      ),
      ([a, chosen]) => {
        expect(rowsOf(selectRows(csrOf(a), chosen))).toEqual(chosen.map((r) => a[r]));
        const sub = submatrix(csrOf(a), chosen);
        expect(rowsOf(sub)).toEqual(chosen.map((r) => chosen.map((c) => a[r]?.[c])));
        for (let r = 0; r < sub.rows; r++) {
          const columns = [...sub.col.slice(sub.ptr[r], sub.ptr[r + 1])];
          expect(columns).toEqual([...columns].sort((p, q) => p - q));
        }
      },
    ),
    SEED,
  );
});

test("norms", () => {
  const a = fromDense(2, 2, [3, 0, 0, 1], [4, 0, 0, 0]);
  const b = csrOf([
    [1, -2],
    [3, 4],
  ]);
  expect(norm1(a)).toBe(5);
  expect([norm1(b), normInf(b)]).toEqual([6, 7]);
  expect(frobenius(b)).toBeCloseTo(Math.sqrt(30), 15);
  expect(frobenius(csrOf([[3e200, 4e200]])) / 5e200).toBeCloseTo(1, 15);
  expect(frobenius(csrOf([[3e-320]]))).toBe(3e-320);
});
