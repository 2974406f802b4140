import { requireArgument } from "../misuse.js";
import { type ExactBudget, Meter } from "./budget.js";
import { requireNumbers } from "./guards.js";
import { absolute, bitLength, gcd } from "./integer.js";
import { normPolynomial } from "./norm-polynomial.js";
import { divide, evaluate, monic, type Polynomial, polynomial, squareFreePart } from "./polynomial.js";
import { type DyadicPoint, isolateRealRoots } from "./real-roots.js";
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
 * @throws GoodBasisError `option` - the zero polynomial; `budget`
 *
 * @example
 * ```ts
 * import { fieldRoots, Surd } from "goodbasis";
 *
 * const { roots, rest } = fieldRoots([-1, -1, 1].map((c) => Surd.from(c)));
 * console.log(roots[1]?.text({ form: "unicode" }), rest.length); // 1/2 + √5/2 1
 * ```
 */
export function fieldRoots(p: Polynomial, budget?: ExactBudget): FieldRoots {
  requireNumbers("fieldRoots", p);
  const meter = new Meter("fieldRoots", budget);
  const given = polynomial(p);
  requireArgument(
    given.length > 0,
    "fieldRoots",
    "a polynomial that is not zero",
    p,
    "give its coefficients by ascending power",
  );
  const own = squareFreePart(given);
  if (own.length === 2) return { roots: linearRoot(own), rest: linearRoot(own).length === 1 ? [Surd.one] : own };
  const rational = own.every((c) => c.isRational);
  const candidates = rationalFieldRoots(rational ? own : normPolynomial(own), meter);
  const roots = candidates.filter((x) => evaluate(own, x).isZero).sort((a, b) => a.compare(b));
  const rest = roots.reduce((left, x) => divide(left, [x.negate(), Surd.one]).quotient, own);
  return { roots, rest: monic(rest) };
}

function linearRoot(p: Polynomial): Surd[] {
  const root = p[0]?.negate();
  return root?.isReal ? [root] : [];
}

/** The same for rational coefficients, monic and without double roots. */
function rationalFieldRoots(p: Polynomial, meter: Meter): Surd[] {
  const scale = p.reduce((den, c) => (den * c.terms.den) / gcd(den, c.terms.den), 1n);
  const degree = p.length - 1;
  // y = scale · x has whole coefficients scale^(n − k) c_k
  const whole = p.map((c, k) => c.times(Surd.from(scale).power(degree - k)));
  return wholeRoots(whole, meter).map((y) => y.over(scale));
}

function wholeRoots(p: Polynomial, meter: Meter): Surd[] {
  const coefficients = p.map((c) => c.terms.re[0] ?? 0n);
  // every root is below 2^(size + 1) in modulus (Cauchy), so a product of four is known to much less than 2^−8
  const size = coefficients.reduce((most, c) => Math.max(most, bitLength(c)), 1);
  const bits = 4 * (size + 2) + 8;
  // each binary place of each root costs one value of the polynomial
  meter.spend(bits * p.length * p.length);
  const unknown = isolateRealRoots(coefficients, bits).map(({ low, high }): Unknown => {
    const excess = BigInt(bits - low.bits);
    const at = excess >= 0n ? low.place << excess : low.place >> -excess;
    return { low: valueOfPoint(low), high: valueOfPoint(high), at };
  });
  const search: Search = { bits: BigInt(bits), left: p, unknown, found: [] };
  takeOnes(search);
  takePairs(search);
  if (search.unknown.length <= MOST_FOR_FOURS) takeFours(search);
  return search.found;
}

function valueOfPoint({ place, bits }: DyadicPoint): Surd {
  return bits < 0 ? Surd.from(place << BigInt(-bits)) : Surd.ratio(place, 1n << BigInt(bits));
}

/** A root that is not known in closed form yet. */
interface Unknown {
  /** A closed interval around it that holds no other root. */
  readonly low: Surd;
  readonly high: Surd;
  /** The root times 2^bits, to within 2. */
  readonly at: bigint;
}

interface Search {
  /** Binary places of the approximations. */
  readonly bits: bigint;
  left: Polynomial;
  unknown: readonly Unknown[];
  readonly found: Surd[];
}

/** The whole number within 2^−8 of value / 2^places; undefined for none. */
function nearWhole(value: bigint, places: bigint): bigint | undefined {
  const nearest = (value + (1n << (places - 1n))) >> places;
  return absolute(value - (nearest << places)) <= 1n << (places - 8n) ? nearest : undefined;
}

