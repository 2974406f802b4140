import fc from "fast-check";
import { Surd } from "../../src/exact/surd.js";

/** Fractions with small parts, and now and then large ones. */
export const fraction: fc.Arbitrary<Surd> = fc
  .oneof(
    { weight: 5, arbitrary: fc.tuple(fc.bigInt(-30n, 30n), fc.bigInt(1n, 12n)) },
    { weight: 1, arbitrary: fc.tuple(fc.bigInt(-(10n ** 25n), 10n ** 25n), fc.bigInt(1n, 10n ** 20n)) },
  )
  .map(([n, d]) => Surd.ratio(n, d));

const radicand = fc.constantFrom(1n, 2n, 3n, 5n, 6n, 10n, 12n, 15n, 30n, 49n);

export const rootOf = (n: bigint): Surd => Surd.sqrt(n) ?? Surd.zero;

/** Real numbers with up to three roots over {2, 3, 5}. */
export const realSurd: fc.Arbitrary<Surd> = fc
  .array(fc.tuple(fraction, radicand), { maxLength: 3 })
  .map((terms) => terms.reduce((sum, [q, d]) => sum.plus(q.times(rootOf(d))), Surd.zero));

/** Complex numbers of the field. */
export const surd: fc.Arbitrary<Surd> = fc.oneof(
  realSurd,
  fc.tuple(realSurd, realSurd).map(([x, y]) => x.plus(y.times(Surd.i))),
);

/** Small complex numbers: what matrices of the trade hold. */
export const smallSurd: fc.Arbitrary<Surd> = fc
  .tuple(
    fc.integer({ min: -3, max: 3 }),
    fc.integer({ min: -2, max: 2 }),
    fc.constantFrom(1n, 1n, 2n, 3n),
    fc.boolean(),
  )
  .map(([n, m, d, complex]) =>
    Surd.from(n)
      .plus(complex ? Surd.i.times(m) : 0)
      .times(rootOf(d))
      .over(2),
  );

export const nonzero = (numbers: fc.Arbitrary<Surd>): fc.Arbitrary<Surd> => numbers.filter((x) => !x.isZero);
