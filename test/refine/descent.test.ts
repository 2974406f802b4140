import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Complex } from "../../src/numerics/complex.js";
import type { Csr } from "../../src/numerics/csr.js";
import { diagonalCsr, multiply, toDense } from "../../src/numerics/sparse.js";
import { stackRows } from "../../src/numerics/stack.js";
import { Operator } from "../../src/operator/operator.js";
import {
  carriedRowError,
  compositionRowError,
  type DescentStep,
  descentStep,
  rotateAll,
  rotationError,
} from "../../src/refine/descent.js";
import type { Eigenspace } from "../../src/refine/eigenspaces.js";
import { distance } from "../numerics/bounded/exact.js";
import type { Naive } from "../operator/naive.js";
import {
  adjoint,
  columns,
  double,
  type FixedMatrix,
  fixed,
  frobenius,
  matrix,
  minus,
  norm2,
  product,
} from "../support/fixed.js";
import { fixedColumns, fixedOperator } from "../support/oracle.js";
import { csr, hermitian, naiveOfCsr, operatorOf, orthonormal, random } from "./support.js";

const space = (rows: Csr, indices?: Int32Array): Eigenspace => ({
  value: { re: 0, im: 0 },
  spread: 0,
  size: rows.rows,
  rows,
  indices,
});

/** The step to some children. */
function stepTo(spaces: readonly Eigenspace[], block: { readonly frame: Csr }): DescentStep {
  const rows = stackRows(
    spaces.map((child) => child.rows),
    block.frame.rows,
  );
  return descentStep({ spaces, rows, indices: spaces.every((child) => child.indices) ? rows.col : undefined }, block);
}

/** Rows dealt out to children of the given sizes. */
function children(rows: Naive, sizes: readonly number[]): Eigenspace[] {
  let at = 0;
  return sizes.map((size) => {
    const own = rows.slice(at, at + size);
    at += size;
    return space(csr(own, rows[0]?.length ?? 0));
  });
}

/** conj(F) V Fᵀ of the stored vectors, exactly. */
const elements = (operator: Operator, frame: Csr): FixedMatrix => {
  const q = fixedColumns(frame);
  return product(adjoint(q), product(fixedOperator(operator), q));
};

const fixedSquare = (a: Csr): FixedMatrix => {
  const t = fixedColumns(a);
  return matrix(a.rows, a.cols, (i, j) => [t.re[j * t.cols + i] ?? 0n, t.im[j * t.cols + i] ?? 0n]);
};

/** A step of a random block of `d` vectors over n kets, and its pieces. */
function scene(n: number, d: number, seed: number, complex: boolean, sizes: readonly number[]) {
  const next = random(seed);
  const frame = csr(orthonormal(d, n, next, complex));
  const v = operatorOf(hermitian(n, next, complex), "exact");
  const u = orthonormal(d, d, next, complex);
  const step = stepTo(children(u, sizes), { frame });
  return { frame, v, step };
}

/** Sizes of the children and the number of kets. */
const shapes = fc.record({
  sizes: fc.array(fc.integer({ min: 1, max: 3 }), { minLength: 2, maxLength: 3 }),
  more: fc.integer({ min: 0, max: 2 }),
  seed: fc.integer(),
  complex: fc.boolean(),
});

