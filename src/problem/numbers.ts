import { GoodBasisError } from "../errors.js";
import type { Complex } from "../numerics/complex.js";
import { fileError, inside, type Place, showValue, whereIs } from "./place.js";

/** A number in a problem file: real, `[re, im]`, or text such as `"1+2i"`, `"-i"`. */
export type FileNumber = number | readonly [re: number, im: number] | string;

const REAL = "(?:\\d+\\.?\\d*|\\.\\d+)(?:[eE][+-]?\\d+)?";

/** What a number as text looks like, for the JSON Schema. */
export const COMPLEX_TEXT: RegExp = new RegExp(`^(?:[+-]?${REAL}|(?:[+-]?${REAL}(?=[+-]))?[+-]?(?:${REAL})?i)$`);
const PARTS = new RegExp(`^([+-]?${REAL}(?=[+-]|$))?(?:([+-]?)(${REAL})?i)?$`);

const FORM = 'a finite number, [re, im] or text such as "1+2i"';

/** Reads a number; undefined where it has none of the forms or is not finite. */
export function complexOf(value: unknown): Complex | undefined {
  if (typeof value === "number") return finite(value, 0);
  if (typeof value === "string") {
    if (!COMPLEX_TEXT.test(value)) return undefined;
    const parts = PARTS.exec(value);
    if (parts === null) return undefined;
    const [, re = "0", sign, size] = parts;
    if (!value.endsWith("i")) return finite(Number(re), 0);
    return finite(Number(re), Number(`${sign ?? ""}${size ?? "1"}`));
  }
  if (!Array.isArray(value) || value.length !== 2) return undefined;
  const [re, im]: unknown[] = value;
  return typeof re === "number" && typeof im === "number" ? finite(re, im) : undefined;
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
  if (typeof value !== "number") return fileError(place, FORM, showValue(value));
  const { text, details } = whereIs(place);
  const message = `${text}: the number is ${value}; every entry must be finite, below 1.8e308`;
  return new GoodBasisError("not-finite", message, { ...details, value });
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
