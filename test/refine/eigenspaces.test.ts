import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Complex } from "../../src/numerics/complex.js";
import type { Csr } from "../../src/numerics/csr.js";
import { stackRows } from "../../src/numerics/stack.js";
import { type Split, type SplitOptions, splitIntoEigenspaces } from "../../src/refine/eigenspaces.js";
import type { Naive } from "../operator/naive.js";
import { adjoint, double, identity, minus, product, spectralRadius } from "../support/fixed.js";
import { fixedColumns } from "../support/oracle.js";
import { csr, hermitian, naiveOfCsr, orthonormal, random, residual, withEigenvalues } from "./support.js";

const options = (isHermitian: boolean, scale = 1): SplitOptions => ({
  hermitian: isHermitian,
  noise: 2 ** -43 * scale,
  cluster: 2 ** -36 * scale,
});

/** ‖U U† − 1‖₂ of all rows to 90 digits. */
function exactDefect(split: Split, n: number): number {
  const columns = fixedColumns(
    stackRows(
      split.spaces.map((space) => space.rows),
      n,
    ),
  );
  return double(spectralRadius(minus(product(adjoint(columns), columns), identity(columns.cols))));
}

/** Everything a split promises of any matrix. */
function check(matrix: Csr, split: Split, isHermitian: boolean, tolerance: number, scale = 1): void {
  const n = matrix.rows;
  const a = naiveOfCsr(matrix);
  expect(split.spaces.reduce((sum, space) => sum + space.rows.rows, 0)).toBe(n);
  for (const { value, spread, rows, indices } of split.spaces) {
    expect(residual(a, naiveOfCsr(rows), value)).toBeLessThanOrEqual(tolerance * scale);
    expect(spread).toBeLessThanOrEqual(n * 2 ** -36 * scale);
    if (isHermitian) expect(value.im).toBe(0);
    if (indices !== undefined) {
      expect([...indices]).toEqual([...rows.col]);
      expect(rows.re.every((x) => x === 1)).toBe(true);
      expect(rows.im?.some((y) => y !== 0) ?? false).toBe(false);
    }
  }
  const values = split.spaces.map(({ value }) => value);
  values.forEach((x, k) => {
    for (const y of values.slice(0, k)) expect(Math.hypot(x.re - y.re, x.im - y.im)).toBeGreaterThan(2 ** -36 * scale);
  });
  const exact = exactDefect(split, n);
  expect(split.defect).toBeGreaterThanOrEqual(exact);
  expect(split.defect).toBeLessThanOrEqual(n * exact + 8 * n * (n + 4) * 2 ** -53);
}

const nearTo = (found: readonly Complex[], wanted: readonly Complex[], tolerance = 1e-12): void => {
  expect(found).toHaveLength(wanted.length);
  wanted.forEach((w, k) => {
    const f = found[k] as Complex;
    expect(Math.hypot(f.re - w.re, f.im - w.im), `value ${k}: ${f.re} + ${f.im}i`).toBeLessThan(tolerance);
  });
};

const real = (x: number): Complex => ({ re: x, im: 0 });