describe("a step down by combinations", () => {
  it("bounds the rounding errors of the new vectors, row by row and together", () => {
    fc.assert(
      fc.property(shapes, ({ sizes, more, seed, complex }) => {
        const d = sizes.reduce((a, b) => a + b, 0);
        const { frame, step } = scene(d + more, d, seed, complex, sizes);
        const computed = fixedColumns(multiply(step.rows, frame));
        const exact = product(
          fixedColumns(frame),
          matrix(d, d, (i, j) => {
            const t = fixedColumns(step.rows);
            return [t.re[i * d + j] ?? 0n, t.im[i * d + j] ?? 0n];
          }),
        );
        const error = minus(computed, exact);
        for (let r = 0; r < d; r++) expect(double(frobenius(columns(error, [r])))).toBeLessThanOrEqual(step.rowError);
        expect(double(frobenius(error))).toBeLessThanOrEqual(step.compositionError);
        expect(step.rowError).toBe(compositionRowError(d, frame));
        expect(step.rowError).toBeLessThanOrEqual(2 * (d + 4) * Math.sqrt(d) * 2 ** -53);
        expect(step.compositionError).toBeLessThanOrEqual(1.02 * Math.sqrt(d) * step.rowError);
        expect(step.indices).toBeUndefined();
      }),
      { seed: 51, numRuns: 40 },
    );
  });

  it("bounds the carried matrix's distance from the exact one over the stored vectors, in norm", () => {
    fc.assert(
      fc.property(shapes, ({ sizes, more, seed, complex }) => {
        const d = sizes.reduce((a, b) => a + b, 0);
        const { frame, v, step } = scene(d + more, d, seed, complex, sizes);
        const before = v.restrict(frame).csr;
        const known = double(norm2(minus(fixedSquare(before), elements(v, frame))));
        const carried = rotateAll({ ...step, spaces: [space(step.rows)] }, before).children[0] as Csr;
        const after = multiply(step.rows, frame);
        const truth = double(norm2(minus(fixedSquare(carried), elements(v, after))));
        const bound = rotationError(step, before, v, known);
        expect(truth).toBeLessThanOrEqual(bound);
        expect(bound - known).toBeLessThanOrEqual(16 * (2 * d + 8) * d * Math.sqrt(d) * 2 ** -53 * v.norm);
        // what was known before counts in full, and the operator's own uncertainty through the vectors' errors
        expect(rotationError(step, before, v, 1)).toBeGreaterThan(1);
        const unsure = Operator.from(v, { uncertainty: { relative: 0, absolute: 1e6 } });
        expect(rotationError(step, before, unsure, known) - bound).toBeGreaterThan(1e6 * step.compositionError);
      }),
      { seed: 52, numRuns: 25 },
    );
  });

  it("bounds the products' own rounding where the vectors have none", () => {
    let largest = 0;
    fc.assert(
      fc.property(shapes, ({ sizes, seed, complex }) => {
        const d = sizes.reduce((a, b) => a + b, 0);
        const next = random(seed);
        const v = operatorOf(hermitian(d, next, complex), "exact");
        const step = stepTo(children(orthonormal(d, d, next, complex), sizes), {
          frame: diagonalCsr(new Float64Array(d).fill(1)),
        });
        const carried = rotateAll({ ...step, spaces: [space(step.rows)] }, v.csr).children[0] as Csr;
        const truth = double(norm2(minus(fixedSquare(carried), elements(v, step.rows))));
        largest = Math.max(largest, truth);
        expect(truth).toBeLessThanOrEqual(rotationError({ ...step, compositionError: 0 }, v.csr, v, 0));
      }),
      { seed: 54, numRuns: 25 },
    );
    expect(largest).toBeGreaterThan(1e-17);
  });

  it("bounds what lies between the children, and hands each its own part", () => {
    fc.assert(
      fc.property(shapes, ({ sizes, more, seed, complex }) => {
        const d = sizes.reduce((a, b) => a + b, 0);
        const { frame, v, step } = scene(d + more, d, seed, complex, sizes);
        const before = v.restrict(frame).csr;
        const { children: parts, crossing } = rotateAll(step, before);
        const truth = elements(v, multiply(step.rows, frame));
        const child = sizes.flatMap((size, c) => new Array<number>(size).fill(c));
        const between = matrix(d, d, (i, j) =>
          child[i] === child[j] ? [0n, 0n] : [truth.re[i * d + j] ?? 0n, truth.im[i * d + j] ?? 0n],
        );
        const error = rotationError(step, before, v, 1e-14);
        const exact = double(norm2(between));
        expect(exact).toBeLessThanOrEqual(crossing + error);
        expect(crossing).toBeLessThanOrEqual(Math.sqrt(d) * exact + Math.sqrt(d) * error);
        let at = 0;
        parts.forEach((part, c) => {
          const size = sizes[c] ?? 0;
          expect([part.rows, part.cols]).toEqual([size, size]);
          const own = matrix(size, size, (i, j) => [
            truth.re[(at + i) * d + at + j] ?? 0n,
            truth.im[(at + i) * d + at + j] ?? 0n,
          ]);
          expect(double(norm2(minus(fixedSquare(part), own)))).toBeLessThanOrEqual(error);
          at += size;
        });
      }),
      { seed: 53, numRuns: 25 },
    );
  });

  it("an exact crossing is the square root of its largest row and column sums", () => {
    const step: DescentStep = stepTo(
      [
        space(csr([[1, 0, 0]]), Int32Array.of(0)),
        space(
          csr([
            [0, 1, 0],
            [0, 0, 1],
          ]),
          Int32Array.of(1, 2),
        ),
      ],
      {
        frame: diagonalCsr([1, 1, 1]),
      },
    );
    const { crossing, children: parts } = rotateAll(
      step,
      csr([
        [7, 3, { re: 0, im: 4 }],
        [3, 8, 1],
        [{ re: 0, im: -4 }, 1, 9],
      ]),
    );
    expect(crossing).toBeGreaterThanOrEqual(7);
    expect(crossing).toBeLessThan(7 * (1 + 1e-14));
    expect(parts.map(naiveOfCsr)).toEqual([
      [[{ re: 7, im: 0 }]],
      [
        [
          { re: 8, im: 0 },
          { re: 1, im: 0 },
        ],
        [
          { re: 1, im: 0 },
          { re: 9, im: 0 },
        ],
      ],
    ]);
    expect(parts.every((part) => part.im === undefined)).toBe(true);
  });
});

