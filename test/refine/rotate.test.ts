import { describe, expect, it } from "vitest";
import type { Complex } from "../../src/numerics/complex.js";
import type { Csr } from "../../src/numerics/csr.js";
import { diagonalCsr, multiply } from "../../src/numerics/sparse.js";
import { composed, isIdentity, rotated, rowRange } from "../../src/refine/rotate.js";
import { type Naive, naiveProduct } from "../operator/naive.js";
import { csr, hermitian, naiveOfCsr, orthonormal, random, restricted } from "./support.js";

function near(found: Csr, wanted: Naive, tolerance: number): void {
  const entries = naiveOfCsr(found);
  expect([found.rows, found.cols]).toEqual([wanted.length, wanted[0]?.length ?? 0]);
  wanted.forEach((row, i) => {
    row.forEach((x, j) => {
      const y = entries[i]?.[j] as Complex;
      expect(Math.hypot(x.re - y.re, x.im - y.im)).toBeLessThanOrEqual(tolerance);
    });
  });
}

/** A tridiagonal matrix: sparse rows. */
const band = (n: number, next: () => number): Naive =>
  hermitian(n, next, false).map((row, i) => row.map((x, j) => (Math.abs(i - j) <= 1 ? x : { re: 0, im: 0 })));

describe("rotated", () => {
  for (const [n, d] of [
    [1, 1],
    [5, 3],
    [6, 6],
    [24, 7],
    [40, 9],
  ] as const) {
    for (const [rowsComplex, matrixComplex] of [
      [false, false],
      [true, false],
      [false, true],
      [true, true],
    ] as const) {
      it(`${d} of ${n} vectors, ${rowsComplex ? "complex" : "real"}; operator ${matrixComplex ? "complex" : "real"}`, () => {
        const next = random(n + d);
        const rows = orthonormal(d, n, next, rowsComplex);
        const filled = hermitian(n, next, matrixComplex);
        // not Hermitian: both triangles count
        (filled[0] as Complex[])[n - 1] = { re: 3, im: matrixComplex ? 2 : 0 };
        for (const operator of [filled, band(n, next)]) {
          near(rotated(csr(rows), csr(operator)), restricted(operator, rows), 1e-14 * n);
        }
      });
    }
  }

  it("sparse rows of a large block stay sparse", () => {
    const n = 60;
    const next = random(9);
    const rows = csr(Array.from({ length: 4 }, (_, r) => Array.from({ length: n }, (_, k) => (k === 7 * r ? 1 : 0))));
    const operator = band(n, next);
    const found = rotated(rows, csr(operator));
    near(found, restricted(operator, naiveOfCsr(rows)), 1e-15);
    expect(found.re).toHaveLength(4);
  });

  it("stores no exact zero and no imaginary part that is zero throughout", () => {
    const found = rotated(
      csr([
        [1, 0],
        [0, { re: 0, im: 1 }],
      ]),
      csr([
        [2, 0],
        [0, 3],
      ]),
    );
    expect([...found.re]).toEqual([2, 3]);
    expect([...found.col]).toEqual([0, 1]);
    expect(found.im).toBeUndefined();
  });
});

describe("composed", () => {
  it("combines the rows of a frame, whichever form is taken", () => {
    for (const [k, n] of [
      [3, 3],
      [4, 20],
      [9, 40],
    ] as const) {
      for (const complex of [false, true]) {
        const next = random(k + n);
        const rows = orthonormal(k, k, next, complex);
        const frame = orthonormal(k, n, next, !complex);
        near(composed(csr(rows), csr(frame)), naiveProduct(rows, frame), 1e-14 * k);
      }
    }
  });

  it("costs nothing where the frame is the kets themselves", () => {
    const rows = csr(orthonormal(3, 3, random(2), true));
    expect(composed(rows, diagonalCsr([1, 1, 1]))).toBe(rows);
    expect(isIdentity(diagonalCsr([1, -1]))).toBe(false);
    expect(
      isIdentity(
        csr([
          [0, 1],
          [1, 0],
        ]),
      ),
    ).toBe(false);
    expect(isIdentity(diagonalCsr([1, 1], [0, 1e-300]))).toBe(false);
  });
});

describe("rowRange", () => {
  it("takes rows as they are, imaginary parts where there are any", () => {
    const a = csr([
      [1, 0, 2],
      [0, { re: 0, im: 3 }, 0],
      [4, 5, 6],
    ]);
    expect(naiveOfCsr(rowRange(a, 1, 2))).toEqual(naiveOfCsr(a).slice(1));
    expect(rowRange(a, 2, 1).im).toBeUndefined();
    expect(rowRange(a, 0, 3)).toBe(a);
  });
});

describe("a product of matrices without gaps", () => {
  it("has the bits of the sparse product", () => {
    for (const [leftComplex, rightComplex] of [
      [false, false],
      [true, false],
      [false, true],
      [true, true],
    ] as const) {
      for (const n of [1, 3, 4, 9]) {
        const next = random(10 * n + 1);
        const a = csr(orthonormal(n, n, next, leftComplex));
        const b = csr(orthonormal(n, n, next, rightComplex));
        // an empty column and row more: not full any more, and the same sums
        const wider = { ...a, cols: n + 1 };
        const taller = { ...b, rows: n + 1, ptr: Int32Array.from([...b.ptr, b.ptr[n] ?? 0]) };
        expect(multiply(a, b)).toEqual(multiply(wider, taller));
      }
    }
  });
});
