import { absolute, bitLength, gcd } from "./integer.js";

/** Whole coefficients by ascending power, the last one not zero. */
export type WholePolynomial = readonly bigint[];

/** A dyadic number place / 2^bits. */
export interface DyadicPoint {
  readonly place: bigint;
  readonly bits: number;
}

/** A closed interval that holds exactly one root; both ends are equal where the root was met exactly. */
export interface RootInterval {
  readonly low: DyadicPoint;
  readonly high: DyadicPoint;
}

/**
 * All real roots of a polynomial, each in an interval of its own, ascending: Sturm's theorem and bisection at dyadic points,
 * in whole numbers throughout.
 *
 * @param p - no double root
 * @param bits - intervals are made no wider than 2^−bits
 */
export function isolateRealRoots(p: WholePolynomial, bits: number): RootInterval[] {
  if (p.length <= 1) return [];
  const chain = sturmChain(p);
  const found: RootInterval[] = [];
  // the interval (low, low + 1] / 2^depth; a negative depth makes it longer than 1
  const split = (low: bigint, below: number, above: number, depth: number): void => {
    // Sturm: the sign changes lost count the roots with low < root ≤ high
    if (below === above) return;
    if (below - above === 1) {
      found.push(narrow(p, low, depth, bits));
      return;
    }
    const middle = 2n * low + 1n;
    const between = signChanges(chain, middle, depth + 1);
    split(2n * low, below, between, depth + 1);
    split(middle, between, above, depth + 1);
  };
  const depth = -rootBoundBits(p);
  const [left, zero, right] = [-1n, 0n, 1n].map((place) => signChanges(chain, place, depth)) as [
    number,
    number,
    number,
  ];
  split(-1n, left, zero, depth);
  split(0n, zero, right, depth);
  return found;
}

/** p, p′, and the negative rests of Euclid's algorithm, each times a positive number that keeps it whole and small. */
function sturmChain(p: WholePolynomial): WholePolynomial[] {
  const chain: WholePolynomial[] = [];
  let [a, b] = [primitive(p), primitive(p.slice(1).map((c, k) => c * BigInt(k + 1)))];
  chain.push(a);
  while (b.length > 0) {
    chain.push(b);
    [a, b] = [b, primitive(negativeRest(a, b))];
  }
  return chain;
}

/** A positive multiple of −(a mod b). */
function negativeRest(a: WholePolynomial, b: WholePolynomial): WholePolynomial {
  const rest = [...a];
  const head = b[b.length - 1] as bigint;
  const size = absolute(head);
  for (let top = rest.length - 1; top >= b.length - 1; top--) {
    const factor = head > 0n ? (rest[top] as bigint) : -(rest[top] as bigint);
    if (factor === 0n) continue;
    for (let k = 0; k < top; k++) rest[k] = (rest[k] as bigint) * size;
    const shift = top - b.length + 1;
    for (let k = 0; k < b.length - 1; k++) rest[shift + k] = (rest[shift + k] as bigint) - factor * (b[k] as bigint);
  }
  return rest.slice(0, b.length - 1).map((c) => -c);
}

/** Without leading zeros and common divisor; signs stay. */
function primitive(p: WholePolynomial): WholePolynomial {
  let length = p.length;
  while (length > 0 && p[length - 1] === 0n) length--;
  let common = 0n;
  for (let k = 0; k < length && common !== 1n; k++) common = gcd(common, p[k] as bigint);
  return p.slice(0, length).map((c) => (common === 1n ? c : c / common));
}

/** The sign of p(place / 2^depth): Horner's rule for 2^(depth · degree) p, or in whole numbers where depth ≤ 0. */
function signAt(p: WholePolynomial, place: bigint, depth: number): number {
  const x = depth < 0 ? place << BigInt(-depth) : place;
  const step = BigInt(Math.max(0, depth));
  let sum = 0n;
  let shift = 0n;
  for (let k = p.length - 1; k >= 0; k--) {
    sum = sum * x + ((p[k] as bigint) << shift);
    shift += step;
  }
  return sum > 0n ? 1 : sum < 0n ? -1 : 0;
}

function signChanges(chain: readonly WholePolynomial[], place: bigint, depth: number): number {
  let changes = 0;
  let before = 0;
  for (const p of chain) {
    const sign = signAt(p, place, depth);
    if (sign === 0) continue;
    if (before !== 0 && sign !== before) changes++;
    before = sign;
  }
  return changes;
}

/** b with every root of modulus below 2^b (Cauchy: 1 + the largest coefficient over the leading one). */
function rootBoundBits(p: WholePolynomial): number {
  const head = absolute(p[p.length - 1] as bigint);
  return p.reduce((most, c) => Math.max(most, bitLength(1n + absolute(c) / head)), 0) + 1;
}

/** Halves the interval (place, place + 1] / 2^depth with one root until it is narrow. */
function narrow(p: WholePolynomial, from: bigint, at: number, bits: number): RootInterval {
  let [place, depth] = [from, at];
  const exactly = (point: bigint): RootInterval => {
    const end = { place: point, bits: depth };
    return { low: end, high: end };
  };
  const signAtHigh = signAt(p, place + 1n, depth);
  if (signAtHigh === 0) return exactly(place + 1n);
  while (depth < bits) {
    depth++;
    const middle = 2n * place + 1n;
    const sign = signAt(p, middle, depth);
    if (sign === 0) return exactly(middle);
    place = sign === signAtHigh ? 2n * place : middle;
  }
  return { low: { place, bits: depth }, high: { place: place + 1n, bits: depth } };
}
