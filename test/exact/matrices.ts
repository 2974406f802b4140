import fc from "fast-check";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { rootOf, smallSurd } from "./arbitrary.js";

/** Dense matrices as nested arrays: the slow reference. */
export type Dense = readonly (readonly Surd[])[];

export function denseOf(operator: ExactOperator): Surd[][] {
  const rows = Array.from({ length: operator.n }, () => new Array<Surd>(operator.n).fill(Surd.zero));
  for (const { row, col, value } of operator.elements()) (rows[row] as Surd[])[col] = value;
  return rows;
}

export function denseProduct(a: Dense, b: Dense): Surd[][] {
  return a.map((row) =>
    (b[0] ?? []).map((_, j) => row.reduce((sum, x, k) => sum.plus(x.times(b[k]?.[j] ?? 0)), Surd.zero)),
  );
}

/** Sparse random matrices with small entries, roots and imaginary parts among them. */
export const matrix = (n: number, entry: fc.Arbitrary<Surd> = smallSurd): fc.Arbitrary<ExactOperator> =>
  fc
    .array(fc.tuple(fc.nat(n - 1), fc.nat(n - 1), entry), { maxLength: 2 * n })
    .map((triplets) => ExactOperator.fromTriplets(n, triplets));

export const vector = (n: number, entry: fc.Arbitrary<Surd> = smallSurd): fc.Arbitrary<ExactVector> =>
  fc.array(fc.oneof(fc.constant(Surd.zero), entry), { minLength: n, maxLength: n }).map((xs) => ExactVector.from(xs));

/** Jz, J+, J² of one angular momentum, by descending m. */
export function angularMomentum(twoJ: number): { z: ExactOperator; plus: ExactOperator; square: ExactOperator } {
  const n = twoJ + 1;
  const z = ExactOperator.diagonal(Array.from({ length: n }, (_, k) => Surd.ratio(BigInt(twoJ - 2 * k), 2n)));
  const plus = ExactOperator.fromTriplets(
    n,
    Array.from({ length: n - 1 }, (_, k) => {
      const twoM = twoJ - 2 * (k + 1);
      return [k, k + 1, rootOf(BigInt(twoJ * (twoJ + 2) - twoM * (twoM + 2))).over(2)] as const;
    }),
  );
  return { z, plus, square: plus.adjoint().times(plus).plus(z.times(z)).plus(z) };
}

/** J of two angular momenta, kets |m1 m2⟩. */
export function coupled(twoJ1: number, twoJ2: number): ReturnType<typeof angularMomentum> {
  const [a, b] = [angularMomentum(twoJ1), angularMomentum(twoJ2)];
  const total = (x: ExactOperator, y: ExactOperator): ExactOperator =>
    x.kron(ExactOperator.identity(y.n)).plus(ExactOperator.identity(x.n).kron(y));
  const z = total(a.z, b.z);
  const plus = total(a.plus, b.plus);
  return { z, plus, square: plus.adjoint().times(plus).plus(z.times(z)).plus(z) };
}
