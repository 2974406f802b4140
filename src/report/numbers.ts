/**
 * Numbers as they are printed: with the trade's minus sign, as 1.2e−9 where they are small, and never with digits that their
 * ± does not support.
 */

const MINUS = "−";

/** What stands where there is nothing to print. */
export const NOTHING = "—";

/** A number written by the language, with a proper minus sign and without the plus of an exponent. */
function typeset(ascii: string): string {
  return ascii.replace("e+", "e").replaceAll("-", MINUS);
}

/** Decimal exponent of the leading digit; 0 for zero. */
function exponentOf(x: number): number {
  if (x === 0) return 0;
  const text = x.toExponential();
  return Number(text.slice(text.indexOf("e") + 1));
}

function stripZeros(decimal: string): string {
  const [mantissa = "", exponent] = decimal.split("e");
  const stripped = mantissa.includes(".") ? mantissa.replace(/\.?0+$/, "") : mantissa;
  return exponent === undefined ? stripped : `${stripped}e${exponent}`;
}

/**
 * A number to so many significant digits: `"0.57735"`, `"−3"`, `"1.2e−9"`; trailing zeros are left out.
 *
 * @param digits - from 1 to 17
 */
export function numberText(x: number, digits = 6): string {
  if (Number.isNaN(x)) return NOTHING;
  if (!Number.isFinite(x)) return x > 0 ? "∞" : `${MINUS}∞`;
  if (x === 0) return "0";
  const scientific = stripZeros(x.toExponential(digits - 1));
  const exponent = exponentOf(Number(scientific));
  return typeset(exponent < -4 || exponent >= 15 ? scientific : String(Number(scientific)));
}

/** A number of which only the size matters: two digits, with an exponent from a million on. */
export function roughText(x: number): string {
  const text = numberText(x, 2);
  return Math.abs(x) >= 1e6 && Number.isFinite(x) ? typeset(stripZeros(x.toExponential(1))) : text;
}

/**
 * A bound, rounded up to one digit, or to two where the first is 1: `"4e−15"`, `"1.3e−15"`, `"0.03"`. What is printed is never
 * smaller than what was proved.
 *
 * @param digits - how many digits to keep instead
 */
export function boundText(bound: number, digits?: number): string {
  if (Number.isNaN(bound)) return NOTHING;
  if (bound === Number.POSITIVE_INFINITY) return "∞";
  if (!(bound > 0)) return "0";
  const rounded = roundedUp(bound, digits ?? (bound.toExponential().startsWith("1") ? 2 : 1));
  const exponent = exponentOf(rounded);
  return typeset(exponent < -3 || exponent >= 6 ? rounded.toExponential() : String(rounded));
}

function roundedUp(bound: number, digits: number): number {
  const near = bound.toExponential(digits - 1);
  if (Number(near) >= bound) return Number(near);
  // one unit in the last digit printed, by whole numbers so that no rounding enters
  const [mantissa = "1", exponent = "0"] = near.split("e");
  return Number(`${Number(mantissa.replace(".", "")) + 1}e${Number(exponent) - digits + 1}`);
}

/** A value and its ± as printed. */
export interface BoundedText {
  readonly value: string;
  readonly plusMinus: string;
}

/**
 * A value rounded to what its ± supports, and the ± rounded up so far that it also covers the rounding of the value: what is
 * printed contains what was proved.
 *
 * @param digits - most significant digits of the value, from 1 to 17
 */
export function boundedText(value: number, plusMinus: number, digits = 17): BoundedText {
  if (!Number.isFinite(value)) return { value: NOTHING, plusMinus: "∞" };
  if (!Number.isFinite(plusMinus)) return { value: numberText(value, Math.min(digits, 6)), plusMinus: "∞" };
  const ascii = roundedTo(value, supportedPlace(value, plusMinus, digits));
  const bound = Math.max(0, plusMinus) + Math.abs(value - Number(ascii));
  const bare = bound < 1e-3 ? stripZeros(ascii) : ascii;
  return { value: typeset(bare), plusMinus: boundText(bound) };
}

