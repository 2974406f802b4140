import { contentOf } from "./content.js";
import { bitLength } from "./integer.js";
import { derivative, divide, evaluate, type Polynomial } from "./polynomial.js";
import { Surd } from "./surd.js";

/** A closed interval with rational ends that holds exactly one root; both ends are equal where the root was met exactly. */
export interface RootInterval {
  readonly low: Surd;
  readonly high: Surd;
}

/**
 * All real roots of a polynomial, each in an interval of its own, ascending: Sturm's theorem and bisection.
 *
 * @param p - real coefficients, no double root, not zero
 * @param bits - intervals are made no wider than 2^−bits
 */
export function isolateRealRoots(p: Polynomial, bits: number): RootInterval[] {
  if (p.length <= 1) return [];
  const chain = sturmChain(p);
  const bound = rootBound(p);
  const width = Surd.from(2).power(-bits);
  const found: RootInterval[] = [];
  const split = (low: Surd, below: number, high: Surd, above: number): void => {
    // Sturm: the sign changes lost count the roots with low < root ≤ high
    if (below === above) return;
    if (below - above === 1) {
      found.push(narrow(p, low, high, width));
      return;
    }
    const middle = low.plus(high).over(2);
    const between = signChanges(chain, middle);
    split(low, below, middle, between);
    split(middle, between, high, above);
  };
  const low = bound.negate();
  split(low, signChanges(chain, low), bound, signChanges(chain, bound));
  return found;
}

/** p, p′, and the negative rests of Euclid's algorithm, each divided by a positive number to stay small. */
function sturmChain(p: Polynomial): Polynomial[] {
  const chain: Polynomial[] = [p];
  let [a, b] = [p, scaled(derivative(p))];
  while (b.length > 0) {
    chain.push(b);
    const { rest } = divide(a, b);
    [a, b] = [b, scaled(rest.map((c) => c.negate()))];
  }
  return chain;
}

function scaled(p: Polynomial): Polynomial {
  const inverse = contentOf(p).inverse();
  return p.map((c) => c.times(inverse));
}

function signChanges(chain: readonly Polynomial[], x: Surd): number {
  let changes = 0;
  let before = 0;
  for (const p of chain) {
    const sign = evaluate(p, x).sign();
    if (sign === 0) continue;
    if (before !== 0 && sign !== before) changes++;
    before = sign;
  }
  return changes;
}

/** A power of two above the modulus of every root (Cauchy: 1 + the largest quotient by the leading coefficient). */
function rootBound(p: Polynomial): Surd {
  const inverse = (p[p.length - 1] as Surd).inverse();
  let most = Surd.zero;
  for (const c of p) {
    const size = c.times(inverse);
    const modulus = size.sign() < 0 ? size.negate() : size;
    if (modulus.compare(most) > 0) most = modulus;
  }
  // the sum of moduli of all terms of a real number over its denominator bounds it
  const { roots, re, den } = most.terms;
  const bits = roots.reduce((sum, root, k) => Math.max(sum, bitLength(re[k] as bigint) + bitLength(root)), 0);
  return Surd.from(2).power(Math.max(0, bits - bitLength(den) + 1) + bitLength(BigInt(roots.length)) + 1);
}

/** Halves an interval (low, high] with one root until it is narrow. */
function narrow(p: Polynomial, from: Surd, to: Surd, width: Surd): RootInterval {
  let [low, high] = [from, to];
  const signAtHigh = evaluate(p, high).sign();
  if (signAtHigh === 0) return { low: high, high };
  while (high.minus(low).compare(width) > 0) {
    const middle = low.plus(high).over(2);
    const sign = evaluate(p, middle).sign();
    if (sign === 0) return { low: middle, high: middle };
    if (sign === signAtHigh) high = middle;
    else low = middle;
  }
  return { low, high };
}
