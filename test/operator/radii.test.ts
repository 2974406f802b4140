import fc from "fast-check";
import { describe, expect, test } from "vitest";
import { Operator } from "../../src/operator/operator.js";
import type { Uncertainty } from "../../src/operator/read.js";
import {
  complex,
  type ExactMatrix,
  exactOf,
  exactProduct,
  exactSum,
  fractionOf,
  minus,
  plus,
  radiusOf,
  times,
  violations,
} from "./exact.js";

const SEED = { seed: 20240611, numRuns: 40 };

const part = fc.oneof(
  { weight: 2, arbitrary: fc.constant(0) },
  { weight: 3, arbitrary: fc.integer({ min: -8, max: 8 }) },
  { weight: 3, arbitrary: fc.integer({ min: -(2 ** 52), max: 2 ** 52 }).map((k) => k * 2 ** -50) },
  { weight: 1, arbitrary: fc.integer({ min: -(2 ** 52), max: 2 ** 52 }).map((k) => k * 2 ** -80) },
);

function square(n: number, isComplex: boolean): fc.Arbitrary<Operator> {
  const entries = fc.array(part, { minLength: n * n, maxLength: n * n });
  return fc
    .tuple(entries, isComplex ? entries : fc.constant(undefined), fc.constantFrom("exact", undefined))
    .map(([re, im, uncertainty]) =>
      Operator.from({ re, im }, { uncertainty: uncertainty === "exact" ? "exact" : undefined }),
    );
}

/** A true matrix within the radii of the given one, at their very edge. */
function nearby(a: Operator, seed: number): ExactMatrix {
  let state = Math.abs(seed) + 1;
  return exactOf(a).map((row, i) =>
    row.map((x, j) => {
      state = (state * 48271) % 2147483647;
      const shift = fractionOf(radiusOf(a, i, j) * (1 - 1e-14)).mul(state % 2 === 0 ? 1 : -1);
      return (state >> 3) % 2 === 0 ? complex(x.re.add(shift), x.im) : complex(x.re, x.im.add(shift));
    }),
  );
}

const stated = fc.constantFrom<Uncertainty | undefined>(undefined, "exact", { relative: 0.01, absolute: 0.3 });

/** A matrix of any uncertainty and a true one within its radii. */
const uncertain: fc.Arbitrary<[Operator, ExactMatrix]> = fc
  .tuple(square(3, true), stated, fc.integer())
  .map(([plain, uncertainty, seed]) => {
    const a = Operator.from(plain, { uncertainty });
    return [a, nearby(a, seed)];
  });

