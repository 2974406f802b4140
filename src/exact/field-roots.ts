import { bitLength, gcd } from "./integer.js";
import { normPolynomial } from "./norm-polynomial.js";
import { divide, evaluate, monic, type Polynomial, squareFreePart } from "./polynomial.js";
import { isolateRealRoots, type RootInterval } from "./real-roots.js";
import { Surd } from "./surd.js";

/** The real roots of a polynomial that lie in the field in a simple form, and what is left. */
export interface FieldRoots {
  /** Ascending, each once, each proved by substitution. */
  readonly roots: readonly Surd[];
  /** The monic polynomial, without double roots, of all other roots; 1 where there are none. */
  readonly rest: Polynomial;
}

/** Above this many roots still unknown, groups of four are not tried: there are too many. */
const MOST_FOR_FOURS = 20;

/**
 * Finds the real roots that are fractions, a + b√d, or a + b√d + c√e + f√(de), over the rationals; coefficients may hold
 * roots themselves. Every root returned is proved by substitution; every real root of the first two kinds is found, of the
 * third where at most twenty roots remain.
 *
 * The polynomial is brought to whole coefficients and leading coefficient 1, where such roots belong to factors with whole
 * coefficients (Gauss's lemma): a whole root, or two or four roots whose elementary symmetric functions are whole. Isolated
 * to sufficient precision, a few roots have only one candidate for each, and exact division decides.
 *
 * @param p - not zero
 */
export function fieldRoots(p: Polynomial): FieldRoots {
  const own = squareFreePart(p);
  if (own.length === 2) return { roots: linearRoot(own), rest: linearRoot(own).length === 1 ? [Surd.one] : own };
  const rational = own.every((c) => c.isRational);
  const candidates = rationalFieldRoots(rational ? own : normPolynomial(own));
  const roots = candidates.filter((x) => evaluate(own, x).isZero).sort((a, b) => a.compare(b));
  const rest = roots.reduce((left, x) => divide(left, [x.negate(), Surd.one]).quotient, own);
  return { roots, rest: monic(rest) };
}

function linearRoot(p: Polynomial): Surd[] {
  const root = p[0]?.negate();
  return root?.isReal ? [root] : [];
}

/** The same for rational coefficients, monic and without double roots. */
function rationalFieldRoots(p: Polynomial): Surd[] {
  const scale = p.reduce((den, c) => (den * c.terms.den) / gcd(den, c.terms.den), 1n);
  const degree = p.length - 1;
  // y = scale · x has whole coefficients scale^(n − k) c_k
  const whole = p.map((c, k) => c.times(Surd.from(scale).power(degree - k)));
  return wholeRoots(whole).map((y) => y.over(scale));
}

function wholeRoots(p: Polynomial): Surd[] {
  const size = p.reduce((most, c) => Math.max(most, bitLength(c.terms.re[0] ?? 0n)), 1);
  // products of four roots of at most 2^(size + 1) are known to less than 1/8
  const intervals = isolateRealRoots(p, 4 * (size + 2) + 8);
  const search: Search = { left: p, unknown: intervals, found: [] };
  takeOnes(search);
  takePairs(search);
  if (search.unknown.length <= MOST_FOR_FOURS) takeFours(search);
  return search.found;
}

interface Search {
  left: Polynomial;
  unknown: readonly RootInterval[];
  readonly found: Surd[];
}

/** Divides a factor out if it divides and its roots are the very ones of the group, and notes them. */
function take(
  search: Search,
  factor: Polynomial,
  roots: () => readonly Surd[],
  group: readonly RootInterval[],
): boolean {
  const { quotient, rest } = divide(search.left, factor);
  if (rest.length > 0) return false;
  const values = roots().filter((x) => evaluate(factor, x).isZero);
  if (values.length !== group.length || !group.every((interval) => values.some((x) => lies(x, interval)))) return false;
  search.left = quotient;
  search.unknown = search.unknown.filter((interval) => !group.includes(interval));
  search.found.push(...values);
  return true;
}

function lies(x: Surd, { low, high }: RootInterval): boolean {
  return x.compare(low) >= 0 && x.compare(high) <= 0;
}

