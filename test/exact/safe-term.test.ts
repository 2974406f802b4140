import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { addSafe, invertSafe, lowestTerm, multiplySafe, type SafeTerm, ZERO_TERM } from "../../src/exact/safe-term.js";
import { addTerms, multiplyTerms, oneTerm, type Terms } from "../../src/exact/terms.js";

const general = ({ n, m, r, d }: SafeTerm): Terms => oneTerm(BigInt(n), BigInt(m), BigInt(r), BigInt(d));
const whole = fc.oneof(
  fc.integer({ min: -20, max: 20 }),
  fc.maxSafeInteger(),
  fc.integer({ min: -(2 ** 27), max: 2 ** 27 }),
);
const positive = fc.oneof(fc.integer({ min: 1, max: 30 }), fc.integer({ min: 1, max: Number.MAX_SAFE_INTEGER }));
const root = fc.constantFrom(1, 1, 2, 3, 6, 10, 15, 94906249, 134217689);
const term = fc.tuple(whole, fc.oneof(fc.constant(0), whole), root, positive).map((t) => lowestTerm(...t));

/** Whether all whole numbers of a number with at most one term are safe. */
const fits = (t: Terms): boolean =>
  [...t.re, ...t.im, ...t.roots, t.den].every((n) => Number.isSafeInteger(Number(n))) && t.roots.length <= 1;

function isClean(t: SafeTerm): boolean {
  const noNegativeZero = !Object.is(t.n, -0) && !Object.is(t.m, -0);
  return noNegativeZero && t.d >= 1 && (t.n !== 0 || t.m !== 0 || t === ZERO_TERM);
}

describe("one term in machine integers", () => {
  it("multiplies and adds as big integers do, or says that it cannot", () => {
    let [kept, given] = [0, 0];
    fc.assert(
      fc.property(term, term, (a, b) => {
        const product = multiplySafe(a, b);
        const exact = multiplyTerms(general(a), general(b));
        if (product === undefined) given++;
        else {
          kept++;
          expect(general(product)).toEqual(exact);
          expect(isClean(product)).toBe(true);
        }
        const sum = addSafe(a, { ...b, r: a.r });
        if (sum === undefined) return;
        expect(general(sum)).toEqual(addTerms(general(a), general({ ...b, r: a.r })));
        expect(isClean(sum)).toBe(true);
        expect(fits(general(sum))).toBe(true);
      }),
      { seed: 201, numRuns: 2000 },
    );
    // both branches were met
    expect(kept).toBeGreaterThan(100);
    expect(given).toBeGreaterThan(100);
  });

  it("inverts as big integers do, or says that it cannot", () => {
    let kept = 0;
    fc.assert(
      fc.property(term, (a) => {
        if (a === ZERO_TERM) return;
        const inverse = invertSafe(a);
        if (inverse === undefined) return;
        kept++;
        expect(isClean(inverse)).toBe(true);
        expect(multiplyTerms(general(a), general(inverse))).toEqual(oneTerm(1n, 0n, 1n, 1n));
      }),
      { seed: 202, numRuns: 1000 },
    );
    expect(invertSafe({ n: 3, m: 0, r: 2, d: 5 })).toEqual({ n: 5, m: 0, r: 2, d: 6 });
    expect(invertSafe({ n: 1, m: 2, r: 5, d: 3 })).toEqual({ n: 3, m: -6, r: 5, d: 25 });
    expect(invertSafe({ n: 2 ** 27, m: 1, r: 1, d: 1 })).toBeUndefined();
    expect(kept).toBeGreaterThan(100);
  });

  it("has one zero", () => {
    expect(multiplySafe(ZERO_TERM, { n: -1, m: 0, r: 3, d: 7 })).toBe(ZERO_TERM);
    expect(addSafe({ n: 1, m: -2, r: 3, d: 7 }, { n: -1, m: 2, r: 3, d: 7 })).toBe(ZERO_TERM);
  });
});
