import fc from "fast-check";
import { Fraction } from "fraction.js";
import { describe, expect, it } from "vitest";
import { roundRoot } from "../../src/exact/round.js";
import { Surd, type SurdInput } from "../../src/exact/surd.js";
import { fraction, nonzero, realSurd, rootOf, surd } from "./arbitrary.js";
import { agree, inFixed, plus, times } from "./oracle.js";

const of = (x: SurdInput): Surd => Surd.from(x);

describe("the field", () => {
  it("is commutative, associative and distributive", () => {
    fc.assert(
      fc.property(surd, surd, surd, (a, b, c) => {
        expect(a.plus(b).equals(b.plus(a))).toBe(true);
        expect(a.times(b).equals(b.times(a))).toBe(true);
        expect(
          a
            .plus(b)
            .plus(c)
            .equals(a.plus(b.plus(c))),
        ).toBe(true);
        expect(
          a
            .times(b)
            .times(c)
            .equals(a.times(b.times(c))),
        ).toBe(true);
        expect(a.times(b.plus(c)).equals(a.times(b).plus(a.times(c)))).toBe(true);
      }),
      { seed: 11, numRuns: 150 },
    );
  });

  it("has neutral elements and inverses", () => {
    fc.assert(
      fc.property(surd, (a) => {
        expect(a.plus(0).equals(a) && a.times(1).equals(a) && a.times(0).isZero).toBe(true);
        expect(a.minus(a).isZero && a.plus(a.negate()).isZero).toBe(true);
        if (!a.isZero) {
          expect(a.times(a.inverse()).equals(1)).toBe(true);
          expect(a.inverse().inverse().equals(a)).toBe(true);
        }
      }),
      { seed: 12, numRuns: 150 },
    );
  });

  it("divides what it multiplied", () => {
    fc.assert(
      fc.property(surd, nonzero(surd), (a, b) => a.times(b).over(b).equals(a)),
      { seed: 13, numRuns: 100 },
    );
  });

  it("agrees with fixed-point arithmetic of 400 binary places", () => {
    fc.assert(
      fc.property(surd, nonzero(surd), (a, b) => {
        const [x, y] = [inFixed(a), inFixed(b)];
        expect(agree(inFixed(a.plus(b)), plus(x, y), 250n)).toBe(true);
        expect(agree(inFixed(a.times(b)), times(x, y), 200n)).toBe(true);
        expect(agree(times(inFixed(a.over(b)), y), x, 100n)).toBe(true);
      }),
      { seed: 14, numRuns: 100 },
    );
  });

  it("conjugates: a ring map of order two, the modulus real and not negative", () => {
    fc.assert(
      fc.property(surd, surd, (a, b) => {
        expect(a.conjugate().conjugate().equals(a)).toBe(true);
        expect(a.times(b).conjugate().equals(a.conjugate().times(b.conjugate()))).toBe(true);
        expect(a.re.plus(a.im.times(Surd.i)).equals(a)).toBe(true);
        expect(a.re.isReal && a.im.isReal).toBe(true);
        expect(a.squaredModulus().sign()).toBe(a.isZero ? 0 : 1);
      }),
      { seed: 15, numRuns: 100 },
    );
  });

  it("has one form for each number: equal numbers have equal text, however they came about", () => {
    fc.assert(
      fc.property(surd, surd, nonzero(surd), (a, b, c) => {
        expect(a.plus(b).minus(b).text()).toBe(a.text());
        expect(a.times(c).over(c).text()).toBe(a.text());
      }),
      { seed: 16, numRuns: 100 },
    );
  });

  it("takes powers", () => {
    fc.assert(
      fc.property(nonzero(surd), fc.integer({ min: -3, max: 4 }), fc.integer({ min: -2, max: 3 }), (a, j, k) =>
        a
          .power(j)
          .times(a.power(k))
          .equals(a.power(j + k)),
      ),
      { seed: 17, numRuns: 40 },
    );
    expect(Surd.zero.power(0).equals(1)).toBe(true);
    expect(of("1+sqrt(2)").power(10).text()).toBe("3363+2378*sqrt(2)");
  });
});

describe("order", () => {
  it("is that of fixed-point arithmetic", () => {
    fc.assert(
      fc.property(realSurd, realSurd, (a, b) => {
        const difference = inFixed(a).re - inFixed(b).re;
        // numbers this small differ by far more than the oracle's error, or not at all
        const expected = a.equals(b) ? 0 : difference > 0n ? 1 : -1;
        return a.compare(b) === expected && b.compare(a) === (expected === 0 ? 0 : -expected);
      }),
      { seed: 21, numRuns: 300 },
    );
  });

  it("is kept by sums and by products with positive numbers", () => {
    fc.assert(
      fc.property(realSurd, realSurd, realSurd, (a, b, c) => {
        expect(a.plus(c).compare(b.plus(c))).toBe(a.compare(b));
        if (c.sign() > 0) expect(a.times(c).compare(b.times(c))).toBe(a.compare(b));
      }),
      { seed: 22, numRuns: 100 },
    );
  });

  it("is not asked of complex numbers", () => {
    for (const ask of [
      () => Surd.i.sign(),
      () => of(1).compare(Surd.i),
      () => Surd.i.toNumber(),
      () => of("1+i").enclosure(),
    ]) {
      expect(ask).toThrow(expect.objectContaining({ code: "not-real" }));
    }
  });
});

