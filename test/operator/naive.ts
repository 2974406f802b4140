import fc from "fast-check";
import { Operator } from "../../src/operator/operator.js";

/** A dense complex matrix, the slow and obvious way. */
export type Naive = { re: number; im: number }[][];

const ZERO = { re: 0, im: 0 };

export const naiveOf = (a: Operator): Naive =>
  Array.from({ length: a.n }, (_, i) => Array.from({ length: a.n }, (_, j) => a.entry(i, j)));

export const naiveProduct = (a: Naive, b: Naive): Naive =>
  a.map((row) =>
    (b[0] ?? []).map((_, j) =>
      row.reduce((sum, x, k) => {
        const y = b[k]?.[j] ?? ZERO;
        return { re: sum.re + x.re * y.re - x.im * y.im, im: sum.im + x.re * y.im + x.im * y.re };
      }, ZERO),
    ),
  );

export const naiveSum = (a: Naive, b: Naive, sign = 1): Naive =>
  a.map((row, i) =>
    row.map((x, j) => {
      const y = b[i]?.[j] ?? ZERO;
      return { re: x.re + sign * y.re, im: x.im + sign * y.im };
    }),
  );

export const naiveAdjoint = (a: Naive): Naive =>
  (a[0] ?? []).map((_, i) => a.map((row) => ({ re: row[i]?.re ?? 0, im: -(row[i]?.im ?? 0) })));

export const naiveKron = (a: Naive, b: Naive): Naive =>
  a.flatMap((row) =>
    b.map((other) =>
      row.flatMap((x) => other.map((y) => ({ re: x.re * y.re - x.im * y.im, im: x.re * y.im + x.im * y.re }))),
    ),
  );

/** The largest difference of two matrices. */
export function distance(a: Naive, b: Naive): number {
  if (a.length !== b.length) return Number.POSITIVE_INFINITY;
  return Math.max(...naiveSum(a, b, -1).flatMap((row) => row.map((x) => Math.hypot(x.re, x.im))));
}

/** Random sparse matrices with entries of order one, real or complex. */
export function sparse(n: number): fc.Arbitrary<Operator> {
  const value = fc.oneof(
    { weight: 3, arbitrary: fc.constant(0) },
    { weight: 2, arbitrary: fc.double({ min: -1, max: 1, noNaN: true }) },
  );
  const entries = fc.array(value, { minLength: n * n, maxLength: n * n });
  return fc.tuple(entries, fc.option(entries, { nil: undefined })).map(([re, im]) => Operator.from({ re, im }));
}

/** A random matrix of full rows from a seed. */
export function filled(n: number, seed: number, complex: boolean): Operator {
  let state = seed;
  const next = (): number => {
    state = (state * 48271) % 2147483647;
    return state / 2147483647 - 0.5;
  };
  const list = (): number[] => Array.from({ length: n * n }, next);
  return Operator.from({ re: list(), im: complex ? list() : undefined });
}