function takeOnes(search: Search): void {
  for (const interval of search.unknown) {
    const n = nearWhole(interval.low);
    if (n === undefined) continue;
    const root = Surd.from(n);
    take(search, [root.negate(), Surd.one], () => [root], [interval]);
  }
}

function takePairs(search: Search): void {
  for (let j = 0; j < search.unknown.length; j++) {
    for (let k = j + 1; k < search.unknown.length; k++) {
      const [a, b] = [search.unknown[j] as RootInterval, search.unknown[k] as RootInterval];
      const [sum, product] = [nearWhole(a.low.plus(b.low)), nearWhole(a.low.times(b.low))];
      if (sum === undefined || product === undefined) continue;
      const factor = [Surd.from(product), Surd.from(-sum), Surd.one];
      const root = (): Surd[] => {
        const difference = Surd.sqrt(sum * sum - 4n * product);
        if (difference === undefined) return [];
        return [Surd.from(sum).minus(difference).over(2), Surd.from(sum).plus(difference).over(2)];
      };
      if (take(search, factor, root, [a, b])) {
        // the group is gone from the list: go on with what took its first place
        j--;
        break;
      }
    }
  }
}

function takeFours(search: Search): void {
  const { unknown } = search;
  const gone = (interval: RootInterval): boolean => !search.unknown.includes(interval);
  for (const [h, a] of unknown.entries()) {
    for (const [j, b] of unknown.entries()) {
      if (j <= h || gone(a) || gone(b)) continue;
      for (const [k, c] of unknown.entries()) {
        if (k <= j || gone(a) || gone(b) || gone(c)) continue;
        for (const [l, d] of unknown.entries()) {
          if (l <= k || [a, b, c, d].some(gone)) continue;
          takeFour(search, [a, b, c, d]);
        }
      }
    }
  }
}

/**
 * Four roots r of one quartic with whole coefficients lie in Q(√d, √e) where the three sums r1 r2 + r3 r4, … are whole: then
 * 4 r = s ± √A1 ± √A2 ± √A3 with s the sum of all and the A the squares of r1 + r2 − r3 − r4 and its like.
 */
function takeFour(search: Search, group: readonly [RootInterval, RootInterval, RootInterval, RootInterval]): void {
  const [a, b, c, d] = group.map(({ low }) => low) as [Surd, Surd, Surd, Surd];
  const sum = nearWhole(a.plus(b).plus(c).plus(d));
  if (sum === undefined) return;
  const thetas = [
    nearWhole(a.times(b).plus(c.times(d))),
    nearWhole(a.times(c).plus(b.times(d))),
    nearWhole(a.times(d).plus(b.times(c))),
  ];
  const [t1, t2, t3] = thetas;
  const triple = nearWhole(
    a
      .times(b)
      .times(c.plus(d))
      .plus(c.times(d).times(a.plus(b))),
  );
  const product = nearWhole(a.times(b).times(c).times(d));
  if (t1 === undefined || t2 === undefined || t3 === undefined || triple === undefined || product === undefined) return;
  const pairs = t1 + t2 + t3;
  const factor = [product, -triple, pairs, -sum, 1n].map((n) => Surd.from(n));
  const roots = (): Surd[] => {
    const squares = [t1, t2, t3].map((theta) => sum * sum - 4n * (pairs - theta));
    const [x, y, z] = squares.map((square) => Surd.sqrt(square));
    if (x === undefined || y === undefined || z === undefined) return [];
    const signs = [1, -1];
    const all = signs.flatMap((s) =>
      signs.flatMap((t) => signs.map((u) => x.times(s).plus(y.times(t)).plus(z.times(u)).plus(sum).over(4))),
    );
    return all.filter((root, k) => evaluate(factor, root).isZero && all.findIndex((x) => x.equals(root)) === k);
  };
  take(search, factor, roots, group);
}

/** The whole number within 1/4 of a fraction; undefined for none. */
function nearWhole(x: Surd): bigint | undefined {
  const [n, d] = [x.terms.re[0] ?? 0n, x.terms.den];
  const twice = 2n * n + d;
  const nearest = twice >= 0n ? twice / (2n * d) : -((-twice + 2n * d - 1n) / (2n * d));
  const distance = n - nearest * d;
  return 4n * (distance < 0n ? -distance : distance) <= d ? nearest : undefined;
}