describe("hostile numbers", () => {
  it("√2 √3 − √6 is zero, and the base is refined where 6, 10 and 15 meet", () => {
    expect(of("sqrt(2)*sqrt(3)-sqrt(6)").isZero).toBe(true);
    expect(of("sqrt(6)*sqrt(10)*sqrt(15)").equals(30)).toBe(true);
    const sum = of("sqrt(6)+sqrt(10)+sqrt(15)");
    expect(sum.times(sum).text()).toBe("31+10*sqrt(6)+6*sqrt(10)+4*sqrt(15)");
    expect(sum.times(sum.inverse()).equals(1)).toBe(true);
  });

  it("√(10^40 + 1) − 10^20 is small, positive, and not zero", () => {
    const x = of("sqrt(10^40+1)-10^20");
    expect([x.sign(), x.isZero, x.toNumber()]).toEqual([1, false, 5e-21]);
    expect(x.times("sqrt(10^40+1)+10^20").equals(1)).toBe(true);
  });

  it("roots of unknown factors that belong together are found equal when they meet", () => {
    const [p, q] = [10n ** 18n + 9n, 10n ** 18n + 3n];
    // trial division splits neither p³ nor p² q
    expect(rootOf(p * p * p).minus(rootOf(p).times(p)).isZero).toBe(true);
    expect(rootOf(p * p * q).equals(rootOf(q).times(p))).toBe(true);
    expect(
      rootOf(p * q)
        .times(rootOf(q))
        .equals(rootOf(p).times(q)),
    ).toBe(true);
    expect(
      rootOf(p * q)
        .times(rootOf(p * q))
        .equals(p * q),
    ).toBe(true);
    const x = rootOf(p * p * q)
      .plus(rootOf(p * q))
      .plus(rootOf(p))
      .plus(3);
    expect(x.times(x.inverse()).equals(1)).toBe(true);
    expect(
      x
        .minus(rootOf(q).times(p))
        .minus(rootOf(p))
        .minus(3)
        .equals(rootOf(p * q)),
    ).toBe(true);
    expect(rootOf(p).equals(rootOf(q))).toBe(false);
  });

  it("a square hidden in a large root comes out once its other factor is known", () => {
    const p = 10n ** 18n + 9n;
    const hidden = rootOf(p * 1009n ** 2n * 1013n);
    const sum = hidden.plus(rootOf(p));
    expect(sum.minus(rootOf(p)).equals(rootOf(p).times(rootOf(1013n)).times(1009))).toBe(true);
    expect(sum.parts().map(({ root }) => root)).toEqual([p, p * 1013n]);
  });

  it("a fraction of two unsplit numbers has its squares looked for above and below", () => {
    // both below 2^53, their product far beyond: 94906249² · 2 is not a square, 94906249² is
    const [p, q] = [94906249n ** 2n, 10n ** 15n + 37n];
    const root = Surd.sqrt(Surd.ratio(p, q)) as Surd;
    expect(root.text()).toBe("94906249/sqrt(1000000000000037)");
    expect(root.times(root).equals(Surd.ratio(p, q))).toBe(true);
    expect(root.largeTerms).toBeUndefined();
  });

  it("nearly equal numbers have a sign at any precision", () => {
    // convergents of √2 come as close as 10^−2k
    let [n, d] = [1n, 1n];
    for (let k = 0; k < 400; k++) {
      [n, d] = [n + 2n * d, n + d];
      const difference = Surd.ratio(n, d).minus(rootOf(2n));
      expect(difference.sign()).toBe(k % 2 === 0 ? 1 : -1);
    }
    expect(d.toString().length).toBeGreaterThan(150);
  });

  it("√2 + √3 − √(5 + 2√6) needs a nested root, √2 + √3 − √5 does not vanish", () => {
    const x = of("sqrt(2)+sqrt(3)");
    expect(x.times(x).equals("5+2*sqrt(6)")).toBe(true);
    expect(roundRoot(of("5+2*sqrt(6)").terms)).toBe(x.toNumber());
    expect(Surd.sqrt("5+2*sqrt(6)")).toBeUndefined();
    expect(x.minus("sqrt(5)").sign()).toBe(1);
  });

  it("huge denominators stay exact", () => {
    const tiny = Surd.ratio(1n, 10n ** 3000n);
    expect(tiny.plus(1).minus(1).equals(tiny)).toBe(true);
    expect(of("sqrt(2)").plus(tiny).minus("sqrt(2)").sign()).toBe(1);
    expect(tiny.toNumber()).toBe(0);
    expect(tiny.inverse().toNumber()).toBe(Number.POSITIVE_INFINITY);
  });

  it("machine numbers give way to big ones without a seam", () => {
    const most = Number.MAX_SAFE_INTEGER;
    expect(of(most).plus(1).text()).toBe("9007199254740992");
    expect(of(most).times(most).text()).toBe((BigInt(most) ** 2n).toString());
    expect(of(most).times(most).over(most).equals(most)).toBe(true);
    expect(Surd.ratio(1n, BigInt(most)).times(Surd.ratio(1n, 3n)).inverse().text()).toBe(
      (BigInt(most) * 3n).toString(),
    );
    fc.assert(
      fc.property(fc.maxSafeInteger(), fc.maxSafeInteger(), fc.maxSafeInteger(), fc.maxSafeInteger(), (a, b, c, d) => {
        const x = of(a).plus(Surd.i.times(b));
        const y = of(c).plus(Surd.i.times(d));
        const [p, q, r, s] = [a, b, c, d].map(BigInt) as [bigint, bigint, bigint, bigint];
        return x.times(y).equals(Surd.from(p * r - q * s).plus(Surd.i.times(p * s + q * r)));
      }),
      { seed: 31 },
    );
  });

  it("division by zero is a typed error", () => {
    const zero = of("sqrt(2)*sqrt(3)-sqrt(6)");
    for (const divide of [
      () => of(1).over(zero),
      () => zero.inverse(),
      () => Surd.ratio(1n, 0n),
      () => zero.power(-1),
    ]) {
      expect(divide).toThrow(expect.objectContaining({ code: "zero-division" }));
    }
  });

  it("powers out of hand are a typed error", () => {
    expect(() => of(3).power(10_000_000)).toThrow(expect.objectContaining({ code: "budget" }));
    expect(() => of(3).power(0.5)).toThrow(expect.objectContaining({ code: "option" }));
    expect(of(1).power(10_000_000).equals(1)).toBe(true);
    expect(Surd.zero.power(10_000_000).isZero).toBe(true);
    expect(Surd.i.power(10_000_001).equals(Surd.i)).toBe(true);
    expect(() => of("1+i").power(10_000_000)).toThrow(expect.objectContaining({ code: "budget" }));
  });
});

