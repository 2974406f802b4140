import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { completeAntiHermitian, isHermitian } from "../../../src/numerics/sparse/hermitian.js";
import { commutatorUpper } from "../../../src/numerics/sparse/product.js";
import { add, adjoint, commutator, fromDense, fromTriplets, toDense } from "../../../src/numerics/sparse.js";

const whole = fc.oneof(
  { weight: 3, arbitrary: fc.constant(0) },
  { weight: 2, arbitrary: fc.integer({ min: -9, max: 9 }) },
);
const square = (n: number, complex: boolean) =>
  fc
    .tuple(...[0, 1].map(() => fc.array(whole, { minLength: n * n, maxLength: n * n })))
    .map(([re = [], im]) => fromDense(n, n, re, complex ? im : undefined));
const sized = fc.tuple(fc.integer({ min: 1, max: 9 }), fc.boolean());

describe("isHermitian", () => {
  it("is true of A + A† and of nothing that differs from its adjoint", () => {
    fc.assert(
      fc.property(
        sized.chain(([n, complex]) => square(n, complex)),
        (a) => {
          const [x, y] = [toDense(a), toDense(adjoint(a))];
          const same = x.re.every((u, k) => u === y.re[k]) && (x.im?.every((u, k) => u === y.im?.[k]) ?? true);
          expect(isHermitian(a)).toBe(same);
          expect(isHermitian(add(1, a, 1, adjoint(a)))).toBe(true);
        },
      ),
      { seed: 3, numRuns: 300 },
    );
  });

  it("is false where an entry stands on one side only, first, in the middle or last", () => {
    const at = (...places: [number, number][]): boolean =>
      isHermitian(
        fromTriplets(
          4,
          4,
          places.map(([i]) => i),
          places.map(([, j]) => j),
          places.map(() => 1),
        ),
      );
    expect(at([0, 1], [1, 0], [2, 3], [3, 2], [1, 1])).toBe(true);
    for (const [i, j] of [
      [0, 3],
      [3, 0],
      [1, 2],
      [2, 1],
      [3, 2],
    ] as const) {
      expect(at([0, 1], [1, 0], [i, j])).toBe(false);
      expect(at([i, j])).toBe(false);
    }
    expect(isHermitian(fromDense(2, 3, new Float64Array(6)))).toBe(false);
    expect(isHermitian(fromDense(1, 1, [1], [1]))).toBe(false);
  });
});

describe("commutatorUpper", () => {
  it("with its mirror image is the commutator of Hermitian matrices", () => {
    fc.assert(
      fc.property(
        fc
          .tuple(fc.integer({ min: 1, max: 9 }), fc.boolean(), fc.boolean())
          .chain(([n, left, right]) => fc.tuple(square(n, left), square(n, right))),
        ([x, y]) => {
          const [a, b] = [add(1, x, 1, adjoint(x)), add(1, y, 1, adjoint(y))];
          const upper = commutatorUpper(a, b);
          for (let row = 0; row < a.rows; row++) {
            for (let e = upper.ptr[row] as number; e < (upper.ptr[row + 1] as number); e++) {
              expect(upper.col[e]).toBeGreaterThanOrEqual(row);
            }
          }
          const [found, known] = [toDense(completeAntiHermitian(upper)), toDense(commutator(a, b))];
          expect(found.re.map((u) => u + 0)).toEqual(known.re.map((u) => u + 0));
          const zeros = new Float64Array(known.re.length);
          expect((found.im ?? zeros).map((u) => u + 0)).toEqual((known.im ?? zeros).map((u) => u + 0));
        },
      ),
      { seed: 5, numRuns: 200 },
    );
  });
});
