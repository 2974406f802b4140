import { Fraction } from "fraction.js";
import { GoodBasisError } from "../errors.js";
import { requireArgument, shown } from "../misuse.js";
import type { Complex } from "../numerics/complex.js";
import { signOfReal } from "./bounds.js";
import { dyadic } from "./dyadic.js";
import { type Arithmetic, readExpression } from "./expression.js";
import { isFraction } from "./fraction.js";
import { bitLength, isSafe } from "./integer.js";
import { invertTerms } from "./inverse.js";
import { type SurdTextOptions, textOf } from "./print.js";
import { roundReal } from "./round.js";
import {
  addSafe,
  invertSafe,
  lowestTerm,
  multiplySafe,
  type SafeParts,
  type SafeTerm,
  ZERO_TERM,
} from "./safe-term.js";
import {
  addTerms,
  imaginaryTerms,
  mapTerms,
  multiplyTerms,
  NO_TERMS,
  oneTerm,
  realTerms,
  rootTerm,
  type SurdTerm,
  type Terms,
} from "./terms.js";
import { zeroDivision } from "./zero-division.js";

/** Everything that an exact number can be read from; a JavaScript number counts as the very double that it is. */
export type SurdInput = Surd | Fraction | bigint | number | string | Complex;

/** Binary digits that a power may have. */
const MOST_POWER_BITS = 4_000_000;

/**
 * An exact number Σ q_d √d with complex rational q_d and whole d ≥ 1; immutable.
 *
 * These numbers form a field. A number is zero only if it has no term: the √d of distinct square classes are linearly
 * independent over Q(i), and roots that might belong to one class are split over a coprime base when they meet. Signs are
 * decided by intervals of growing precision once zero is excluded.
 *
 * A number with a single term in safe integers, (n + i m) √r / d, stays in machine numbers; anything else holds big integers.
 *
 * @example
 * ```ts
 * import { Surd } from "goodbasis";
 *
 * const c = Surd.from("sqrt(2/3)");
 * console.log(c.times(c).equals("2/3"), c.toNumber()); // true 0.816496580927726
 * console.log(Surd.from("1/(sqrt(2)+sqrt(3))").text({ form: "unicode" })); // −√2 + √3
 * ```
 */
export class Surd {
  /** The number where one term in safe integers holds it; undefined elsewhere. */
  readonly #safe: SafeTerm | undefined;
  /** The general form where it is needed. */
  readonly #large: Terms | undefined;

  private constructor(safe: SafeTerm | undefined, large: Terms | undefined) {
    if (typeof safe?.n !== "number" && typeof large?.den !== "bigint") {
      throw new GoodBasisError("option", "Surd: make one with Surd.from, which takes text, numbers and fractions");
    }
    this.#safe = safe;
    this.#large = large;
  }

  /** 0. */
  static readonly zero: Surd = new Surd(ZERO_TERM, undefined);
  /** 1. */
  static readonly one: Surd = new Surd({ n: 1, m: 0, r: 1, d: 1 }, undefined);
  /** The imaginary unit. */
  static readonly i: Surd = new Surd({ n: 0, m: 1, r: 1, d: 1 }, undefined);

  /**
   * Reads an exact number: text such as "-1/2*sqrt(3)", a big integer, a `Fraction`, or a double (or pair re, im of them),
   * which counts as its exact dyadic value, so that 0.1 is not 1/10 but "0.1" is.
   *
   * @throws GoodBasisError `text`, `zero-division` - of a text, with `details.position`; `not-finite` - NaN or infinite;
   *   `option` - nothing of these
   */
  static from(input: SurdInput): Surd {
    if (input instanceof Surd) return input;
    if (typeof input === "number") return fromDouble(input);
    if (typeof input === "bigint") return Surd.ratio(input, 1n);
    if (typeof input === "string") return readExpression(input, ARITHMETIC);
    if (isFraction(input)) return Surd.ratio(input.s * input.n, input.d);
    if (typeof input === "object" && input !== null && typeof input.re === "number" && typeof input.im === "number") {
      return fromDouble(input.re).plus(fromDouble(input.im).times(Surd.i));
    }
    const message = `Surd.from: expected a number, a text or a fraction, got ${input === null ? "null" : typeof input}`;
    throw new GoodBasisError("option", message);
  }

