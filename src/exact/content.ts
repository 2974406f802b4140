import { gcd } from "./integer.js";
import { Surd } from "./surd.js";

/**
 * The positive fraction c for which all numbers divided by c have whole coefficients without a common divisor; 1 where all are
 * zero. Dividing by it keeps vectors and polynomials that have no fixed scale small.
 */
export function contentOf(numbers: readonly Surd[]): Surd {
  let den = 1n;
  for (const x of numbers) {
    const d = x.terms.den;
    if (d !== den) den *= d / gcd(den, d);
  }
  let common = 0n;
  for (const x of numbers) {
    const { re, im, den: d } = x.terms;
    for (const list of [re, im]) {
      for (const n of list) {
        if (common === 1n) return Surd.ratio(1n, den);
        common = gcd(common, n * (den / d));
      }
    }
  }
  return common === 0n ? Surd.one : Surd.ratio(common, den);
}
