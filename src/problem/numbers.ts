import { GoodBasisError } from "../errors.js";
import { Surd } from "../exact/surd.js";
import type { Complex } from "../numerics/complex.js";
import { fileError, inside, type Place, showValue, whereIs } from "./place.js";

/** A number in a problem file: real, `[re, im]`, or text such as `"1+2i"`, `"-i"`, `"sqrt(2/3)"`. */
export type FileNumber = number | readonly [re: number, im: number] | string;

const REAL = "(?:\\d+\\.?\\d*|\\.\\d+)(?:[eE][+-]?\\d+)?";

/** What a decimal number as text looks like; it is as well known as the same number without quotes. */
const DECIMAL_TEXT: RegExp = new RegExp(`^(?:[+-]?${REAL}|(?:[+-]?${REAL}(?=[+-]))?[+-]?(?:${REAL})?i)$`);
const PARTS = new RegExp(`^([+-]?${REAL}(?=[+-]|$))?(?:([+-]?)(${REAL})?i)?$`);

/** What any number as text is made of, for the JSON Schema: digits, i, roots, signs and parentheses, also in LaTeX. */
export const NUMBER_TEXT: RegExp = /^(?:[\s\d.eEi+\-−*·⋅×/^(){}√]|sqrt|\\[a-zA-Z]+|\\[,;:!])+$/;

const FORM = 'a finite number, [re, im] or text such as "1+2i" or "sqrt(2/3)"';

/** Whether a value is the text of a number that is no decimal, such as `"1/3"` or `"sqrt(2)"`: it is meant exactly. */
export function isExactText(value: unknown): value is string {
  return typeof value === "string" && !DECIMAL_TEXT.test(value);
}

/**
 * The exact number that a value stands for: text as it reads, any other number as the very double that it is.
 *
 * @throws GoodBasisError `file`, `not-finite` - with the place
 */
export function readExact(place: Place, value: unknown): Surd {
  if (typeof value !== "string") return Surd.from(readNumber(place, value));
  try {
    return Surd.from(value);
  } catch (error) {
    if (!(error instanceof GoodBasisError)) throw error;
    throw fileError(place, FORM, showValue(value), error.message);
  }
}

/** Reads a number, exact text to the nearest doubles; undefined where it has none of the forms or is not finite. */
export function complexOf(value: unknown): Complex | undefined {
  if (typeof value === "number") return finite(value, 0);
  if (typeof value === "string") {
    const parts = DECIMAL_TEXT.test(value) ? PARTS.exec(value) : null;
    if (parts === null) return rounded(value);
    const [, re = "0", sign, size] = parts;
    if (!value.endsWith("i")) return finite(Number(re), 0);
    return finite(Number(re), Number(`${sign ?? ""}${size ?? "1"}`));
  }
  if (!Array.isArray(value) || value.length !== 2) return undefined;
  const [re, im]: unknown[] = value;
  return typeof re === "number" && typeof im === "number" ? finite(re, im) : undefined;
}

/** The nearest doubles of an exact text; undefined for any other. */
function rounded(text: string): Complex | undefined {
  try {
    const { re, im } = Surd.from(text).toComplex();
    return finite(re, im);
  } catch (error) {
    if (error instanceof GoodBasisError) return undefined;
    throw error;
  }
}

function finite(re: number, im: number): Complex | undefined {
  return Number.isFinite(re) && Number.isFinite(im) ? { re, im } : undefined;
}

/** Real and imaginary parts of a list; `im` is absent where all are zero. */
export interface NumberList {
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/**
 * Reads a list of numbers.
 *
 * @throws GoodBasisError `file`, `not-finite` - with the place of the element
 */
export function readNumbers(place: Place, values: readonly unknown[]): NumberList {
  const re = new Float64Array(values.length);
  let im: Float64Array | undefined;
  for (let k = 0; k < values.length; k++) {
    const value = values[k];
    if (typeof value === "number" && Number.isFinite(value)) {
      re[k] = value;
      continue;
    }
    const z = complexOf(value);
    if (z === undefined) throw badNumber(inside(place, k), value);
    re[k] = z.re;
    if (z.im === 0) continue;
    im ??= new Float64Array(values.length);
    im[k] = z.im;
  }
  return { re, im };
}

/** A literal such as 1e999 is infinite by the time it gets here. */
function badNumber(place: Place, value: unknown): GoodBasisError {
  if (typeof value !== "number") return fileError(place, FORM, showValue(value), faultOf(value));
  const { text, details } = whereIs(place);
  const message = `${text}: the number is ${value}; every entry must be finite, below 1.8e308`;
  return new GoodBasisError("not-finite", message, { ...details, value });
}

/** What is wrong with a text that is no exact number; nothing for any other value. */
function faultOf(value: unknown): string {
  if (typeof value !== "string") return "";
  try {
    Surd.from(value);
    return "it is beyond the range of doubles";
  } catch (error) {
    return error instanceof GoodBasisError ? error.message : "";
  }
}

/**
 * Reads one number.
 *
 * @throws GoodBasisError `file`, `not-finite`
 */
export function readNumber(place: Place, value: unknown): Complex {
  const z = complexOf(value);
  if (z === undefined) throw badNumber(place, value);
  return z;
}
