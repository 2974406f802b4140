import { GoodBasisError } from "../errors.js";
import { Surd } from "./surd.js";

/** Coefficients by ascending power; the last one is not zero, and the zero polynomial has none. */
export type Polynomial = readonly Surd[];

/** Drops leading zeros. */
export function polynomial(coefficients: readonly Surd[]): Polynomial {
  let length = coefficients.length;
  while (length > 0 && coefficients[length - 1]?.isZero) length--;
  return length === coefficients.length ? coefficients : coefficients.slice(0, length);
}

/** The degree; −1 for zero. */
export function degree(p: Polynomial): number {
  return p.length - 1;
}

/** p(x), by Horner's rule. */
export function evaluate(p: Polynomial, x: Surd): Surd {
  return p.reduceRight((sum, c) => sum.times(x).plus(c), Surd.zero);
}

/** p q. */
export function multiply(p: Polynomial, q: Polynomial): Polynomial {
  if (p.length === 0 || q.length === 0) return [];
  const out: Surd[] = new Array<Surd>(p.length + q.length - 1).fill(Surd.zero);
  for (const [j, a] of p.entries()) {
    for (const [k, b] of q.entries()) out[j + k] = (out[j + k] as Surd).plus(a.times(b));
  }
  return polynomial(out);
}

/** The derivative. */
export function derivative(p: Polynomial): Polynomial {
  return polynomial(p.slice(1).map((c, k) => c.times(k + 1)));
}

/** The same polynomial with leading coefficient 1; zero stays zero. */
export function monic(p: Polynomial): Polynomial {
  const head = p[p.length - 1];
  if (head === undefined || head.equals(1)) return p;
  const inverse = head.inverse();
  return p.map((c) => c.times(inverse));
}

/**
 * Quotient and rest of p / q, the rest of lower degree than q.
 *
 * @throws GoodBasisError `zero-division`
 */
export function divide(p: Polynomial, q: Polynomial): { quotient: Polynomial; rest: Polynomial } {
  const head = q[q.length - 1];
  if (head === undefined) throw new GoodBasisError("zero-division", "divide: the divisor is the zero polynomial");
  const inverse = head.inverse();
  const rest = [...p];
  const quotient: Surd[] = new Array<Surd>(Math.max(0, p.length - q.length + 1)).fill(Surd.zero);
  for (let k = p.length - q.length; k >= 0; k--) {
    const factor = (rest[k + q.length - 1] as Surd).times(inverse);
    quotient[k] = factor;
    if (factor.isZero) continue;
    for (const [j, c] of q.entries()) rest[k + j] = (rest[k + j] as Surd).minus(c.times(factor));
  }
  return { quotient: polynomial(quotient), rest: polynomial(rest) };
}

/** The monic greatest common divisor (Euclid over the field); zero only for zero and zero. */
export function commonDivisor(p: Polynomial, q: Polynomial): Polynomial {
  let [a, b] = [monic(p), monic(q)];
  while (b.length > 0) [a, b] = [b, monic(divide(a, b).rest)];
  return a;
}

/** The monic polynomial with the same roots, each once: p / gcd(p, p′). */
export function squareFreePart(p: Polynomial): Polynomial {
  if (p.length <= 1) return monic(p);
  return monic(divide(p, commonDivisor(p, derivative(p))).quotient);
}

/** The polynomial Π (x − root). */
export function fromRoots(roots: readonly Surd[]): Polynomial {
  return roots.reduce<Polynomial>((p, root) => multiply(p, [root.negate(), Surd.one]), [Surd.one]);
}