/** Divides a factor out if it divides and its roots are the very ones of the group, and notes them. */
function take(search: Search, factor: Polynomial, roots: () => readonly Surd[], group: readonly Unknown[]): boolean {
  const { quotient, rest } = divide(search.left, factor);
  if (rest.length > 0) return false;
  const values = roots().filter((x) => evaluate(factor, x).isZero);
  if (values.length !== group.length || !group.every((interval) => values.some((x) => lies(x, interval)))) return false;
  search.left = quotient;
  search.unknown = search.unknown.filter((interval) => !group.includes(interval));
  search.found.push(...values);
  return true;
}

function lies(x: Surd, { low, high }: Unknown): boolean {
  // the lower end may be a neighbouring root
  return x.compare(high) <= 0 && (x.compare(low) > 0 || x.equals(high));
}

function takeOnes(search: Search): void {
  for (const root of search.unknown) {
    const n = nearWhole(root.at, search.bits);
    if (n === undefined) continue;
    const value = Surd.from(n);
    take(search, [value.negate(), Surd.one], () => [value], [root]);
  }
}

function takePairs(search: Search): void {
  for (let j = 0; j < search.unknown.length; j++) {
    for (let k = j + 1; k < search.unknown.length; k++) {
      const [a, b] = [search.unknown[j] as Unknown, search.unknown[k] as Unknown];
      if (!takePair(search, a, b)) continue;
      // both are gone from the list: go on with what took the first place
      j--;
      break;
    }
  }
}

function takePair(search: Search, a: Unknown, b: Unknown): boolean {
  const sum = nearWhole(a.at + b.at, search.bits);
  const product = sum === undefined ? undefined : nearWhole(a.at * b.at, 2n * search.bits);
  if (sum === undefined || product === undefined) return false;
  const roots = (): Surd[] => {
    const difference = Surd.sqrt(sum * sum - 4n * product);
    if (difference === undefined) return [];
    return [Surd.from(sum).minus(difference).over(2), Surd.from(sum).plus(difference).over(2)];
  };
  return take(search, [Surd.from(product), Surd.from(-sum), Surd.one], roots, [a, b]);
}

function takeFours(search: Search): void {
  const all = search.unknown;
  const open = (...roots: readonly Unknown[]): boolean => roots.every((root) => search.unknown.includes(root));
  for (const [h, a] of all.entries()) {
    for (const [j, b] of all.entries()) {
      if (j <= h || !open(a, b)) continue;
      for (const [k, c] of all.entries()) {
        if (k <= j || !open(a, b, c)) continue;
        for (const d of all.slice(k + 1)) if (open(a, b, c, d)) takeFour(search, a, b, c, d);
      }
    }
  }
}

/**
 * Four roots r of one quartic with whole coefficients lie in Q(√d, √e) where the three sums r1 r2 + r3 r4, … are whole: then
 * 4 r = s ± √A1 ± √A2 ± √A3 with s the sum of all and the A the squares of r1 + r2 − r3 − r4 and its like (the resolvent
 * cubic of the quartic splits; common practice).
 */
function takeFour(search: Search, a: Unknown, b: Unknown, c: Unknown, d: Unknown): void {
  const { bits } = search;
  const sum = nearWhole(a.at + b.at + c.at + d.at, bits);
  if (sum === undefined) return;
  const first = nearWhole(a.at * b.at + c.at * d.at, 2n * bits);
  const second = nearWhole(a.at * c.at + b.at * d.at, 2n * bits);
  const third = nearWhole(a.at * d.at + b.at * c.at, 2n * bits);
  if (first === undefined || second === undefined || third === undefined) return;
  const triples = nearWhole(a.at * b.at * (c.at + d.at) + c.at * d.at * (a.at + b.at), 3n * bits);
  const product = nearWhole(a.at * b.at * c.at * d.at, 4n * bits);
  if (triples === undefined || product === undefined) return;
  const pairs = first + second + third;
  const factor = [product, -triples, pairs, -sum, 1n].map((n) => Surd.from(n));
  const roots = (): Surd[] => {
    const [x, y, z] = [first, second, third].map((theta) => Surd.sqrt(sum * sum - 4n * (pairs - theta)));
    if (x === undefined || y === undefined || z === undefined) return [];
    const signs = [1, -1];
    const all = signs.flatMap((s) =>
      signs.flatMap((t) => signs.map((u) => x.times(s).plus(y.times(t)).plus(z.times(u)).plus(sum).over(4))),
    );
    return all.filter((root, k) => all.findIndex((other) => other.equals(root)) === k);
  };
  take(search, factor, roots, [a, b, c, d]);
}
