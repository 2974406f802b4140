import { coprimeBase } from "./coprime-base.js";
import { conjugateOver } from "./inverse.js";
import { multiply, type Polynomial, squareFreePart } from "./polynomial.js";
import { Surd } from "./surd.js";

/**
 * A polynomial with rational coefficients that vanishes at every root of the given one: the product of its conjugates over i
 * and over the elements of a coprime base of all roots in its coefficients, double roots taken out on the way.
 *
 * @returns monic, without double roots
 */
export function normPolynomial(p: Polynomial): Polynomial {
  let norm = squareFreePart(p);
  if (norm.some((c) => !c.isReal)) {
    norm = squareFreePart(
      multiply(
        norm,
        norm.map((c) => c.conjugate()),
      ),
    );
  }
  for (;;) {
    const [element] = coprimeBase(norm.flatMap((c) => c.terms.roots));
    if (element === undefined) return norm;
    const conjugate = norm.map((c) => Surd.fromTerms(conjugateOver(c.terms, element)));
    norm = squareFreePart(multiply(norm, conjugate));
  }
}