describe("a step down by selection", () => {
  const frame = diagonalCsr([1, 1, 1]);
  const step = stepTo(
    [
      space(
        csr([
          [0, 0, 1],
          [1, 0, 0],
        ]),
        Int32Array.of(2, 0),
      ),
      space(csr([[0, 1, 0]]), Int32Array.of(1)),
    ],
    { frame },
  );

  it("costs no rounding at all", () => {
    expect([...(step.indices ?? [])]).toEqual([2, 0, 1]);
    expect([step.rowError, step.compositionError]).toEqual([0, 0]);
    const v = Operator.from([
      [1, 2, 3],
      [2, 4, 5],
      [3, 5, 6],
    ]);
    expect(rotationError(step, v.csr, v, 0.125)).toBe(0.125);
    const { children: parts, crossing } = rotateAll(step, v.csr);
    expect(naiveOfCsr(parts[0] as Csr)).toEqual([
      [
        { re: 6, im: 0 },
        { re: 3, im: 0 },
      ],
      [
        { re: 3, im: 0 },
        { re: 1, im: 0 },
      ],
    ]);
    expect(naiveOfCsr(parts[1] as Csr)).toEqual([[{ re: 4, im: 0 }]]);
    expect(crossing).toBeGreaterThanOrEqual(7 ** 0.5 * 7 ** 0.5);
  });

  it("one child of combinations makes the whole step one of combinations", () => {
    const mixed = stepTo(
      [
        space(
          csr([
            [0.6, 0.8, 0],
            [0.8, -0.6, 0],
          ]),
        ),
        space(csr([[0, 0, 1]]), Int32Array.of(2)),
      ],
      { frame },
    );
    expect(mixed.indices).toBeUndefined();
    expect(mixed.rowError).toBe(compositionRowError(2, frame));
  });

  it("an element whose square vanishes or overflows still crosses", () => {
    for (const tiny of [2 ** -600, 2 ** 600]) {
      const { crossing } = rotateAll(
        step,
        csr([
          [0, tiny, 0],
          [tiny, 0, 0],
          [0, 0, 0],
        ]),
      );
      expect(crossing).toBeGreaterThanOrEqual(tiny);
      expect(crossing).toBeLessThan(tiny * 1.001);
      const complex = { re: 0.6 * tiny, im: 0.8 * tiny };
      expect(
        rotateAll(
          step,
          csr([
            [0, complex, 0],
            [0, 0, 0],
            [0, 0, 0],
          ]),
        ).crossing,
      ).toBeGreaterThanOrEqual(0.999 * tiny ** 0.5 * tiny ** 0.5);
    }
  });
});

describe("carriedRowError", () => {
  it("covers errors that all point one way", () => {
    // the vectors are e1, e2, e3 displaced by δ along e4; (1, 1, 1, 1)/2 of them is displaced by more than δ
    const delta = 1e-8;
    const frame = csr([
      [1, 0, 0, 0, delta],
      [0, 1, 0, 0, delta],
      [0, 0, 1, 0, delta],
      [0, 0, 0, 1, delta],
    ]);
    const h = [0.5, 0.5, 0.5, 0.5];
    const step = stepTo([space(csr([h, [0.5, 0.5, -0.5, -0.5], [0.5, -0.5, 0.5, -0.5], [0.5, -0.5, -0.5, 0.5]]))], {
      frame,
    });
    const moved = naiveOfCsr(multiply(step.rows, frame))[0]?.[4]?.re ?? 0;
    expect(moved).toBeGreaterThan(1.9 * delta);
    expect(carriedRowError(step, delta)).toBeGreaterThanOrEqual(moved);
    expect(carriedRowError(step, delta)).toBeLessThan(2.1 * delta);
    expect(carriedRowError(step, 0)).toBeGreaterThanOrEqual(step.rowError);
    expect(carriedRowError(step, 0)).toBeLessThan(step.rowError * 1.001);
  });

  it("a selection carries errors as they are", () => {
    const frame = diagonalCsr([1, 1]);
    const step = stepTo([space(csr([[0, 1]]), Int32Array.of(1)), space(csr([[1, 0]]), Int32Array.of(0))], {
      frame,
    });
    expect(carriedRowError(step, 1e-16)).toBeGreaterThanOrEqual(1e-16);
    expect(carriedRowError(step, 1e-16)).toBeLessThan(1.01e-16);
    expect(carriedRowError(step, 0)).toBe(0);
  });
});

