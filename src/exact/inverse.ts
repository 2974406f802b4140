import { coprimeBase } from "./coprime-base.js";
import { addTerms, mapTerms, multiplyTerms, oneTerm, selectTerms, type Terms } from "./terms.js";

/**
 * 1/a by conjugations. First over i: 1/a = a* / (a a*). Then over one element b of a coprime base of the roots after the
 * other: with a = u + w, where w gathers the roots that b divides, (u + w)(u − w) = u² − w² no longer holds √b. Each step
 * halves the degree of the field, so it ends at a rational number, which is not zero because no conjugate of a ≠ 0 is.
 *
 * @param a - not zero
 */
export function invertTerms(a: Terms): Terms {
  if (a.im.some((y) => y !== 0n)) {
    const conjugate = mapTerms(a, (re, im) => [re, -im]);
    return multiplyTerms(conjugate, invertTerms(multiplyTerms(a, conjugate)));
  }
  const [root, re] = [a.roots[0] as bigint, a.re[0] as bigint];
  // den / (x √r) = den √r / (x r)
  if (a.roots.length === 1) return oneTerm(a.den, 0n, root, re * root);
  const conjugate = conjugateOver(a, coprimeBase(a.roots)[0] as bigint);
  return multiplyTerms(conjugate, invertTerms(multiplyTerms(a, conjugate)));
}

/**
 * The conjugate over one element b of a coprime base of the roots: √b becomes −√b.
 *
 * @param element - divides each root of `a` once or not at all
 */
export function conjugateOver(a: Terms, element: bigint): Terms {
  return addTerms(
    selectTerms(a, (r) => r % element !== 0n),
    mapTerms(
      selectTerms(a, (r) => r % element === 0n),
      (x, y) => [-x, -y],
    ),
  );
}