describe("a diagonal operator", () => {
  it("groups indices without arithmetic, by descending value", () => {
    const matrix = csr([
      [2, 0, 0, 0, 0],
      [0, -1, 0, 0, 0],
      [0, 0, 2, 0, 0],
      [0, 0, 0, 0, 0],
      [0, 0, 0, 0, -1],
    ]);
    const split = splitIntoEigenspaces(matrix, options(true));
    expect(split.spaces.map((s) => [s.value.re, s.spread, [...(s.indices ?? [])]])).toEqual([
      [2, 0, [0, 2]],
      [0, 0, [3]],
      [-1, 0, [1, 4]],
    ]);
    expect(split.defect).toBe(0);
    check(matrix, split, true, 0);
  });

  it("a gap of exactly the cluster width joins", () => {
    const matrix = csr([
      [0, 0],
      [0, 0.25],
    ]);
    expect(splitIntoEigenspaces(matrix, { hermitian: true, noise: 0, cluster: 0.25 }).spaces).toHaveLength(1);
    expect(splitIntoEigenspaces(matrix, { hermitian: true, noise: 0, cluster: 0.25 - 2 ** -54 }).spaces).toHaveLength(
      2,
    );
  });

  it("takes neighbours up to the cluster width as one value, by gaps, and states their spread", () => {
    const matrix = csr([
      [1, 0, 0, 0],
      [0, 1.4, 0, 0],
      [0, 0, 1.8, 0],
      [0, 0, 0, 2.5],
    ]);
    const { spaces } = splitIntoEigenspaces(matrix, { hermitian: true, noise: 0, cluster: 0.41 });
    expect(spaces.map((s) => [...(s.indices ?? [])])).toEqual([[3], [0, 1, 2]]);
    expect(spaces[1]?.value.re).toBeCloseTo(1.4, 15);
    expect(spaces[1]?.spread).toBeCloseTo(0.4, 15);
    expect(splitIntoEigenspaces(matrix, { hermitian: true, noise: 0, cluster: 0.39 }).spaces).toHaveLength(4);
  });

  it("orders the eigenvalues of any other operator by angle from 0, then by size", () => {
    const values: Complex[] = [
      { re: 0, im: -1 },
      real(-1),
      { re: 1, im: -1e-12 },
      { re: 0, im: 1 },
      real(3),
      { re: -2, im: -2 },
    ];
    const matrix = csr(values.map((z, i) => values.map((_, j) => (i === j ? z : 0))));
    const split = splitIntoEigenspaces(matrix, options(false));
    expect(split.spaces.map((s) => [...(s.indices ?? [])])).toEqual([[4], [2], [3], [1], [5], [0]]);
    check(matrix, split, false, 0);
  });

  it("keeps apart what differs in the imaginary part only, and joins what differs in neither", () => {
    const values: Complex[] = [
      { re: 1, im: 1 },
      { re: 1, im: -1 },
      { re: 1, im: 1 + 1e-13 },
      { re: 2, im: 1 },
    ];
    const matrix = csr(values.map((z, i) => values.map((_, j) => (i === j ? z : 0))));
    const { spaces } = splitIntoEigenspaces(matrix, options(false));
    expect(spaces.map((s) => [...(s.indices ?? [])])).toEqual([[3], [0, 2], [1]]);
    expect(spaces[1]?.spread).toBeGreaterThanOrEqual(0.49e-13);
    expect(spaces[1]?.value.im).toBeGreaterThan(1);
  });

  it("drops the imaginary part where a Hermitian operator is announced", () => {
    const { spaces } = splitIntoEigenspaces(csr([[{ re: 2, im: 1e-20 }]]), options(true));
    expect(spaces.map(({ value }) => value)).toEqual([{ re: 2, im: 0 }]);
  });
});

describe("a monomial operator", () => {
  const shift = (n: number, phase: Complex = real(1)): Csr =>
    csr(
      Array.from({ length: n }, (_, i) =>
        Array.from({ length: n }, (_, j) => ((j + 1) % n === i ? (i === 0 ? phase : 1) : 0)),
      ),
    );

  it("falls apart into the characters of its cycles, exactly where these are exact", () => {
    const split = splitIntoEigenspaces(shift(4), options(false));
    expect(split.spaces.map(({ value }) => value)).toEqual([real(1), { re: 0, im: 1 }, real(-1), { re: 0, im: -1 }]);
    expect(split.spaces[2]?.rows.re).toEqual(Float64Array.of(0.5, -0.5, 0.5, -0.5));
    check(shift(4), split, false, 0);
  });

  it("gathers equal characters of different cycles and fixed kets into one space", () => {
    // (0 3)(1 4 5)(2): eigenvalue 1 three times
    const matrix = csr([
      [0, 0, 0, 1, 0, 0],
      [0, 0, 0, 0, 0, 1],
      [0, 0, 1, 0, 0, 0],
      [1, 0, 0, 0, 0, 0],
      [0, 1, 0, 0, 0, 0],
      [0, 0, 0, 0, 1, 0],
    ]);
    const split = splitIntoEigenspaces(matrix, options(false));
    nearTo(
      split.spaces.map((s) => s.value),
      [real(1), { re: -0.5, im: Math.sqrt(0.75) }, real(-1), { re: -0.5, im: -Math.sqrt(0.75) }],
    );
    expect(split.spaces.map((s) => s.rows.rows)).toEqual([3, 1, 1, 1]);
    check(matrix, split, false, 1e-15);
  });

  it("bounds the defect of every cycle, also of those that share a length", () => {
    for (const phase of [real(1), real(-1), { re: 0, im: 1 }, { re: 0.6, im: 0.8 }]) {
      for (const n of [2, 3, 5, 7]) {
        const one = naiveOfCsr(shift(n, phase));
        const two = naiveOfCsr(shift(n, { re: phase.re, im: -phase.im }));
        const zero = new Array<Complex>(n).fill(real(0));
        const both = csr([...one.map((row) => [...row, ...zero]), ...two.map((row) => [...zero, ...row])]);
        check(both, splitIntoEigenspaces(both, options(false)), false, 2e-15);
      }
    }
  });

  it("a Hermitian one has the values ±1, whatever its phases", () => {
    const matrix = csr([
      [0, { re: 0.28, im: 0.96 }, 0],
      [{ re: 0.28, im: -0.96 }, 0, 0],
      [0, 0, -1],
    ]);
    const split = splitIntoEigenspaces(matrix, options(true));
    nearTo(
      split.spaces.map((s) => s.value),
      [real(1), real(-1)],
      1e-15,
    );
    expect(split.spaces.map((s) => s.rows.rows)).toEqual([1, 2]);
    check(matrix, split, true, 1e-15);
  });

  it("whose entries are not of modulus one goes to the eigensolver", () => {
    const matrix = csr([
      [0, 2, 0, 0],
      [2, 0, 0, 0],
      [0, 0, 0, 1],
      [0, 0, 1, 0],
    ]);
    const split = splitIntoEigenspaces(matrix, options(true, 2));
    nearTo(
      split.spaces.map((s) => s.value),
      [real(2), real(1), real(-1), real(-2)],
      1e-15,
    );
    check(matrix, split, true, 1e-15);
  });

  it("hidden in noise is still solved in closed form", () => {
    const noisy = naiveOfCsr(shift(4));
    noisy[0]?.splice(2, 1, { re: 1e-15, im: 0 });
    noisy[1]?.splice(3, 1, { re: 0, im: -1e-15 });
    const { spaces } = splitIntoEigenspaces(csr(noisy), options(false));
    expect(spaces.map(({ value }) => value)).toEqual([real(1), { re: 0, im: 1 }, real(-1), { re: 0, im: -1 }]);
  });
});

