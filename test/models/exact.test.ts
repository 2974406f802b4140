import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { hopping } from "../../src/models/lattice.js";
import { oscillator } from "../../src/models/oscillator.js";
import { ketPermutation, reflection, translation } from "../../src/models/permutations.js";
import { productSpace } from "../../src/models/product-space.js";
import { spinChain } from "../../src/models/spin-chain.js";
import { Operator } from "../../src/operator/operator.js";
import { expectRounded, expectWithinRadii } from "../support/exact-operator.js";

function exactOf(operator: Operator): ExactOperator {
  const { exact } = operator;
  if (exact === undefined) throw new Error("the operator is not known exactly");
  return exact;
}

describe("angular momenta, exactly", () => {
  for (const j of [0, 0.5, 1, 1.5, 2, 3.5, 5]) {
    it(`j = ${j}: commutators, J², doubles`, () => {
      const spin = angularMomentum(j);
      const [x, y, z] = [exactOf(spin.x), exactOf(spin.y), exactOf(spin.z)];
      expect(x.commutator(y).equals(z.scale("i"))).toBe(true);
      expect(y.commutator(z).equals(x.scale("i"))).toBe(true);
      expect(z.commutator(x).equals(y.scale("i"))).toBe(true);
      const square = x.power(2).plus(y.power(2)).plus(z.power(2));
      expect(square.equals(exactOf(spin.squared))).toBe(true);
      expect(exactOf(spin.plus).equals(x.plus(y.scale("i")))).toBe(true);
      expect(exactOf(spin.minus).equals(exactOf(spin.plus).adjoint())).toBe(true);
      for (const operator of [spin.x, spin.y, spin.z, spin.plus, spin.minus, spin.squared]) expectRounded(operator);
    });
  }

  it("coupled: exact where doubles are within rounding", () => {
    const [l, s] = [angularMomentum(2), angularMomentum(1.5)];
    const space = productSpace([l.n, s.n]);
    const sum = (a: Operator, b: Operator): Operator => space.embed(a, 0).plus(space.embed(b, 1));
    const [jx, jy, jz] = [sum(l.x, s.x), sum(l.y, s.y), sum(l.z, s.z)];
    const j2 = jx.power(2).plus(jy.power(2)).plus(jz.power(2));
    const dot = space.embed(l.x, 0).times(space.embed(s.x, 1));
    const ls = dot
      .plus(space.embed(l.y, 0).times(space.embed(s.y, 1)))
      .plus(space.embed(l.z, 0).times(space.embed(s.z, 1)));
    expect(j2.commutator(ls).isExact).toBe(false);
    expect(j2.commutator(ls).exact?.isZero).toBe(true);
    expect(exactOf(j2).isHermitian).toBe(true);
    expect(exactOf(j2).trace().text()).toBe(
      String([0.5, 1.5, 2.5, 3.5].reduce((total, j) => total + (2 * j + 1) * j * (j + 1), 0)),
    );
    for (const operator of [jx, jy, jz, j2, ls, j2.commutator(ls)]) expectWithinRadii(operator);
    expectRounded(space.embed(s.x, 1));
  });
});

describe("oscillators, exactly", () => {
  it("have ladder operators with roots, and powers of x that are those of the whole oscillator", () => {
    const { a, adagger, number, x, p, xPower } = oscillator(7);
    expect(exactOf(adagger.times(a)).equals(exactOf(number))).toBe(true);
    expect(exactOf(a).entry(1, 2).text()).toBe("sqrt(2)");
    expect(
      exactOf(x)
        .scale("sqrt(2)")
        .equals(exactOf(a).plus(exactOf(adagger))),
    ).toBe(true);
    expect(
      exactOf(p)
        .scale("sqrt(2)")
        .equals(exactOf(adagger).minus(exactOf(a)).scale("i")),
    ).toBe(true);
    const [wide] = [oscillator(11)];
    for (const power of [0, 1, 2, 3, 4]) {
      const kets = [0, 1, 2, 3, 4, 5, 6];
      const expected = exactOf(wide.x).power(power).principal(kets);
      expect(exactOf(xPower(power)).equals(expected)).toBe(true);
      expectWithinRadii(xPower(power));
    }
    for (const operator of [a, adagger, number, x, p]) expectRounded(operator);
    const corner = exactOf(x.commutator(p)).minus(ExactOperator.identity(7).scale("i"));
    expect([...corner.elements()].map(({ row, col, value }) => [row, col, value.text()])).toEqual([[6, 6, "-7i"]]);
  });

  it("high powers do not search large numbers for squares", () => {
    expect(exactOf(oscillator(70).xPower(64)).entry(0, 0).isRational).toBe(true);
  });
});

