import type { StateLabel } from "../refine/label.js";
import { complexText, numberText, supportedText } from "./numbers.js";

/**
 * A label as printed: the quantum number; a measured number as far as its ± reaches, six digits at most; ⟨…⟩ for an
 * expectation value, to six digits of the larger of value and standard deviation.
 */
export function labelText(label: StateLabel): string {
  switch (label.status) {
    case "declared":
    case "proposed":
      return label.text;
    case "measured": {
      const number = label.im === 0 ? supportedText(label.re, label.radius, 6) : complexText(label.re, label.im, 6);
      return label.text.startsWith("eigenvalue ") ? `eigenvalue ${number}` : number;
    }
    case "not sharp": {
      const clean = (x: number): number => (Math.abs(x) < 1e-6 * label.radius ? 0 : x);
      const re = clean(label.re);
      const im = clean(label.im);
      return `⟨${im === 0 ? numberText(re, 6) : complexText(re, im, 6)}⟩`;
    }
    default:
      return label.status satisfies never;
  }
}

/** The value of a quantum number that is written as a whole number or a fraction: "−3/2", "+1". */
export function fractionValue(text: string): number | undefined {
  const match = /^([−+]?)(\d+)(?:\/(\d+))?$/u.exec(text);
  if (match === null) return undefined;
  const size = Number(match[2]) / (match[3] === undefined ? 1 : Number(match[3]));
  return match[1] === "−" && size !== 0 ? -size : size;
}