describe("at the lower end of the range", () => {
  const powers = [-565, -900, -1000, -1040, -1060];

  it("bounds new vectors whose squares and products vanish", () => {
    for (const power of powers) {
      for (const complex of [false, true]) {
        const n = 5;
        const next = random(61 - power);
        const small = (a: Naive): Naive =>
          a.map((row) => row.map((x) => ({ re: x.re * 2 ** power, im: x.im * 2 ** power })));
        const frame = csr(small(orthonormal(n, n, next, complex)));
        const step = stepTo(children(orthonormal(n, n, next, complex), [2, 3]), { frame });
        const truth = distance(n, [[1, toDense(step.rows), toDense(frame)]], toDense(multiply(step.rows, frame)));
        expect(truth).toBeGreaterThan(0);
        expect(truth).toBeLessThanOrEqual(Math.sqrt(n) * step.rowError);
        expect(compositionRowError(n, diagonalCsr([0, 0]))).toBe(0);
      }
    }
  });

  it("bounds carried matrices whose norms multiply to nothing", () => {
    for (const power of powers) {
      for (const complex of [false, true]) {
        const d = 5;
        const next = random(62 - power);
        const given = hermitian(d, next, complex);
        const v = operatorOf(
          given.map((row) => row.map((x) => ({ re: x.re * 2 ** power, im: x.im * 2 ** power }))),
          "exact",
        );
        const step = stepTo(children(orthonormal(d, d, next, complex), [d]), {
          frame: diagonalCsr(new Float64Array(d).fill(1)),
        });
        const carried = rotateAll(step, v.csr).children[0] as Csr;
        const q = fixedColumns(step.rows);
        const exact = product(adjoint(q), product(fixedOperator(v, -power), q));
        const truth = norm2(minus(fixedOperator(Operator.fromCsr(carried), -power), exact));
        const bound = rotationError({ ...step, compositionError: 0 }, v.csr, v, 0);
        expect(double(truth)).toBeGreaterThan(0);
        expect(truth).toBeLessThanOrEqual(fixed(bound, -power));
        // no worse than at ordinary size, but for the smallest numbers themselves
        expect(bound).toBeLessThanOrEqual(2 ** power * 16 * (2 * d + 8) * d * d * 2 ** -53 + 16 * d ** 3 * 2 ** -1074);
      }
    }
  });

  it("keeps zeros: no operator, no error; real elements cross as they are", () => {
    const step = stepTo(children(orthonormal(3, 3, random(63), true), [1, 2]), { frame: diagonalCsr([1, 1, 1]) });
    const zero = Operator.zero(3);
    expect(rotationError(step, zero.csr, zero, 0)).toBe(0);
    expect(rotateAll(step, zero.csr).crossing).toBe(0);
    for (const tiny of [2 ** -1074, 2 ** -1070, 2 ** -1023]) {
      const pair = (x: Complex): Csr =>
        csr([
          [0, x],
          [{ re: x.re, im: -x.im }, 0],
        ]);
      const apart = stepTo([space(csr([[1, 0]]), Int32Array.of(0)), space(csr([[0, 1]]), Int32Array.of(1))], {
        frame: diagonalCsr([1, 1]),
      });
      expect(rotateAll(apart, pair({ re: 3 * tiny, im: 0 })).crossing).toBeGreaterThanOrEqual(3 * tiny);
      expect(rotateAll(apart, pair({ re: 3 * tiny, im: 4 * tiny })).crossing).toBeGreaterThanOrEqual(5 * tiny);
      expect(rotateAll(apart, pair({ re: 3 * tiny, im: 3 * tiny })).crossing).toBeGreaterThanOrEqual(4.2426 * tiny);
    }
  });
});
