import { GoodBasisError } from "../errors.js";
import { requireArgument, requireOptions, shown } from "../misuse.js";
import { exactSqrt } from "./integer.js";
import { fareyNeighbours, type Ratio, simplestBetween } from "./simplest-fraction.js";
import { Surd } from "./surd.js";

/** What {@link recognise} takes for a hit. */
export interface RecogniseOptions {
  /** How far the value may be from the exact number, relative to the larger of |value| and `scale`; 2^−46 unless stated. */
  readonly tolerance?: number | undefined;
  /** A size below which the tolerance no longer shrinks, such as the largest entry of a matrix; 0 unless stated. */
  readonly scale?: number | undefined;
  /** Largest denominator of a fraction; 1000 unless stated. */
  readonly maxDenominator?: number | undefined;
  /** Largest numerator and denominator of the square of a root; 10,000 unless stated, 0 for fractions alone. */
  readonly maxSquare?: number | undefined;
}

/** An exact number that a double may stand for: a guess to be confirmed by whoever knows the matrix, never a proof. */
export interface Proposal {
  /** Says what it is. */
  readonly kind: "proposal";
  /** The exact number. */
  readonly value: Surd;
  /** |double − value|, rounded up. */
  readonly distance: number;
}

/** A hit must have this many tolerances around it to itself. */
const ISOLATION = 1000n;

interface Interval {
  readonly low: Ratio;
  readonly high: Ratio;
}

/**
 * The one fraction, or one square root of a fraction, that a double may stand for.
 *
 * Fractions p/q and roots ±√(p/q) with bounded parts are looked for in an interval around the value, by continued fractions
 * of its ends and of their squares. A proposal is made only where exactly one of all these numbers lies within a thousand
 * tolerances, and it lies within one.
 *
 * @returns undefined where nothing fits, or more than one number might
 * @throws GoodBasisError `not-finite`; `option` - an option outside its range
 *
 * @example
 * ```ts
 * import { recognise } from "goodbasis";
 *
 * console.log(recognise(0.8164965809277260)?.value.text(), recognise(Math.PI)); // sqrt(2/3) undefined
 * ```
 */
export function recognise(value: number, options: RecogniseOptions = {}): Proposal | undefined {
  const { tolerance, scale, maxDenominator, maxSquare } = checked(options);
  requireArgument(
    typeof value === "number",
    "recognise",
    "a number",
    value,
    "an exact text needs no guess: Surd.from reads it",
  );
  const exact = Surd.from(value);
  const modulus = exact.sign() < 0 ? exact.negate() : exact;
  const radius = Surd.from(tolerance).times(Surd.from(Math.max(Math.abs(value), scale)));
  const wide = around(modulus, radius.times(ISOLATION));
  const found: Surd[] = [];
  const fractions = membersOf(wide, maxDenominator);
  if (fractions === "several") return undefined;
  if (fractions !== undefined) found.push(Surd.ratio(...fractions));
  if (maxSquare > 0n) {
    const squares = rootsOf(wide, maxSquare);
    if (squares === "several") return undefined;
    if (squares !== undefined && !found.some((x) => x.equals(squares))) found.push(squares);
  }
  const [only, ...others] = found;
  if (only === undefined || others.length > 0) return undefined;
  const number = exact.sign() < 0 ? only.negate() : only;
  const difference = number.minus(exact);
  const distance = difference.sign() < 0 ? difference.negate() : difference;
  if (distance.compare(radius) > 0) return undefined;
  return { kind: "proposal", value: number, distance: distance.enclosure()[1] };
}

function checked(options: RecogniseOptions): {
  tolerance: number;
  scale: number;
  maxDenominator: bigint;
  maxSquare: bigint;
} {
  requireOptions("recognise", options, ["tolerance", "scale", "maxDenominator", "maxSquare"]);
  const { tolerance = 2 ** -46, scale = 0, maxDenominator = 1000, maxSquare = 10_000 } = options;
  const demand = (name: string, value: number, holds: boolean, what: string): void => {
    if (!holds)
      throw new GoodBasisError("option", `recognise: ${name} must be ${what}, got ${shown(value)}`, { [name]: value });
  };
  demand("tolerance", tolerance, tolerance >= 0 && tolerance < 1e-3, "at least 0 and below 0.001");
  demand("scale", scale, scale >= 0 && Number.isFinite(scale), "a finite number from 0 on");
  const isCount = (n: number, least: number): boolean => Number.isSafeInteger(n) && n >= least;
  demand("maxDenominator", maxDenominator, isCount(maxDenominator, 1), "a whole number from 1 on");
  demand("maxSquare", maxSquare, isCount(maxSquare, 0), "a whole number from 0 on");
  return { tolerance, scale, maxDenominator: BigInt(maxDenominator), maxSquare: BigInt(maxSquare) };
}

function around(x: Surd, radius: Surd): Interval {
  const low = x.minus(radius);
  return { low: low.sign() < 0 ? [0n, 1n] : ratioOf(low), high: ratioOf(x.plus(radius)) };
}

function ratioOf(x: Surd): Ratio {
  const { re, den } = x.terms;
  return [re[0] ?? 0n, den];
}

/** The one fraction with a denominator up to `most` in the interval; undefined for none. */
function membersOf({ low, high }: Interval, most: bigint): Ratio | "several" | undefined {
  const simplest = simplestBetween(low, high);
  if (simplest[1] > most) return undefined;
  const { below, above } = fareyNeighbours(simplest, most);
  return less(below, low) && less(high, above) ? simplest : "several";
}

function less([a, b]: Ratio, [c, d]: Ratio): boolean {
  return a * d < c * b;
}

/** The one √(p/q) in the interval, p and q up to `most`, whose value is not a fraction with a small denominator anyway. */
function rootsOf({ low, high }: Interval, most: bigint): Surd | "several" | undefined {
  const square = ([p, q]: Ratio): Ratio => [p * p, q * q];
  const [from, to] = [square(low), square(high)];
  // p ≤ most means q ≤ most / (p / q)
  const denominators = from[0] === 0n ? most : (most * from[1]) / from[0];
  const least = denominators < most ? denominators : most;
  if (least === 0n) return undefined;
  const member = membersOf({ low: from, high: to }, least);
  if (member === undefined || member === "several") return member;
  const [p, q] = member;
  const [r, s] = [exactSqrt(p), exactSqrt(q)];
  if (r !== undefined && s !== undefined) return Surd.ratio(r, s);
  return Surd.sqrt(Surd.ratio(p, q));
}
