import { GoodBasisError } from "../errors.js";
import { normPolynomial } from "../exact/norm-polynomial.js";
import {
  commonDivisor,
  degree,
  derivative,
  divide,
  evaluate,
  monic,
  type Polynomial,
  polynomial,
} from "../exact/polynomial.js";
import { type DyadicPoint, isolateRealRoots } from "../exact/real-roots.js";
import { Surd } from "../exact/surd.js";

/** A closed interval that holds one root alone: the polynomial changes its sign in it. */
export interface RootBounds {
  readonly low: Surd;
  readonly high: Surd;
}

/** The roots of a polynomial that has neither double nor complex ones, each an eigenvalue of the same multiplicity. */
export interface Roots {
  /** Monic, coefficients by ascending power. */
  readonly polynomial: Polynomial;
  /** How often each root occurs. */
  readonly multiplicity: number;
  /** One for each root, ascending, disjoint. */
  readonly intervals: readonly RootBounds[];
}

/** Binary places of the intervals. */
const BITS = 80;

/** How much smaller than its distance from zero an interval should be, and halvings that this may cost. */
const RELATIVE: Surd = Surd.from(2n ** 60n);
const MOST_BITS = 200;

/** Largest degree of a rational polynomial whose roots are isolated. */
const MOST_DEGREE = 40;

/**
 * Isolates the roots of a polynomial with real coefficients of the field, none of them double.
 *
 * The product with its conjugates is rational; of the intervals around that one's roots, those belong to the polynomial
 * in which it changes its sign.
 *
 * @throws GoodBasisError `budget` - the product has too high a degree
 */
export function isolate(p: Polynomial): RootBounds[] {
  const rational = normPolynomial(p);
  if (degree(rational) > MOST_DEGREE) {
    const message = `isolate: a rational polynomial of degree ${degree(rational)}, where at most ${MOST_DEGREE} is tried`;
    throw new GoodBasisError("budget", message, { degree: degree(rational), most: MOST_DEGREE });
  }
  const den = rational.reduce((common, c) => common.times(Surd.from(c.terms.den)), Surd.one);
  const whole = rational.map((c) => c.times(den).terms.re[0] ?? 0n);
  return isolateRealRoots(whole, BITS)
    .map(({ low, high }) => ({ low: dyadicNumber(low), high: dyadicNumber(high) }))
    .filter((bounds) => holdsRoot(p, bounds))
    .map((bounds) => narrowed(p, bounds));
}

/** Halves an interval until it is narrow beside its distance from zero, so that its middle is a good double. */
function narrowed(p: Polynomial, bounds: RootBounds): RootBounds {
  let own = bounds;
  for (let k = 0; k < MOST_BITS; k++) {
    const least = own.low.sign() > 0 ? own.low : own.high.negate();
    if (own.high.minus(own.low).times(RELATIVE).compare(least) <= 0) break;
    own = halved(p, own);
  }
  return own;
}

/** Whether a polynomial without double roots has its one root in the interval. */
export function holdsRoot(p: Polynomial, { low, high }: RootBounds): boolean {
  return evaluate(p, low).sign() * evaluate(p, high).sign() <= 0;
}

function dyadicNumber({ place, bits }: DyadicPoint): Surd {
  return bits < 0 ? Surd.from(place << BigInt(-bits)) : Surd.ratio(place, 1n << BigInt(bits));
}

/** The double nearest to the middle of an interval. */
export function middleOf({ low, high }: RootBounds): number {
  return low.plus(high).over(2).toNumber();
}

/** The same interval, halved. */
function halved(p: Polynomial, { low, high }: RootBounds): RootBounds {
  const middle = low.plus(high).over(2);
  return holdsRoot(p, { low, high: middle }) ? { low, high: middle } : { low: middle, high };
}

/** A real number that can be ordered: one of the field, or one root of a polynomial. */
export type RealPoint =
  | { readonly kind: "value"; readonly value: Surd }
  | { readonly kind: "root"; readonly polynomial: Polynomial; readonly bounds: RootBounds };

/** The sign of a − b for two different numbers: intervals are halved until they part. */
export function comparePoints(a: RealPoint, b: RealPoint): number {
  if (a.kind === "value" && b.kind === "value") return a.value.compare(b.value);
  let [x, y] = [boundsOf(a), boundsOf(b)];
  for (;;) {
    if (x.high.compare(y.low) < 0) return -1;
    if (y.high.compare(x.low) < 0) return 1;
    if (a.kind === "root") x = halved(a.polynomial, x);
    if (b.kind === "root") y = halved(b.polynomial, y);
  }
}

function boundsOf(point: RealPoint): RootBounds {
  return point.kind === "value" ? { low: point.value, high: point.value } : point.bounds;
}

/** A factor without double roots and the power in which it occurs. */
export interface Factor {
  readonly polynomial: Polynomial;
  readonly multiplicity: number;
}

/** p as a product of powers of pairwise coprime polynomials without double roots (Yun's algorithm, common practice). */
export function squareFreeFactors(p: Polynomial): Factor[] {
  const factors: Factor[] = [];
  const first = commonDivisor(p, derivative(p));
  let b = divide(p, first).quotient;
  let d = minus(divide(derivative(p), first).quotient, derivative(b));
  for (let multiplicity = 1; degree(b) > 0; multiplicity++) {
    const a = commonDivisor(b, d);
    if (degree(a) > 0) factors.push({ polynomial: monic(a), multiplicity });
    b = divide(b, a).quotient;
    d = minus(divide(d, a).quotient, derivative(b));
  }
  return factors;
}

function minus(p: Polynomial, q: Polynomial): Polynomial {
  const length = Math.max(p.length, q.length);
  return polynomial(Array.from({ length }, (_, k) => (p[k] ?? Surd.zero).minus(q[k] ?? Surd.zero)));
}

/** Whether two monic polynomials are the same. */
export function samePolynomial(p: Polynomial, q: Polynomial): boolean {
  return p.length === q.length && p.every((c, k) => c.equals(q[k] as Surd));
}

/**
 * Pairwise coprime polynomials of which every given one is a product: what two of them share is taken out until nothing
 * is shared.
 *
 * @param polynomials - monic, without double roots
 */
export function coprimePolynomials(polynomials: readonly Polynomial[]): Polynomial[] {
  const base: Polynomial[] = [];
  const pending = [...polynomials].reverse();
  for (let p = pending.pop(); p !== undefined; p = pending.pop()) {
    if (degree(p) < 1) continue;
    let shared: Polynomial = [];
    const own = p;
    const at = base.findIndex((q) => {
      shared = samePolynomial(own, q) ? own : commonDivisor(own, q);
      return degree(shared) > 0;
    });
    const other = base[at];
    if (other === undefined) {
      base.push(monic(own));
      continue;
    }
    if (samePolynomial(own, other)) continue;
    base.splice(at, 1);
    pending.push(divide(own, shared).quotient, divide(other, shared).quotient, shared);
  }
  return base;
}