describe("reading", () => {
  it("takes doubles as their exact dyadic value, decimals in text as decimals", () => {
    expect(of(0.1).text()).toBe("3602879701896397/36028797018963968");
    expect(of("0.1").text()).toBe("1/10");
    expect(of(0.5).equals("1/2")).toBe(true);
    expect(of(1e-9).isZero).toBe(false);
    expect(of({ re: 0.25, im: -2 }).text()).toBe("1/4-2i");
    fc.assert(
      fc.property(fc.double({ noNaN: true, noDefaultInfinity: true }), (x) => of(x).toNumber() === x + 0),
      { seed: 41, numRuns: 300 },
    );
  });

  it("takes fractions and big integers, and gives its terms as fractions", () => {
    expect(of(new Fraction("-22/7")).equals("-22/7")).toBe(true);
    expect(of(10n ** 30n).text()).toBe((10n ** 30n).toString());
    const parts = of("(1+2i)/3+3/4*sqrt(5)").parts();
    expect(parts.map(({ root, re, im }) => `${root}: ${re.toFraction()} ${im.toFraction()}`)).toEqual([
      "1: 1/3 2/3",
      "5: 3/4 0",
    ]);
    fc.assert(
      fc.property(fraction, (x) => of(x.parts()[0]?.re ?? 0).equals(x)),
      { seed: 42 },
    );
  });

  it("says no to anything else", () => {
    for (const input of [null, undefined, {}, [], true, { re: 1 }]) {
      expect(() => Reflect.apply(Surd.from, Surd, [input])).toThrow(expect.objectContaining({ code: "option" }));
    }
    expect(() => of(Number.NaN)).toThrow(expect.objectContaining({ code: "not-finite" }));
    expect(() => Surd.fromSafe(0.5, 0, 1)).toThrow(expect.objectContaining({ code: "option" }));
    expect(() => Surd.fromSafe(1, 0, 0)).toThrow(expect.objectContaining({ code: "option" }));
  });

  it("knows what kind of number it has", () => {
    const kinds = (x: string): boolean[] => [of(x).isZero, of(x).isReal, of(x).isRational, of(x).isInteger];
    expect(kinds("0")).toEqual([true, true, true, true]);
    expect(kinds("1/2")).toEqual([false, true, true, false]);
    expect(kinds("10^30")).toEqual([false, true, true, true]);
    expect(kinds("10^-30")).toEqual([false, true, true, false]);
    expect(kinds("sqrt(2)")).toEqual([false, true, false, false]);
    expect(kinds("1+sqrt(2)")).toEqual([false, true, false, false]);
    expect(kinds("i")).toEqual([false, false, false, false]);
  });

  it("takes roots of rational numbers from 0 on", () => {
    fc.assert(
      fc.property(fraction, (x) => {
        const root = Surd.sqrt(x);
        if (x.sign() < 0) return root === undefined;
        return root?.times(root).equals(x) === true && root.sign() === x.sign();
      }),
      { seed: 43 },
    );
    expect(Surd.sqrt(Surd.i)).toBeUndefined();
  });
});