describe("chains and lattices, exactly", () => {
  for (const j of [0.5, 1, 1.5]) {
    it(`spin ${j}: exchange, S_z S_z and what conserves them`, () => {
      const chain = spinChain(3, j);
      const bonds = [
        [0, 1],
        [1, 2],
        [2, 0],
      ] as const;
      const h = Operator.sum(...bonds.flatMap(([i, k]) => [chain.szsz(i, k), chain.exchange(i, k)]));
      const t = translation(3, 2 * j + 1);
      const r = reflection(3, 2 * j + 1);
      const x = Operator.sum(...[0, 1, 2].map((site) => chain.sx(site)));
      for (const symmetry of [chain.totalSz, t, r, x])
        expect(exactOf(h).commutator(exactOf(symmetry)).isZero).toBe(true);
      expect(exactOf(chain.szsz(0, 1)).commutator(exactOf(x)).isZero).toBe(false);
      const exchange = exactOf(chain.sx(0))
        .times(exactOf(chain.sx(2)))
        .plus(exactOf(chain.sy(0)).times(exactOf(chain.sy(2))));
      expect(exchange.equals(exactOf(chain.exchange(0, 2)))).toBe(true);
      expectRounded(chain.exchange(0, 2));
      expectRounded(chain.plus(1));
      expectWithinRadii(h);
      expect(exactOf(t.power(3)).equals(ExactOperator.identity(chain.n))).toBe(true);
    });
  }

  it("hopping takes exact amplitudes, and says nothing exactly of measured ones", () => {
    const ring = hopping(
      3,
      [
        [0, 1],
        [1, 2],
        [2, 0],
      ],
      ["1/3", "i*sqrt(2)", 2],
    );
    expect(exactOf(ring).isHermitian).toBe(true);
    expect(exactOf(ring).entry(2, 1).text()).toBe("-i*sqrt(2)");
    expect(exactOf(ring).entry(2, 0).text()).toBe("2");
    expectRounded(ring);
    expect(
      exactOf(hopping(2, [[0, 1]], -1))
        .entry(0, 1)
        .text(),
    ).toBe("-1");
    expect(
      exactOf(
        hopping(
          2,
          [
            [0, 1],
            [1, 0],
          ],
          "1/3",
        ),
      )
        .entry(0, 1)
        .text(),
    ).toBe("2/3");
    expect(hopping(2, [[0, 1]], 0.3).exact).toBeUndefined();
    expect(() => hopping(2, [[0, 1]], "x")).toThrow(
      expect.objectContaining({ code: "text", details: expect.objectContaining({ bond: 0 }) }),
    );
    expect(() =>
      hopping(
        3,
        [
          [0, 1],
          [1, 2],
        ],
        ["1", Number.NaN],
      ),
    ).toThrow(expect.objectContaining({ code: "not-finite" }));
  });

  it("permutations of kets take exact phases", () => {
    const turn = ketPermutation([1, 2, 0], ["(1+i)/sqrt(2)", "i", Surd.one]);
    expect(exactOf(turn).isUnitary).toBe(true);
    expect(exactOf(ketPermutation([1, 0])).equals(ExactOperator.permutation([1, 0]))).toBe(true);
    expect(ketPermutation([1, 0], [0.6, { re: 0.6, im: 0.8 }]).exact).toBeUndefined();
    expectRounded(turn);
  });
});
