import { GoodBasisError } from "../errors.js";
import { badText, type Token, tokensOf } from "./tokens.js";

/** What the reader of expressions needs to know about numbers. */
export interface Arithmetic<T> {
  readonly i: T;
  ratio(numerator: bigint, denominator: bigint): T;
  plus(a: T, b: T): T;
  minus(a: T, b: T): T;
  times(a: T, b: T): T;
  /** Undefined for a division by zero. */
  over(a: T, b: T): T | undefined;
  /** Undefined for anything but a rational number ≥ 0. */
  sqrt(a: T): T | undefined;
  /** A whole exponent; undefined for a negative power of zero. */
  power(a: T, exponent: number): T | undefined;
}

/** Nesting of parentheses, and digits of a decimal or power exponent, beyond which a text is refused. */
const DEEPEST = 200;
const LARGEST_EXPONENT = 100_000;

/**
 * Reads a number written with fractions, decimals, i, square roots, + − × ÷, whole powers and parentheses, in plain text,
 * Unicode or LaTeX. Every number is taken exactly: "0.125" is 1/8 and "0.1" is 1/10.
 *
 * Factors side by side are multiplied ("2i", "2√3", "\frac{1}{2}\sqrt{3}"). After a division they are refused, because
 * "1/2√3" is read both ways; √ takes what follows it alone, so that "√3/2" is half of √3.
 *
 * @throws GoodBasisError `text` with `details.position`; `zero-division` - likewise
 */
export function readExpression<T>(text: string, arithmetic: Arithmetic<T>): T {
  return new Reader(text, arithmetic).whole();
}

class Reader<T> {
  readonly #text: string;
  readonly #tokens: readonly Token[];
  readonly #of: Arithmetic<T>;
  #at = 0;
  #depth = 0;

  constructor(text: string, arithmetic: Arithmetic<T>) {
    this.#text = text;
    this.#tokens = tokensOf(text);
    this.#of = arithmetic;
  }

  whole(): T {
    const [first] = this.#tokens;
    if (first?.kind === "end") throw this.#bad("it is empty");
    const value = this.#sum();
    if (this.#next.kind !== "end") throw this.#bad(`unexpected "${this.#next.text}"`);
    return value;
  }

  get #next(): Token {
    return this.#tokens[this.#at] as Token;
  }

  #bad(what: string, token = this.#next): GoodBasisError {
    return badText(this.#text, token.position, what);
  }

  /** Steps over one sign if it comes next. */
  #accept(...signs: readonly string[]): string | undefined {
    const { kind, text } = this.#next;
    if (kind !== "sign" || !signs.includes(text)) return undefined;
    this.#at++;
    return text;
  }

  #sum(): T {
    if (++this.#depth > DEEPEST) throw this.#bad(`more than ${DEEPEST} parentheses inside each other`);
    let value = this.#product();
    for (let sign = this.#accept("+", "-"); sign !== undefined; sign = this.#accept("+", "-")) {
      const term = this.#product();
      value = sign === "+" ? this.#of.plus(value, term) : this.#of.minus(value, term);
    }
    this.#depth--;
    return value;
  }

  #product(): T {
    let value = this.#signed();
    let divided = false;
    for (;;) {
      const begin = this.#next;
      const sign = this.#accept("*", "/");
      if (sign === undefined && !this.#isFactorNext()) return value;
      if (sign === undefined && begin.kind === "number") {
        throw this.#bad(`"${begin.text}" follows another factor directly; put an operator between`);
      }
      if (sign === undefined && divided) {
        const what = `"${this.#next.text}" after a division is read both ways; put parentheses or "*"`;
        throw this.#bad(what);
      }
      if (sign === "/") {
        value = this.#quotient(value, this.#signed(), begin);
        divided = true;
      } else {
        value = this.#of.times(value, sign === undefined ? this.#power() : this.#signed());
      }
    }
  }

  #quotient(a: T, b: T, at: Token): T {
    const value = this.#of.over(a, b);
    if (value !== undefined) return value;
    const message = `the exact number "${this.#text}" divides by zero at character ${at.position + 1}`;
    throw new GoodBasisError("zero-division", message, { text: this.#text, position: at.position });
  }

  /** A factor with any number of signs before it. */
  #signed(): T {
    let negative = false;
    for (let sign = this.#accept("+", "-"); sign !== undefined; sign = this.#accept("+", "-")) {
      if (sign === "-") negative = !negative;
    }
    const value = this.#power();
    return negative ? this.#of.minus(this.#of.ratio(0n, 1n), value) : value;
  }

  #isFactorNext(): boolean {
    const { kind, text } = this.#next;
    return kind === "number" || kind === "word" || (kind === "sign" && (text === "(" || text === "{"));
  }

  #power(): T {
    const begin = this.#next;
    const base = this.#atom();
    if (this.#accept("^") === undefined) return base;
    const open = this.#accept("(", "{");
    const negative = this.#accept("+", "-") === "-";
    const digits = this.#next;
    if (digits.kind !== "number" || !/^\d{1,6}$/.test(digits.text) || Number(digits.text) > LARGEST_EXPONENT) {
      throw this.#bad(`an exponent must be a whole number up to ${LARGEST_EXPONENT}`);
    }
    this.#at++;
    if (open !== undefined) this.#close(open);
    const value = this.#of.power(base, negative ? -Number(digits.text) : Number(digits.text));
    return value ?? this.#quotient(base, this.#of.ratio(0n, 1n), begin);
  }

  #close(open: string): void {
    if (this.#accept(open === "(" ? ")" : "}") !== undefined) return;
    throw this.#bad(this.#next.kind === "end" ? "a parenthesis is not closed" : `unexpected "${this.#next.text}"`);
  }

  #inParentheses(): T {
    const open = this.#accept("(", "{");
    if (open === undefined) throw this.#bad('expected "("');
    const value = this.#sum();
    this.#close(open);
    return value;
  }

  #atom(): T {
    const token = this.#next;
    if (token.kind === "number") {
      this.#at++;
      return this.#decimal(token);
    }
    if (token.kind === "sign" && (token.text === "(" || token.text === "{")) return this.#inParentheses();
    if (token.kind !== "word") {
      throw this.#bad(token.kind === "end" ? "a number is missing" : `unexpected "${token.text}"`);
    }
    this.#at++;
    if (token.text === "i") return this.#of.i;
    if (token.text === "frac") {
      const numerator = this.#inParentheses();
      return this.#quotient(numerator, this.#inParentheses(), token);
    }
    return this.#root(token);
  }

  #root(token: Token): T {
    const inner = this.#next;
    if (++this.#depth > DEEPEST) throw this.#bad(`more than ${DEEPEST} roots inside each other`);
    const radicand = inner.kind === "number" ? this.#atom() : this.#inParentheses();
    this.#depth--;
    const root = this.#of.sqrt(radicand);
    if (root !== undefined) return root;
    throw this.#bad("a square root is taken of rational numbers from 0 on only (for others write i*sqrt(…))", token);
  }

  #decimal(token: Token): T {
    const [mantissa = "", exponent = "0"] = token.text.split(/[eE]/);
    const [whole = "", places = ""] = mantissa.split(".");
    const shift = Number(exponent) - places.length;
    if (Math.abs(shift) > LARGEST_EXPONENT) throw this.#bad(`more than ${LARGEST_EXPONENT} decimal places`, token);
    const digits = BigInt(whole + places);
    return shift >= 0
      ? this.#of.ratio(digits * 10n ** BigInt(shift), 1n)
      : this.#of.ratio(digits, 10n ** BigInt(-shift));
  }
}
