import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { fixExactPhase } from "../../src/exact/phase.js";
import type { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import { nonzero, surd } from "./arbitrary.js";
import { vector } from "./matrices.js";

const texts = (v: ExactVector): string[] => Array.from({ length: v.n }, (_, k) => v.component(k).text());

describe("exact vectors", () => {
  it("have an inner product linear on the right", () => {
    fc.assert(
      fc.property(vector(4), vector(4), vector(4), surd, (u, v, w, z) => {
        expect(u.inner(v.plus(w, z)).equals(u.inner(v).plus(u.inner(w).times(z)))).toBe(true);
        expect(u.inner(v).equals(v.inner(u).conjugate())).toBe(true);
        expect(u.inner(u).equals(u.squaredNorm)).toBe(true);
        expect(u.squaredNorm.sign()).toBe(u.isZero ? 0 : 1);
        expect(v.plus(w).minus(w).equals(v)).toBe(true);
        expect(v.scale(z).squaredNorm.equals(v.squaredNorm.times(z.squaredModulus()))).toBe(true);
      }),
      { seed: 111, numRuns: 80 },
    );
  });

  it("become primitive without turning", () => {
    expect(texts(ExactVector.from(["2/3", "4*sqrt(2)/5", "-2"]).primitive())).toEqual(["5", "6*sqrt(2)", "-15"]);
    expect(texts(ExactVector.from(["i/2", 0, "1/2+i"]).primitive())).toEqual(["i", "0", "1+2i"]);
    expect(ExactVector.from([0, 0]).primitive().isZero).toBe(true);
    fc.assert(
      fc.property(vector(3, surd), (v) => {
        const p = v.primitive();
        if (v.isZero) return;
        const k = v.index[0] as number;
        const ratio = v.component(k).over(p.component(k));
        expect(ratio.isRational && ratio.sign() > 0 && p.scale(ratio).equals(v)).toBe(true);
        expect(p.primitive()).toBe(p);
        for (const x of p.values) expect(x.terms.den).toBe(1n);
      }),
      { seed: 112, numRuns: 80 },
    );
  });

  it("are normalised where the field holds the norm: √(2/3) and not 0.816…", () => {
    expect(texts(ExactVector.from(["sqrt(2)", 1]).normalised() as ExactVector)).toEqual(["sqrt(2/3)", "1/sqrt(3)"]);
    const butadiene = ExactVector.from([1, "(1+sqrt(5))/2", "(1+sqrt(5))/2", 1]);
    expect(butadiene.squaredNorm.text()).toBe("5+sqrt(5)");
    expect(butadiene.normalised()).toBeUndefined();
    expect(ExactVector.from([0]).normalised()).toBeUndefined();
    const size = Math.sqrt(5 + Math.sqrt(5));
    const floating = butadiene.toFloating();
    expect(floating[0]?.re).toBeCloseTo(1 / size, 15);
    expect(floating[1]?.re).toBeCloseTo((1 + Math.sqrt(5)) / 2 / size, 15);
    expect(() => ExactVector.from([0]).toFloating()).toThrow(expect.objectContaining({ code: "option" }));
  });

  it("have floating components that are those of the normalised vector, correctly rounded", () => {
    fc.assert(
      fc.property(vector(4), (v) => {
        const unit = v.normalised();
        if (unit === undefined) return;
        expect(v.toFloating()).toEqual(Array.from({ length: 4 }, (_, k) => unit.component(k).toComplex()));
      }),
      { seed: 113, numRuns: 100 },
    );
  });

  it("are sums of what is given, in any order", () => {
    const v = ExactVector.fromEntries(3, [
      [2, 1],
      [0, "sqrt(2)"],
      [2, "-1"],
    ]);
    expect([texts(v), v.values.length]).toEqual([["sqrt(2)", "0", "0"], 1]);
    expect(() => ExactVector.fromEntries(2, [[2, 1]])).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => ExactVector.unit(2, -1)).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => v.plus(ExactVector.unit(2, 0))).toThrow(expect.objectContaining({ code: "shape" }));
    expect(() => v.inner(ExactVector.unit(2, 0))).toThrow(expect.objectContaining({ code: "shape" }));
    expect(v.equals(ExactVector.unit(2, 0))).toBe(false);
  });
});

describe("the phase", () => {
  it("makes the first of the largest components real and positive, whatever the vector was multiplied by", () => {
    fc.assert(
      fc.property(vector(4), nonzero(surd), (v, z) => {
        const fixed = fixExactPhase(v);
        if (v.isZero) return;
        const squares = fixed.values.map((x) => x.squaredModulus());
        const most = squares.reduce((a, b) => (a.compare(b) >= 0 ? a : b));
        const pivot = fixed.values[squares.findIndex((x) => x.compare(most.times("0.974169")) >= 0)] as Surd;
        expect(pivot.isReal && pivot.sign() > 0).toBe(true);
        // parallel to the given vector: the Cauchy–Schwarz inequality is an equality
        const overlap = v.inner(fixed).squaredModulus();
        expect(overlap.equals(v.squaredNorm.times(fixed.squaredNorm))).toBe(true);
        const turned = fixExactPhase(v.scale(z));
        expect(turned.inner(fixed).isReal && turned.inner(fixed).sign() > 0).toBe(true);
      }),
      { seed: 114, numRuns: 80 },
    );
    expect(texts(fixExactPhase(ExactVector.from([1, "-2", 2])))).toEqual(["-1", "2", "-2"]);
    expect(texts(fixExactPhase(ExactVector.from(["1+i", "1-i"])))).toEqual(["1", "-i"]);
    // 0.99 of the largest still counts as large
    expect(texts(fixExactPhase(ExactVector.from([-99, 100])))).toEqual(["99", "-100"]);
    expect(texts(fixExactPhase(ExactVector.from([-98, 100])))).toEqual(["-49", "50"]);
    expect(fixExactPhase(ExactVector.from([0])).isZero).toBe(true);
  });
});
