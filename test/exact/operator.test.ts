import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { surd } from "./arbitrary.js";
import { angularMomentum, coupled, denseOf, denseProduct, matrix, vector } from "./matrices.js";

const same = (a: ExactOperator, b: ExactOperator): boolean => a.equals(b) && a.count === b.count;
const whole = fc.integer({ min: -9, max: 9 }).map((n) => Surd.from(n));
const third = fc
  .tuple(fc.integer({ min: -9, max: 9 }), fc.integer({ min: -4, max: 4 }))
  .map(([x, y]) => Surd.from(x).plus(Surd.i.times(y)).over(3));
const huge = fc.maxSafeInteger().map((n) => Surd.from(n));

describe("the algebra of exact operators", () => {
  for (const [name, entry] of [
    ["roots", undefined],
    ["integers", whole],
    ["complex thirds", third],
    ["integers near 2^53", huge],
  ] as const) {
    it(`multiplies ${name} as dense matrices do`, () => {
      fc.assert(
        fc.property(matrix(5, entry), matrix(5, entry), (a, b) => {
          const expected = ExactOperator.from(denseProduct(denseOf(a), denseOf(b)));
          expect(same(a.times(b), expected)).toBe(true);
          expect(same(a.commutator(b), a.times(b).minus(b.times(a)))).toBe(true);
          expect(same(a.anticommutator(b), a.times(b).plus(b.times(a)))).toBe(true);
        }),
        { seed: 101, numRuns: 60 },
      );
    });
  }

  it("is associative and distributive, and the adjoint reverses products", () => {
    fc.assert(
      fc.property(matrix(4), matrix(4), matrix(4), surd, (a, b, c, z) => {
        expect(
          a
            .times(b)
            .times(c)
            .equals(a.times(b.times(c))),
        ).toBe(true);
        expect(a.times(b.plus(c)).equals(a.times(b).plus(a.times(c)))).toBe(true);
        expect(a.times(b).adjoint().equals(b.adjoint().times(a.adjoint()))).toBe(true);
        expect(a.scale(z).adjoint().equals(a.adjoint().scale(z.conjugate()))).toBe(true);
        expect(a.minus(a).isZero && a.scale(0).isZero).toBe(true);
        expect(a.times(b).trace().equals(b.times(a).trace())).toBe(true);
        expect(a.power(3).equals(a.times(a).times(a))).toBe(true);
      }),
      { seed: 102, numRuns: 60 },
    );
  });

  it("has Kronecker products that multiply factor by factor", () => {
    fc.assert(
      fc.property(matrix(2), matrix(3), matrix(2), matrix(3), (a, b, c, d) => {
        expect(
          a
            .kron(b)
            .times(c.kron(d))
            .equals(a.times(c).kron(b.times(d))),
        ).toBe(true);
        expect(a.kron(b).adjoint().equals(a.adjoint().kron(b.adjoint()))).toBe(true);
        expect(a.kron(b).trace().equals(a.trace().times(b.trace()))).toBe(true);
      }),
      { seed: 103, numRuns: 40 },
    );
    const a = ExactOperator.from([
      [1, 2],
      [0, "1/2"],
    ]);
    const b = ExactOperator.diagonal([1, "sqrt(2)", "i"]);
    expect(a.kron(b).entry(1, 4).text()).toBe("2*sqrt(2)");
    expect(a.kron(b).entry(5, 5).text()).toBe("i/2");
  });

  it("acts on vectors and restricts to them", () => {
    fc.assert(
      fc.property(matrix(5), matrix(5), vector(5), vector(5), (a, b, v, w) => {
        expect(
          a
            .times(b)
            .apply(v)
            .equals(a.apply(b.apply(v))),
        ).toBe(true);
        expect(v.inner(a.apply(w)).equals(a.adjoint().apply(v).inner(w))).toBe(true);
        const small = a.restrict([v, w]);
        expect(small.entry(0, 1).equals(v.inner(a.apply(w)))).toBe(true);
        expect(small.entry(1, 0).equals(w.inner(a.apply(v)))).toBe(true);
      }),
      { seed: 104, numRuns: 60 },
    );
  });

  it("takes the rows and columns of some kets", () => {
    const a = ExactOperator.from([
      [1, 2, 3],
      [4, 5, 6],
      [7, 8, "sqrt(9/2)"],
    ]);
    expect([...a.principal([0, 2]).elements()].map(({ row, col, value }) => `${row}${col} ${value}`)).toEqual([
      "00 1",
      "01 3",
      "10 7",
      "11 3/sqrt(2)",
    ]);
    for (const kets of [[], [2, 0], [1, 1], [3], [-1], [0.5]]) {
      expect(() => a.principal(kets)).toThrow(expect.objectContaining({ code: "shape" }));
    }
  });
});

