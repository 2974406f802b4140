import type { PreparedProblem, Problem } from "../../src/audit/problem.js";
import { prepareProblem } from "../../src/audit/problem.js";
import type { Complex } from "../../src/numerics/complex.js";
import type { Csr } from "../../src/numerics/csr.js";
import { fromDense } from "../../src/numerics/sparse.js";
import { Operator } from "../../src/operator/operator.js";
import { type Naive, naiveAdjoint, naiveProduct } from "../operator/naive.js";

/** Numbers from −1 to 1 of a seed. */
export function random(seed: number): () => number {
  let state = (Math.abs(Math.trunc(seed)) % 2147483646) + 1;
  return () => {
    state = (state * 48271) % 2147483647;
    return (2 * state) / 2147483647 - 1;
  };
}

type Entry = number | Complex;

const complexOf = (x: Entry): Complex => (typeof x === "number" ? { re: x, im: 0 } : x);

/** A matrix from rows of real or complex numbers. */
export function naive(rows: readonly (readonly Entry[])[]): Naive {
  return rows.map((row) => row.map((x) => ({ ...complexOf(x) })));
}

/** The same as sparse rows; `cols` where there may be no row. */
export function csr(rows: readonly (readonly Entry[])[], cols: number = rows[0]?.length ?? 0): Csr {
  const flat = rows.flat().map(complexOf);
  const real = flat.every((x) => x.im === 0);
  const re = flat.map((x) => x.re);
  return fromDense(rows.length, cols, re, real ? undefined : flat.map((x) => x.im));
}

/** Sparse rows written out. */
export function naiveOfCsr(a: Csr): Naive {
  const out: Naive = Array.from({ length: a.rows }, () => Array.from({ length: a.cols }, () => ({ re: 0, im: 0 })));
  for (let r = 0; r < a.rows; r++) {
    for (let p = a.ptr[r] ?? 0; p < (a.ptr[r + 1] ?? 0); p++) {
      const row = out[r];
      if (row !== undefined) row[a.col[p] ?? 0] = { re: a.re[p] ?? 0, im: a.im?.[p] ?? 0 };
    }
  }
  return out;
}

export const operatorOf = (a: Naive, uncertainty?: "exact"): Operator =>
  Operator.from(
    { re: a.map((row) => row.map((x) => x.re)), im: a.map((row) => row.map((x) => x.im)) },
    { uncertainty },
  );

/** A filled Hermitian matrix. */
export function hermitian(n: number, next: () => number, complex: boolean): Naive {
  const a = naive(Array.from({ length: n }, () => new Array<number>(n).fill(0)));
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const re = next();
      const im = complex && j < i ? next() : 0;
      (a[i] as Complex[])[j] = { re, im };
      (a[j] as Complex[])[i] = { re, im: -im };
    }
  }
  return a;
}

/** Orthonormal rows, to rounding (Gram and Schmidt, twice). */
export function orthonormal(count: number, n: number, next: () => number, complex: boolean): Naive {
  const rows: Naive = [];
  while (rows.length < count) {
    let row = Array.from({ length: n }, () => ({ re: next(), im: complex ? next() : 0 }));
    for (let pass = 0; pass < 2; pass++) {
      for (const other of rows) {
        const z = inner(other, row);
        row = row.map((x, k) => {
          const y = other[k] ?? { re: 0, im: 0 };
          return { re: x.re - (y.re * z.re - y.im * z.im), im: x.im - (y.re * z.im + y.im * z.re) };
        });
      }
    }
    const length = Math.hypot(...row.flatMap((x) => [x.re, x.im]));
    if (length > 1e-3) rows.push(row.map((x) => ({ re: x.re / length, im: x.im / length })));
  }
  return rows;
}

/** a†b. */
export function inner(a: readonly Complex[], b: readonly Complex[]): Complex {
  let re = 0;
  let im = 0;
  a.forEach((x, k) => {
    const y = b[k] ?? { re: 0, im: 0 };
    re += x.re * y.re + x.im * y.im;
    im += x.re * y.im - x.im * y.re;
  });
  return { re, im };
}

export const transposed = (a: Naive): Naive => (a[0] ?? []).map((_, j) => a.map((row) => row[j] ?? { re: 0, im: 0 }));

/** The normal matrix Σ a_k q_k q_k† of orthonormal rows q_k. */
export function withEigenvalues(rows: Naive, values: readonly Complex[]): Naive {
  const scaled = rows.map((row, k) => {
    const a = values[k] ?? { re: 0, im: 0 };
    return row.map((x) => ({ re: x.re * a.re - x.im * a.im, im: x.re * a.im + x.im * a.re }));
  });
  return naiveProduct(transposed(scaled), naiveAdjoint(transposed(rows)));
}

/** The largest component of A q − a q over the rows q. */
export function residual(a: Naive, rows: Naive, value: Complex): number {
  const images = transposed(naiveProduct(a, transposed(rows)));
  return Math.max(
    0,
    ...images.flatMap((image, r) =>
      image.map((x, k) => {
        const q = rows[r]?.[k] ?? { re: 0, im: 0 };
        return Math.hypot(x.re - value.re * q.re + value.im * q.im, x.im - value.re * q.im - value.im * q.re);
      }),
    ),
  );
}

/** The matrix conj(Q) A Qᵀ of elements q_i† A q_j. */
export const restricted = (a: Naive, rows: Naive): Naive =>
  naiveProduct(naiveAdjoint(transposed(rows)), naiveProduct(a, transposed(rows)));

export const prepare = (problem: Problem): PreparedProblem => prepareProblem(problem);

/** Hopping by `step` sites round a ring of one-dimensional sites, both ways. */
export function ringHopping(sites: number, step = 1, amplitude = 1): Operator {
  const entries = Array.from({ length: sites }, (_, i) => [
    [(i + step) % sites, i, amplitude] as const,
    [i, (i + step) % sites, amplitude] as const,
  ]).flat();
  return Operator.fromTriplets(sites, entries, { uncertainty: "exact" });
}

export const ringTranslation = (sites: number): Operator =>
  Operator.permutation(Array.from({ length: sites }, (_, i) => (i + 1) % sites));

export const ringReflection = (sites: number): Operator =>
  Operator.permutation(Array.from({ length: sites }, (_, i) => (sites - i) % sites));