describe("radii bound the true error", () => {
  for (const isComplex of [false, true]) {
    const pair = fc.tuple(square(4, isComplex), square(4, isComplex));
    test(`${isComplex ? "complex" : "real"} sums, products, commutators of the stored numbers`, () => {
      fc.assert(
        fc.property(pair, ([a, b]) => {
          const [x, y] = [exactOf(a), exactOf(b)];
          expect(violations(a.plus(b), exactSum(x, y))).toEqual([]);
          expect(violations(a.minus(b), exactSum(x, y, minus))).toEqual([]);
          expect(violations(a.times(b), exactProduct(x, y))).toEqual([]);
          const commutator = exactSum(exactProduct(x, y), exactProduct(y, x), minus);
          expect(violations(a.commutator(b), commutator)).toEqual([]);
          expect(violations(a.anticommutator(b), exactSum(exactProduct(x, y), exactProduct(y, x)))).toEqual([]);
        }),
        SEED,
      );
    });
  }

  test("everywhere inside the radii of the factors", () => {
    fc.assert(
      fc.property(uncertain, uncertain, ([a, x], [b, y]) => {
        expect(violations(a, x)).toEqual([]);
        expect(violations(a.plus(b), exactSum(x, y))).toEqual([]);
        expect(violations(a.times(b), exactProduct(x, y))).toEqual([]);
        expect(violations(a.times(b).times(a), exactProduct(exactProduct(x, y), x))).toEqual([]);
        expect(violations(a.commutator(b), exactSum(exactProduct(x, y), exactProduct(y, x), minus))).toEqual([]);
        const kron = x.flatMap((row) => y.map((other) => row.flatMap((u) => other.map((v) => times(u, v)))));
        expect(violations(a.kron(b), kron)).toEqual([]);
        const factor = { re: 0.3, im: -1.7 };
        const z = complex(fractionOf(factor.re), fractionOf(factor.im));
        expect(
          violations(
            a.scale(factor),
            x.map((row) => row.map((u) => times(z, u))),
          ),
        ).toEqual([]);
      }),
      SEED,
    );
  });

  test("with a diagonal factor", () => {
    const diagonal = fc.array(part, { minLength: 4, maxLength: 4 });
    fc.assert(
      fc.property(diagonal, diagonal, stated, square(4, true), fc.integer(), (re, im, uncertainty, plain, seed) => {
        const d = Operator.from({ diagonal: re, imaginary: im }, { uncertainty });
        const b = Operator.from(plain, { uncertainty });
        const [x, y] = [nearby(d, seed), nearby(b, seed)];
        const truth = exactSum(exactProduct(x, y), exactProduct(y, x), minus);
        expect(violations(d.commutator(b), truth)).toEqual([]);
        expect(violations(b.commutator(d), exactSum(exactProduct(y, x), exactProduct(x, y), minus))).toEqual([]);
      }),
      SEED,
    );
  });

  test("in the dense kernel", () => {
    fc.assert(
      fc.property(square(24, false), square(24, true), (a, b) => {
        const c = Operator.from({
          re: Array.from({ length: 24 }, (_, i) => Array.from({ length: 24 }, (_, j) => a.entry(i, j).re + 0.1)),
        });
        expect(violations(c.times(b), exactProduct(exactOf(c), exactOf(b)))).toEqual([]);
        expect(violations(b.times(b), exactProduct(exactOf(b), exactOf(b)))).toEqual([]);
        expect(c.storage).toBe("dense");
      }),
      { seed: 7, numRuns: 3, endOnFailure: true },
    );
  });

  test("where products underflow", () => {
    const a = Operator.from(
      [
        [3e-200, 1],
        [0, 7e-170],
      ],
      { uncertainty: "exact" },
    );
    const b = Operator.from(
      [
        [5e-200, 2e-160],
        [1e-150, 3e-160],
      ],
      { uncertainty: "exact" },
    );
    expect(violations(a.times(b), exactProduct(exactOf(a), exactOf(b)))).toEqual([]);
    expect(
      violations(
        a.kron(b),
        exactOf(a).flatMap((r) => exactOf(b).map((s) => r.flatMap((u) => s.map((v) => times(u, v))))),
      ),
    ).toEqual([]);
  });

  describe("where numbers are huge, tiny or subnormal", () => {
    const pairs = [
      [1e200, 1e-310],
      [1e200, 5e-324],
      [1, 1e-308],
      [1, 1e-310],
      [1e-130, 1e-130],
      [1, 1e-120],
      [1e-140, 1e-140],
      [1e-178, 1e-178],
      [1e-200, 1e-120],
      [1e-310, 1e-310],
    ] as const;
    const made = (n: number, scale: number, seed: number, uncertainty: Uncertainty | undefined): Operator => {
      const numbers = (shift: number): number[][] =>
        Array.from({ length: n }, (_, i) =>
          Array.from({ length: n }, (_, j) => {
            const x = ((i * 31 + j * 17 + seed * 7 + shift) % 23) / 7 - 1.5;
            return (i * j + seed) % 5 === 0 ? 0 : Math.abs(scale * x) < 1e300 ? scale * x : x;
          }),
        );
      return Operator.from({ re: numbers(0), im: numbers(5) }, { uncertainty });
    };
    for (const n of [3, 8]) {
      for (const kind of ["exact", undefined, { absolute: 1e-323 }] as const) {
        test(`products, commutators, multiples (n = ${n}, ${JSON.stringify(kind)})`, () => {
          for (const [k, [big, small]] of (n === 3
            ? pairs
            : pairs.slice(4, typeof kind === "object" ? 5 : 7)
          ).entries()) {
            const l = (3 * k) % 5;
            const [a, b] = [made(n, big, k, kind), made(n, small, l + 9, kind)];
            const [x, y] = [nearby(a, k + l), nearby(b, k + 2 * l)];
            const [xy, yx] = [exactProduct(x, y), exactProduct(y, x)];
            const where = `${big} by ${small}`;
            expect(violations(a.times(b), xy), where).toEqual([]);
            expect(violations(a.commutator(b), exactSum(xy, yx, minus)), where).toEqual([]);
            if (n === 8) continue;
            expect(violations(b.times(a), yx), where).toEqual([]);
            const d = Operator.from({ diagonal: [big, -big, big / 3, ...Array(n - 3).fill(0)] }, { uncertainty: kind });
            const z = nearby(d, k);
            const expected = exactSum(exactProduct(z, y), exactProduct(y, z), minus);
            expect(violations(d.commutator(b), expected), where).toEqual([]);
            const factor = complex(fractionOf(big), fractionOf(-big));
            const scaled = y.map((row) => row.map((u) => times(factor, u)));
            expect(violations(b.scale({ re: big, im: -big }), scaled), where).toEqual([]);
          }
        });
      }
    }

    test("a subnormal entry is known to half a unit only", () => {
      const a = Operator.from([[3e-323]]);
      expect(
        violations(a.scale(1e200), [
          [
            complex(
              fractionOf(3e-323 * 1e200)
                .mul(4)
                .div(5),
              fractionOf(0),
            ),
          ],
        ]),
      ).not.toEqual([]);
      // Anything from 2.7e-323 to 3.2e-323 reads as this number.
      expect(
        violations(a.scale(1e200), [
          [complex(fractionOf(3e-323).mul(13).div(12).mul(fractionOf(1e200)), fractionOf(0))],
        ]),
      ).toEqual([]);
    });
  });

  test("in the commutator of matrices whose rows are filled unequally", () => {
    for (let seed = 1; seed <= 8; seed++) {
      const rows = (fill: number, k: number): number[][] =>
        Array.from({ length: 12 }, (_, i) =>
          Array.from({ length: 12 }, (_, j) =>
            (j - i + 12) % 12 < fill ? Math.sin(1 + i * 12 + j + 1000 * k + 7919 * seed) : 0,
          ),
        );
      const exact = { uncertainty: "exact" } as const;
      const full = Operator.from({ re: rows(12, 1), im: rows(12, 2) }, exact);
      const narrow = Operator.from({ re: rows(4, 3), im: rows(4, 4) }, exact);
      const [x, y] = [exactOf(full), exactOf(narrow)];
      const truth = exactSum(exactProduct(x, y), exactProduct(y, x), minus);
      expect(violations(full.commutator(narrow), truth)).toEqual([]);
      expect(violations(narrow.commutator(full), exactSum(exactProduct(y, x), exactProduct(x, y), minus))).toEqual([]);
    }
  });

  test("where whole numbers outgrow 53 bits", () => {
    const large = 2 ** 30 + 1;
    const rows = [
      [large, 2 * large + 1],
      [-large, 2 ** 53 - 1],
    ];
    const a = Operator.from(rows, { uncertainty: "exact" });
    const x = exactOf(a);
    const product = exactProduct(x, x);
    expect(a.times(a).isExact).toBe(false);
    expect(violations(a.times(a), product)).toEqual([]);
    expect(violations(a.plus(a.adjoint()), exactSum(x, exactOf(a.adjoint())))).toEqual([]);
    expect(violations(a.scale(3), exactSum(exactSum(x, x), x))).toEqual([]);
  });

  test("of duplicates that are summed", () => {
    const values = [0.1, 0.2, -0.3, 1e-17];
    const a = Operator.fromTriplets(
      2,
      values.map((x) => [0, 1, x] as const),
    );
    const truth = values.map((x) => complex(fractionOf(x), fractionOf(0))).reduce(plus);
    expect(violations(a, [[complex(fractionOf(0), fractionOf(0)), truth]])).toEqual([]);
    expect(radiusOf(a, 0, 1)).toBeGreaterThan(0);
  });
});

