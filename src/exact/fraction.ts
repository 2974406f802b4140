import type { Fraction } from "fraction.js";

/** Whether a value is a `Fraction`, of whichever copy of that package: sign, numerator and denominator in big integers. */
export function isFraction(value: unknown): value is Fraction {
  if (typeof value !== "object" || value === null || !("s" in value) || !("n" in value) || !("d" in value))
    return false;
  return typeof value.s === "bigint" && typeof value.n === "bigint" && typeof value.d === "bigint";
}