describe("a filled operator", () => {
  for (const complex of [false, true]) {
    it(`${complex ? "complex" : "real"} Hermitian: random matrices`, () => {
      fc.assert(
        fc.property(fc.integer({ min: 1, max: 7 }), fc.integer(), (n, seed) => {
          const matrix = csr(hermitian(n, random(seed), complex));
          check(matrix, splitIntoEigenspaces(matrix, options(true, n)), true, 1e-14, n);
        }),
        { seed: 41, numRuns: 40 },
      );
    });

    it(`${complex ? "complex" : "real"} Hermitian: repeated eigenvalues come as spaces, by descending value`, () => {
      fc.assert(
        fc.property(
          fc.array(fc.constantFrom(-2, 0, 0.5, 3), { minLength: 1, maxLength: 7 }),
          fc.integer(),
          (list, seed) => {
            const frame = orthonormal(list.length, list.length, random(seed), complex);
            const matrix = csr(withEigenvalues(frame, list.map(real)));
            const split = splitIntoEigenspaces(matrix, options(true, 3));
            const distinct = [...new Set(list)].sort((a, b) => b - a);
            nearTo(
              split.spaces.map((s) => s.value),
              distinct.map(real),
              1e-13,
            );
            expect(split.spaces.map((s) => s.rows.rows)).toEqual(
              distinct.map((x) => list.filter((y) => y === x).length),
            );
            check(matrix, split, true, 1e-14, 3);
          },
        ),
        { seed: 42, numRuns: 40 },
      );
    });
  }

  it("normal, neither Hermitian nor monomial, with repeated eigenvalues and repeated real parts", () => {
    const choices: Complex[] = [
      { re: 1, im: 1 },
      { re: 1, im: -1 },
      { re: 1, im: 0 },
      { re: -0.5, im: 0.25 },
      { re: 0, im: -2 },
      real(0),
    ];
    fc.assert(
      fc.property(fc.array(fc.nat(choices.length - 1), { minLength: 2, maxLength: 7 }), fc.integer(), (picks, seed) => {
        const list = picks.map((k) => choices[k] as Complex);
        const frame = orthonormal(list.length, list.length, random(seed), true);
        const matrix = csr(withEigenvalues(frame, list));
        const split = splitIntoEigenspaces(matrix, options(false, 2));
        expect(split.spaces.map((s) => s.rows.rows).sort()).toEqual(
          [...new Set(picks)].map((k) => picks.filter((l) => l === k).length).sort(),
        );
        for (const { value } of split.spaces) {
          expect(list.some((z) => Math.hypot(z.re - value.re, z.im - value.im) < 1e-13)).toBe(true);
        }
        check(matrix, split, false, 2e-14, 2);
      }),
      { seed: 43, numRuns: 60 },
    );
  });

  it("values whose real parts were told apart by the imaginary ones keep their own real parts", () => {
    const list = [
      { re: 1, im: 1 },
      { re: 1 + 1e-11, im: -1 },
      { re: 1 + 2e-11, im: 0.5 },
    ];
    const matrix = csr(withEigenvalues(orthonormal(3, 3, random(12), true), list));
    const { spaces } = splitIntoEigenspaces(matrix, { hermitian: false, noise: 1e-13, cluster: 1.5e-11 });
    expect(spaces).toHaveLength(3);
    for (const { value, spread, rows } of spaces) {
      const own = list.find((z) => Math.abs(z.im - value.im) < 0.1);
      // one chain of real parts: its middle, with half its length as the spread
      expect(Math.abs((own?.re ?? 0) - value.re)).toBeLessThanOrEqual(spread + 1e-14);
      expect(spread).toBeLessThan(1.1e-11);
      expect(residual(naiveOfCsr(matrix), naiveOfCsr(rows), own ?? value)).toBeLessThan(1e-14);
    }
  });

  it("a real rotation has complex eigenvectors", () => {
    const matrix = csr([
      [0.6, -0.8, 0],
      [0.8, 0.6, 0],
      [0, 0, 1],
    ]);
    const split = splitIntoEigenspaces(matrix, options(false));
    nearTo(
      split.spaces.map((s) => s.value),
      [real(1), { re: 0.6, im: 0.8 }, { re: 0.6, im: -0.8 }],
      1e-15,
    );
    check(matrix, split, false, 1e-15);
  });

  it("the eigensolver sees connected parts only", () => {
    const matrix = csr([
      [1, 0, 1, 0, 0],
      [0, 4, 0, 1, 0],
      [1, 0, 1, 0, 0],
      [0, 1, 0, 4, 0],
      [0, 0, 0, 0, 2],
    ]);
    const split = splitIntoEigenspaces(matrix, options(true, 5));
    nearTo(
      split.spaces.map((s) => s.value),
      [real(5), real(3), real(2), real(0)],
      1e-14,
    );
    expect(split.spaces.map((s) => [...s.rows.col])).toEqual([
      [1, 3],
      [1, 3],
      [0, 2, 4],
      [0, 2],
    ]);
    check(matrix, split, true, 1e-14);
  });

  it("the defect is that of the worst part, whichever comes first", () => {
    const large = hermitian(6, random(4), true);
    const small = hermitian(2, random(5), false);
    const zeros = (n: number): number[] => new Array<number>(n).fill(0);
    const alone = (a: Naive): number => splitIntoEigenspaces(csr(a), options(true)).defect;
    const both = [
      csr([...large.map((row) => [...row, ...zeros(2)]), ...small.map((row) => [...zeros(6), ...row])]),
      csr([...small.map((row) => [...row, ...zeros(6)]), ...large.map((row) => [...zeros(2), ...row])]),
    ];
    expect(alone(large)).toBeGreaterThan(alone(small));
    for (const matrix of both) expect(splitIntoEigenspaces(matrix, options(true)).defect).toBe(alone(large));
  });

  it("entries up to the noise are left out, and only those", () => {
    const matrix = csr([
      [1, 1e-3],
      [1e-3, 1],
    ]);
    const loud = splitIntoEigenspaces(matrix, { hermitian: true, noise: 1e-3, cluster: 0 });
    expect(loud.spaces.map((s) => [...(s.indices ?? [])])).toEqual([[0, 1]]);
    expect(splitIntoEigenspaces(matrix, { hermitian: true, noise: 0.999e-3, cluster: 0 }).spaces).toHaveLength(2);
  });

  it("does not depend on the unit of the operator", () => {
    const a: Naive = hermitian(4, random(7), true);
    const values = (unit: number): number[] => {
      const scaled = a.map((row) => row.map((x) => ({ re: x.re * unit, im: x.im * unit })));
      const { spaces } = splitIntoEigenspaces(csr(scaled), options(true, 4 * unit));
      return spaces.map(({ value }) => value.re / unit);
    };
    const ordinary = values(1);
    expect(ordinary).toHaveLength(4);
    for (const unit of [2 ** -600, 2 ** 600]) {
      values(unit).forEach((x, k) => {
        expect(Math.abs(x - (ordinary[k] ?? 0))).toBeLessThan(1e-14);
      });
    }
  });

  it("a matrix of no size to speak of: zero, and one by one", () => {
    const zero = splitIntoEigenspaces(
      csr([
        [0, 0],
        [0, 0],
      ]),
      { hermitian: true, noise: 0, cluster: 0 },
    );
    expect(zero.spaces.map((s) => [s.value.re, [...(s.indices ?? [])]])).toEqual([[0, [0, 1]]]);
    const one = splitIntoEigenspaces(csr([[{ re: 0, im: -2 }]]), options(false, 2));
    expect(one.spaces.map((s) => [s.value, [...(s.indices ?? [])]])).toEqual([[{ re: 0, im: -2 }, [0]]]);
  });
});