describe("what is exact stays exact", () => {
  const exact = { uncertainty: "exact" } as const;
  const whole = Operator.from(
    [
      [1, -2, 0.5],
      [0, 3, 4],
      [7, 0.25, 0],
    ],
    exact,
  );
  const rough = Operator.from(
    [
      [0.1, 0, 1e-17],
      [0.2, 3, 0],
      [1 / 3, 0, 7],
    ],
    exact,
  );
  const shift = Operator.permutation([1, 2, 0], [1, { re: 0, im: -1 }, -1]);

  test("small dyadic numbers through sums and products", () => {
    for (const c of [whole.plus(whole), whole.times(whole), whole.commutator(shift), whole.scale({ re: 3, im: 2 })]) {
      expect(c.isExact).toBe(true);
      expect(c.error).toBe(0);
    }
    expect(whole.power(5).isExact).toBe(true);
  });

  test("adjoints, permutations, powers of two, Kronecker products with the identity", () => {
    for (const c of [
      rough.adjoint(),
      rough.times(shift),
      shift.times(rough),
      rough.scale(-0.5),
      rough.scale({ re: 0, im: 4 }),
      rough.kron(Operator.identity(3)),
      Operator.identity(2).kron(rough),
      rough.minus(rough),
    ]) {
      expect(c.isExact).toBe(true);
    }
  });

  test("the default radius is not inflated by them", () => {
    const plain = Operator.from([
      [0.1, 0, 1],
      [0.2, 3, 0],
      [1 / 3, 0, 7],
    ]);
    for (const c of [
      plain.adjoint(),
      plain.times(shift),
      shift.times(plain),
      plain.scale(-0.5),
      Operator.identity(2).kron(plain),
      plain.restrict(Operator.identity(3).csr),
    ]) {
      expect(c.radius).toBeUndefined();
    }
  });

  test("rounding shows", () => {
    expect(rough.times(rough).error).toBeGreaterThan(0);
    expect(rough.plus(rough.scale(3)).error).toBeGreaterThan(0);
    expect(rough.scale(3).error).toBeGreaterThan(0);
  });

  test("a cancelled entry stays stored with its radius, an exact zero does not", () => {
    const a = Operator.from([
      [0.1, 1],
      [1, 0],
    ]);
    const difference = a.minus(
      Operator.from([
        [0.1, 1],
        [1, 0],
      ]),
    );
    expect(difference.csr.col.length).toBe(3);
    expect(difference.norm).toBe(0);
    expect(difference.error).toBeGreaterThan(2e-16);
    expect(difference.isDiagonal).toBe(true);
    expect(whole.minus(Operator.from(whole)).csr.col.length).toBe(0);
  });
});