  /**
   * numerator / denominator.
   *
   * @throws GoodBasisError `zero-division`
   */
  static ratio(numerator: bigint, denominator: bigint): Surd {
    const whole = typeof numerator === "bigint" && typeof denominator === "bigint";
    requireArgument(
      whole,
      "Surd.ratio",
      "two big integers",
      numerator,
      "write them as 2n, or pass a text to Surd.from",
    );
    if (denominator === 0n) throw zeroDivision("Surd.ratio", `${numerator}`);
    if (denominator > 0n && isSafe(numerator) && isSafe(denominator)) {
      return Surd.#ofSafe(lowestTerm(Number(numerator), 0, 1, Number(denominator)));
    }
    return Surd.fromTerms(oneTerm(numerator, 0n, 1n, denominator));
  }

  /**
   * (re + i im) / den in safe integers, not necessarily in lowest terms; den ≥ 1.
   *
   * @throws GoodBasisError `option` - not safe integers, or den < 1
   */
  static fromSafe(re: number, im: number, den: number): Surd {
    if (Number.isSafeInteger(re) && Number.isSafeInteger(im) && Number.isSafeInteger(den) && den >= 1) {
      return Surd.#ofSafe(lowestTerm(re, im, 1, den));
    }
    const message = `Surd.fromSafe: expected whole numbers up to 2^53 over one from 1 on, got (${shown(re)} + ${shown(im)}i) / ${shown(den)}`;
    throw new GoodBasisError("option", message, { re, im, den });
  }

  /**
   * √x of a rational number x ≥ 0; undefined for any other, whose root need not lie in the field.
   *
   * @throws GoodBasisError what {@link Surd.from} throws
   */
  static sqrt(x: SurdInput): Surd | undefined {
    const square = Surd.from(x);
    const { roots, re, im, den } = square.terms;
    if (roots.length === 0) return Surd.zero;
    if (roots.length > 1 || roots[0] !== 1n || im[0] !== 0n || (re[0] as bigint) < 0n) return undefined;
    return Surd.fromTerms(rootTerm(re[0] as bigint, den));
  }

  /**
   * Wraps a general form, which must keep the invariants of {@link Terms}.
   *
   * @internal
   */
  static fromTerms(terms: Terms): Surd {
    if (terms.roots.length === 0) return Surd.zero;
    const [n, m, r] = [terms.re[0] as bigint, terms.im[0] as bigint, terms.roots[0] as bigint];
    if (terms.roots.length === 1 && terms.plain && isSafe(n) && isSafe(m) && isSafe(r) && isSafe(terms.den)) {
      return new Surd({ n: Number(n), m: Number(m), r: Number(r), d: Number(terms.den) }, undefined);
    }
    return new Surd(undefined, terms);
  }