describe("structure", () => {
  it("is exact: a part in 10^30 is seen", () => {
    const a = ExactOperator.from([
      [1, "sqrt(2)+i"],
      ["sqrt(2)-i", 3],
    ]);
    expect([a.isHermitian, a.isReal, a.isRational, a.isDiagonal, a.isMonomial]).toEqual([
      true,
      false,
      false,
      false,
      false,
    ]);
    const tiny = ExactOperator.fromTriplets(2, [[0, 1, "10^-30"]]);
    expect([tiny.isHermitian, a.plus(tiny).isHermitian]).toEqual([false, false]);
    expect(a.plus(tiny).minus(a).isZero).toBe(false);
    expect([...a.plus(tiny).minus(a).elements()].map(({ row, col }) => [row, col])).toEqual([[0, 1]]);
  });

  it("knows diagonal, monomial, unitary and normal matrices", () => {
    const t = ExactOperator.permutation([1, 2, 0], [1, "i", "(1+i)/sqrt(2)"]);
    expect([t.isDiagonal, t.isMonomial, t.isUnitary, t.isNormal, t.isHermitian]).toEqual([
      false,
      true,
      true,
      true,
      false,
    ]);
    expect(t.entry(0, 2).text()).toBe("(1+i)/sqrt(2)");
    expect(t.apply(ExactVector.unit(3, 1)).equals(ExactVector.from([0, 0, "i"]))).toBe(true);
    const d = ExactOperator.diagonal([1, 0, "sqrt(2)"]);
    expect([d.isDiagonal, d.isMonomial, d.isUnitary, d.isNormal, d.isHermitian]).toEqual([
      true,
      true,
      false,
      true,
      true,
    ]);
    const jordan = ExactOperator.from([
      [1, 1],
      [0, 1],
    ]);
    expect([jordan.isNormal, jordan.isMonomial, jordan.isRational]).toEqual([false, false, true]);
    expect(
      ExactOperator.from([
        [0, 1],
        [0, 2],
      ]).isMonomial,
    ).toBe(false);
    expect(
      ExactOperator.identity(4).isUnitary && ExactOperator.identity(4).equals(ExactOperator.diagonal([1, 1, 1, 1])),
    ).toBe(true);
  });

  it("agrees with its definition on random matrices", () => {
    fc.assert(
      fc.property(matrix(4), (a) => {
        const hermitian = a.plus(a.adjoint());
        expect(hermitian.isHermitian).toBe(true);
        expect(a.isHermitian).toBe(a.equals(a.adjoint()));
        expect(hermitian.isNormal).toBe(true);
        expect(a.isNormal).toBe(a.times(a.adjoint()).equals(a.adjoint().times(a)));
      }),
      { seed: 105, numRuns: 100 },
    );
  });
});