/** The value of {@link boundedText} alone, trailing zeros left out: for columns that do not show their ±. */
export function supportedText(value: number, plusMinus: number, digits = 12): string {
  if (!Number.isFinite(value) || !Number.isFinite(plusMinus)) return numberText(value, Math.min(digits, 6));
  return typeset(stripZeros(roundedTo(value, supportedPlace(value, plusMinus, digits))));
}

/** The numbers of a column that has one ± for all of them. */
export interface CommonBound {
  readonly values: readonly string[];
  readonly plusMinus: string;
}

/** One ± is stated for a column where it is below this fraction of the largest value: nobody reads so many digits. */
const COMMON_BOUND = 1e-9;

/**
 * Values rounded at one place, with one ± for all of them that covers the largest ± and all rounding; undefined where that
 * would cost digits worth having.
 *
 * @param digits - most significant digits of the largest value
 */
export function commonBound(
  numbers: readonly { readonly value: number; readonly plusMinus: number }[],
  digits: number,
): CommonBound | undefined {
  if (numbers.length < 2) return undefined;
  const largest = Math.max(...numbers.map(({ value }) => Math.abs(value)));
  const widest = Math.max(...numbers.map(({ plusMinus }) => plusMinus));
  if (!(largest < Number.POSITIVE_INFINITY) || !(widest <= COMMON_BOUND * largest)) return undefined;
  const place = supportedPlace(largest, widest, digits);
  const ascii = numbers.map(({ value }) => roundedTo(value, place));
  const bound = Math.max(
    ...numbers.map(({ value, plusMinus }, k) => Math.max(0, plusMinus) + Math.abs(value - Number(ascii[k]))),
  );
  const bare = bound < 1e-3 ? ascii.map(stripZeros) : ascii;
  return { values: bare.map(typeset), plusMinus: boundText(bound) };
}

/** The power of ten of the last digit worth printing. */
function supportedPlace(value: number, plusMinus: number, digits: number): number {
  const capped = exponentOf(value) - digits + 1;
  if (!(plusMinus > 0)) return capped;
  const place = exponentOf(plusMinus) - (plusMinus.toExponential().startsWith("1") ? 1 : 0);
  return Math.max(place, capped);
}

/** The decimal number nearest to `value` whose last digit stands at 10^place, as the language writes it. */
function roundedTo(value: number, place: number): string {
  const digits = exponentOf(value) - place;
  if (value === 0 || digits < -1) return "0";
  if (digits === -1) return 2 * Math.abs(value) > 10 ** place ? plain(Math.sign(value) * 10 ** place, place) : "0";
  // a double has no more than 17 digits; its shortest form says it all
  if (digits >= 16) return plain(value, undefined);
  return plain(Number(value.toExponential(digits)), place);
}

/** In plain decimals down to 10^place where the exponent is moderate, otherwise with an exponent. */
function plain(rounded: number, place: number | undefined): string {
  const exponent = exponentOf(rounded);
  if (exponent < -4 || exponent >= 15) {
    return place === undefined ? rounded.toExponential() : rounded.toExponential(Math.max(0, exponent - place));
  }
  return place === undefined || place > 0 ? String(rounded) : rounded.toFixed(-place);
}

/** A complex number to so many digits: `"0.5+0.5i"`, `"−0.5i"`; both parts are rounded at the same place. */
export function complexText(re: number, im: number, digits = 6): string {
  const place = exponentOf(Math.hypot(re, im)) - digits + 1;
  const part = (x: number): string => typeset(stripZeros(roundedTo(x, place)));
  const real = part(re);
  const size = part(Math.abs(im));
  if (size === "0") return real;
  const imaginary = size === "1" ? "i" : `${size}i`;
  if (real === "0") return im < 0 ? `${MINUS}${imaginary}` : imaginary;
  return `${real}${im < 0 ? MINUS : "+"}${imaginary}`;
}