  static #ofSafe(term: SafeTerm): Surd {
    return term === ZERO_TERM ? Surd.zero : new Surd(term, undefined);
  }

  /**
   * The general form.
   *
   * @internal
   */
  get terms(): Terms {
    if (this.#large !== undefined) return this.#large;
    if (this.#safe === undefined || this.#safe === ZERO_TERM) return NO_TERMS;
    const { n, m, r, d } = this.#safe;
    return { roots: [BigInt(r)], re: [BigInt(n)], im: [BigInt(m)], den: BigInt(d), plain: true };
  }

  /**
   * The general form of a number that needs it; undefined for one term in safe integers.
   *
   * @internal
   */
  get largeTerms(): Terms | undefined {
    return this.#large;
  }

  /**
   * The number in safe integers where it is complex rational and fits; undefined otherwise.
   *
   * @internal
   */
  get safeParts(): SafeParts | undefined {
    if (this.#safe === undefined || this.#safe.r !== 1) return undefined;
    return { re: this.#safe.n, im: this.#safe.m, den: this.#safe.d };
  }

  /** The terms by ascending root, coefficients as fractions. */
  parts(): SurdTerm[] {
    const { roots, re, im, den } = this.terms;
    return roots.map((root, k) => ({
      root,
      re: new Fraction(re[k] as bigint, den),
      im: new Fraction(im[k] as bigint, den),
    }));
  }

  /** Whether it is zero, exactly. */
  get isZero(): boolean {
    return this.#safe === ZERO_TERM;
  }

  /** Whether the imaginary part is zero, exactly. */
  get isReal(): boolean {
    return this.#safe?.m === 0 || (this.#large?.im.every((y) => y === 0n) ?? false);
  }

  /** Whether it is a real fraction. */
  get isRational(): boolean {
    if (this.#safe !== undefined) return this.#safe.m === 0 && this.#safe.r === 1;
    return this.terms.roots.length === 1 && this.terms.roots[0] === 1n && this.terms.im[0] === 0n;
  }

  /** Whether it is a whole number. */
  get isInteger(): boolean {
    return this.isRational && (this.#safe === undefined ? this.terms.den === 1n : this.#safe.d === 1);
  }

  /** x + y. @throws GoodBasisError what {@link Surd.from} throws */
  plus(other: SurdInput): Surd {
    const b = Surd.from(other);
    if (this.isZero) return b;
    if (b.isZero) return this;
    if (this.#safe !== undefined && b.#safe !== undefined && this.#safe.r === b.#safe.r) {
      const sum = addSafe(this.#safe, b.#safe);
      if (sum !== undefined) return Surd.#ofSafe(sum);
    }
    return Surd.fromTerms(addTerms(this.terms, b.terms));
  }

  /** x − y. @throws GoodBasisError what {@link Surd.from} throws */
  minus(other: SurdInput): Surd {
    return this.plus(Surd.from(other).negate());
  }

  /** −x. */
  negate(): Surd {
    if (this.isZero) return this;
    if (this.#safe !== undefined) {
      const { n, m, r, d } = this.#safe;
      return new Surd({ n: 0 - n, m: 0 - m, r, d }, undefined);
    }
    return Surd.fromTerms(mapTerms(this.terms, (re, im) => [-re, -im]));
  }

  /** The complex conjugate. */
  conjugate(): Surd {
    if (this.isReal) return this;
    if (this.#safe !== undefined) return new Surd({ ...this.#safe, m: 0 - this.#safe.m }, undefined);
    return Surd.fromTerms(mapTerms(this.terms, (re, im) => [re, -im]));
  }

  /**
   * x y.
   *
   * @throws GoodBasisError what {@link Surd.from} throws; `budget` - far too many square roots
   */
  times(other: SurdInput): Surd {
    const b = Surd.from(other);
    if (this.#safe !== undefined && b.#safe !== undefined) {
      const product = multiplySafe(this.#safe, b.#safe);
      if (product !== undefined) return Surd.#ofSafe(product);
    }
    return Surd.fromTerms(multiplyTerms(this.terms, b.terms));
  }

  /**
   * 1 / x, by conjugations over the roots.
   *
   * @throws GoodBasisError `zero-division`; `budget` - far too many square roots
   */
  inverse(): Surd {
    if (this.isZero) throw zeroDivision("Surd.inverse", "1");
    const inverse = this.#safe && invertSafe(this.#safe);
    if (inverse !== undefined) return Surd.#ofSafe(inverse);
    return Surd.fromTerms(invertTerms(this.terms));
  }

  /**
   * x / y.
   *
   * @throws GoodBasisError `zero-division`; what {@link Surd.from} throws; `budget` - far too many square roots
   */
  over(other: SurdInput): Surd {
    const b = Surd.from(other);
    if (b.isZero) throw zeroDivision("Surd.over", this.text());
    return this.times(b.inverse());
  }

  /**
   * x to a whole power.
   *
   * @throws GoodBasisError `option` - not a whole number; `zero-division` - a negative power of zero; `budget`
   */
  power(exponent: number): Surd {
    if (!Number.isSafeInteger(exponent)) {
      throw new GoodBasisError("option", `Surd.power: the exponent must be whole, got ${shown(exponent)}`, {
        exponent,
      });
    }
    if (exponent < 0) return this.inverse().power(-exponent);
    const { re, im, roots, den } = this.terms;
    const bits = Math.max(0, ...[den, ...re, ...im, ...roots].map(bitLength));
    // ±1 and ±i do not grow
    const grows = bits > 1 || roots.length > 1 || (!this.isReal && re[0] !== 0n);
    if (grows && bits * exponent > MOST_POWER_BITS) {
      const message = `Surd.power: exponent ${exponent} makes a number of more than a million digits`;
      throw new GoodBasisError("budget", message, { exponent });
    }
    let result = Surd.one;
    for (let [square, rest]: [Surd, number] = [this, exponent]; rest > 0; rest = Math.floor(rest / 2)) {
      if (rest % 2 === 1) result = result.times(square);
      if (rest > 1) square = square.times(square);
    }
    return result;
  }

  /** Whether both are the same number. @throws GoodBasisError what {@link Surd.from} throws */
  equals(other: SurdInput): boolean {
    const b = Surd.from(other);
    if (this.#safe !== undefined && b.#safe !== undefined) {
      const [x, y] = [this.#safe, b.#safe];
      return x.n === y.n && x.m === y.m && x.d === y.d && x.r === y.r;
    }
    return this.minus(b).isZero;
  }

  /** The real part. */
  get re(): Surd {
    if (this.isReal) return this;
    if (this.#safe !== undefined) return Surd.#ofSafe(lowestTerm(this.#safe.n, 0, this.#safe.r, this.#safe.d));
    return Surd.fromTerms(realTerms(this.terms));
  }

  /** The imaginary part, a real number. */
  get im(): Surd {
    if (this.#safe !== undefined) return Surd.#ofSafe(lowestTerm(this.#safe.m, 0, this.#safe.r, this.#safe.d));
    return Surd.fromTerms(imaginaryTerms(this.terms));
  }

  /** |x|² = x x*. */
  squaredModulus(): Surd {
    return this.times(this.conjugate());
  }

  /**
   * The sign of a real number.
   *
   * @throws GoodBasisError `not-real`
   */
  sign(): -1 | 0 | 1 {
    requireReal("Surd.sign", this);
    if (this.#safe === undefined) return signOfReal(this.terms);
    return this.#safe.n > 0 ? 1 : this.#safe.n < 0 ? -1 : 0;
  }

  /**
   * The sign of x − y for real numbers, so that a list is sorted with `(x, y) => x.compare(y)`.
   *
   * @throws GoodBasisError `not-real`; what {@link Surd.from} throws
   */
  compare(other: SurdInput): -1 | 0 | 1 {
    const b = Surd.from(other);
    requireReal("Surd.compare", this);
    requireReal("Surd.compare", b);
    return this.minus(b).sign();
  }

  /**
   * The double nearest to a real number, correctly rounded, ties to even; infinite beyond the range of doubles.
   *
   * @throws GoodBasisError `not-real`
   */
  toNumber(): number {
    requireReal("Surd.toNumber", this);
    return this.toComplex().re;
  }

  /** The doubles nearest to the real and imaginary part, each correctly rounded, ties to even. */
  toComplex(): Complex {
    // the quotient of two safe integers is rounded correctly by the machine
    if (this.#safe?.r === 1) return { re: this.#safe.n / this.#safe.d, im: this.#safe.m / this.#safe.d };
    const { re, im } = this;
    return { re: roundReal(re.terms, "nearest"), im: roundReal(im.terms, "nearest") };
  }

  /**
   * The narrowest interval of doubles around a real number: [x, x] where it is one.
   *
   * @throws GoodBasisError `not-real`
   */
  enclosure(): readonly [number, number] {
    requireReal("Surd.enclosure", this);
    return [roundReal(this.terms, "down"), roundReal(this.terms, "up")];
  }

  /** The number as text, which {@link Surd.from} reads back; zero is "0". */
  text(options?: SurdTextOptions): string {
    return textOf(this.terms, options);
  }

  /** The plain text. */
  toString(): string {
    return this.text();
  }

  /** The plain text, for JSON. */
  toJSON(): string {
    return this.text();
  }
}

function fromDouble(x: number): Surd {
  if (Number.isSafeInteger(x)) return Surd.fromSafe(x, 0, 1);
  const { numerator, exponent } = dyadic("Surd.from", x);
  const power = 1n << BigInt(Math.abs(exponent));
  return exponent >= 0 ? Surd.ratio(numerator * power, 1n) : Surd.ratio(numerator, power);
}

function requireReal(where: string, x: Surd): void {
  if (x.isReal) return;
  throw new GoodBasisError("not-real", `${where}: expected a real number, got ${x.text()}; take .re, .im or a modulus`);
}

const ARITHMETIC: Arithmetic<Surd> = {
  i: Surd.i,
  ratio: Surd.ratio,
  plus: (a, b) => a.plus(b),
  minus: (a, b) => a.minus(b),
  times: (a, b) => a.times(b),
  over: (a, b) => (b.isZero ? undefined : a.over(b)),
  sqrt: (a) => Surd.sqrt(a),
  power: (a, exponent) => (exponent < 0 && a.isZero ? undefined : a.power(exponent)),
};