describe("angular momentum, exactly", () => {
  it.each([
    [1, 1],
    [3, 2],
    [6, 3],
  ])("2j = %d and %d: [J², Jz] = 0, [J², J+] = 0, [Jz, J+] = J+", (a, b) => {
    const { z, plus, square } = coupled(a, b);
    expect(square.commutator(z).isZero).toBe(true);
    expect(square.commutator(plus).isZero).toBe(true);
    expect(z.commutator(plus).equals(plus)).toBe(true);
    expect(square.isHermitian && square.isReal).toBe(true);
  });

  it("names an element that breaks it by 1e-30", () => {
    const { z, square } = coupled(2, 1);
    const place = [...square.elements()].findIndex(({ row, col }) => row !== col);
    const { row, col } = [...square.elements()][place] ?? { row: -1, col: -1 };
    const broken = square.plus(ExactOperator.fromTriplets(square.n, [[row, 0, "10^-30"]]));
    const offenders = [...broken.commutator(z).elements()];
    expect(offenders.map((e) => [e.row, e.col])).toEqual([[row, 0]]);
    expect(Math.abs(offenders[0]?.value.toNumber() ?? 0)).toBeCloseTo(1e-30, 40);
    expect(col).toBeGreaterThan(0);
  });

  it("J² of one spin is j(j + 1)", () => {
    for (let twoJ = 1; twoJ <= 9; twoJ++) {
      const expected = ExactOperator.identity(twoJ + 1).scale(Surd.ratio(BigInt(twoJ * (twoJ + 2)), 4n));
      expect(angularMomentum(twoJ).square.equals(expected)).toBe(true);
    }
  });
});

describe("floating numbers", () => {
  it("are correctly rounded, with a radius that holds the exact entry and is zero where nothing was rounded", () => {
    fc.assert(
      fc.property(matrix(4, surd), (a) => {
        const { csr, radius } = a.toFloating();
        const back = ExactOperator.fromFloating(csr);
        for (const { row, col, value } of a.elements()) {
          const distance = back.entry(row, col).minus(value).squaredModulus();
          const e = csr.col.subarray(csr.ptr[row], csr.ptr[row + 1]).indexOf(col) + (csr.ptr[row] as number);
          const r = radius === "exact" ? 0 : (radius[e] as number);
          expect(distance.compare(Surd.from(r).power(2))).toBeLessThanOrEqual(0);
          if (r === 0) expect(distance.isZero).toBe(true);
          else expect(distance.isZero).toBe(false);
        }
      }),
      { seed: 106, numRuns: 100 },
    );
  });

  it("that are whole, or nearly so, come in as what they are", () => {
    const part = fc.oneof(
      fc.integer({ min: -4, max: 4 }),
      fc.integer({ min: -40, max: 40 }).map((n) => n / 8),
      fc.constantFrom(0, -0, 2 ** 53 - 1, 2 ** 60, 2 ** -24, 2 ** -25, 1e308, 5e-324),
    );
    fc.assert(
      fc.property(fc.array(fc.tuple(part, part), { minLength: 1, maxLength: 6 }), fc.boolean(), (parts, complex) => {
        const n = parts.length;
        const re = Float64Array.from(parts, ([x]) => x);
        const im = complex ? Float64Array.from(parts, ([, y]) => y) : undefined;
        const ptr = Int32Array.from({ length: n + 1 }, (_, k) => k);
        const a = ExactOperator.fromFloating({ rows: n, cols: n, ptr, col: ptr.slice(0, n), re, im });
        const numbers = parts.map(([x, y]) => Surd.from({ re: x, im: complex ? y : 0 }));
        expect(same(a, ExactOperator.diagonal(numbers))).toBe(true);
        const square = ExactOperator.diagonal(numbers.map((x) => x.times(x)));
        expect(same(a.times(a), square)).toBe(true);
      }),
      { seed: 4103, numRuns: 300 },
    );
  });

  it("come in as their exact dyadic values and go out unchanged", () => {
    const csr = {
      rows: 2,
      cols: 2,
      ptr: Int32Array.from([0, 2, 3]),
      col: Int32Array.from([0, 1, 1]),
      re: Float64Array.from([0.1, 0, 1e-300]),
      im: Float64Array.from([0, 0, -0.3]),
    };
    const a = ExactOperator.fromFloating(csr);
    expect([a.count, a.entry(0, 0).text()]).toEqual([2, "3602879701896397/36028797018963968"]);
    const { csr: out, radius } = a.toFloating();
    expect([[...out.re], [...(out.im ?? [])], radius]).toEqual([[0.1, 1e-300], [0, -0.3], "exact"]);
    expect(() => ExactOperator.fromFloating({ ...csr, cols: 3 })).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => ExactOperator.fromFloating({ ...csr, re: Float64Array.from([Number.NaN, 0, 0]) })).toThrow(
      expect.objectContaining({ code: "not-finite" }),
    );
  });

  it("leave a radius below the smallest double's size, and none for what overflows", () => {
    const tiny = ExactOperator.diagonal(["10^-400", "1"]).toFloating();
    expect([[...tiny.csr.re], tiny.radius]).toEqual([[0, 1], Float64Array.from([5e-324, 0])]);
    expect(() => ExactOperator.diagonal(["10^400"]).toFloating()).toThrow(
      expect.objectContaining({ code: "not-finite" }),
    );
  });
});

describe("misuse", () => {
  const one = ExactOperator.identity(2);
  const three = ExactOperator.identity(3);
  it.each<[string, () => unknown, string]>([
    ["a ragged matrix", () => ExactOperator.from([[1, 2], [3]]), "shape"],
    ["no rows", () => ExactOperator.from([]), "shape"],
    ["an entry outside", () => ExactOperator.fromTriplets(2, [[0, 2, 1]]), "shape"],
    ["a fractional index", () => ExactOperator.fromTriplets(2, [[0, 0.5, 1]]), "shape"],
    ["an entry that is no number", () => ExactOperator.from([["two"]]), "text"],
    ["a map that is no permutation", () => ExactOperator.permutation([0, 0]), "shape"],
    ["a map that leaves the kets", () => ExactOperator.permutation([0, 2]), "shape"],
    ["too few phases", () => ExactOperator.permutation([0, 1], [1]), "shape"],
    ["a sum of nothing", () => ExactOperator.sum(), "shape"],
    ["different spaces", () => one.plus(three), "shape"],
    ["different spaces", () => one.minus(three), "shape"],
    ["different spaces", () => one.times(three), "shape"],
    ["different spaces", () => one.commutator(three), "shape"],
    ["a vector of another space", () => one.apply(ExactVector.unit(3, 0)), "shape"],
    ["an entry outside", () => one.entry(2, 0), "shape"],
    ["half a power", () => one.power(0.5), "option"],
    ["a budget below one", () => one.times(one, { steps: 0 }), "option"],
    ["a budget that is too small", () => three.times(three, { steps: 2 }), "budget"],
  ])("%s is refused", (_, act, code) => {
    expect(act).toThrow(expect.objectContaining({ code }));
  });

  it("a coefficient or a field out of hand stops a product", () => {
    const long = ExactOperator.diagonal(["3^2000"]);
    expect(() => long.times(long, { digits: 1000 })).toThrow(expect.objectContaining({ code: "budget" }));
    const roots = ExactOperator.diagonal(["(1+sqrt(2))*(1+sqrt(3))*(1+sqrt(5))"]);
    const more = ExactOperator.diagonal(["(1+sqrt(7))*(1+sqrt(11))"]);
    expect(() => roots.times(more, { roots: 16 })).toThrow(expect.objectContaining({ code: "budget" }));
    expect(roots.times(more, { roots: 32 }).entry(0, 0).parts()).toHaveLength(32);
    expect(same(ExactOperator.sum(roots, more, roots), roots.scale(2).plus(more))).toBe(true);
  });
});
