import { type FamilyMember, type LabelDeclaration, onlyMember, recogniseFamily } from "../audit/label-family.js";
import type { Complex } from "../numerics/complex.js";

/**
 * How a label came to be.
 *
 * | status | meaning |
 * |---|---|
 * | `declared` | the one member of the family that the caller declared, within the eigenvalue's enclosure |
 * | `proposed` | the same for a family recognised from the numbers |
 * | `measured` | a number with its ±, not snapped |
 * | `not sharp` | the state is no eigenvector of this operator; the number is its expectation value |
 */
export type LabelStatus = "declared" | "proposed" | "measured" | "not sharp";

/** A quantum number of a state. */
export interface StateLabel {
  /** Eigenvalue of the operator (expectation value where the status is `not sharp`), real part. */
  readonly re: number;
  /** Imaginary part of the same. */
  readonly im: number;
  /** Bound on the distance to the operator's nearest exact eigenvalue; for `not sharp` the standard deviation. */
  readonly radius: number;
  /** As written in the trade: "3/2", "−1", "exp(2πi·1/3)", or a number. */
  readonly text: string;
  /** How the label came to be. */
  readonly status: LabelStatus;
  /**
   * `conserved`: H0 and V conserve it, so it is evidence; `descriptive`: V breaks it, so it only names the state;
   * `broken`: H0 breaks it.
   */
  readonly role: "conserved" | "descriptive" | "broken";
}

/** The family of a candidate's labels: the declared one, or one recognised from its eigenvalues. */
export interface LabelFamily {
  readonly family: LabelDeclaration | undefined;
  readonly declared: boolean;
}

/** Picks the family of one operator from its eigenvalues (all of them, or some) and a bound on their errors. */
export function labelFamily(
  declared: LabelDeclaration | undefined,
  values: readonly Complex[],
  radius: number,
  all = true,
): LabelFamily {
  if (declared !== undefined) return { family: declared, declared: true };
  return { family: recogniseFamily(values, radius, all), declared: false };
}

/** Names an eigenvalue known to lie within `radius` of `value`. */
export function sharpLabel(family: LabelFamily, value: Complex, radius: number, role: StateLabel["role"]): StateLabel {
  const member: FamilyMember | undefined =
    family.family === undefined ? undefined : onlyMember(family.family, value, radius);
  if (member === undefined) {
    // in a column of j a bare eigenvalue would be read as j
    const text = family.family === "j" ? `eigenvalue ${numberText(value)}` : numberText(value);
    return { re: value.re, im: value.im, radius, text, status: "measured", role };
  }
  return {
    re: value.re,
    im: value.im,
    radius,
    text: member.text,
    status: family.declared ? "declared" : "proposed",
    role,
  };
}

/** An expectation value with its standard deviation, for a state that is no eigenvector. */
export function vagueLabel(value: Complex, deviation: number, role: StateLabel["role"]): StateLabel {
  const clean = (x: number): number => (Math.abs(x) < 1e-12 * deviation ? 0 : x);
  const text = `⟨${numberText({ re: clean(value.re), im: clean(value.im) })}⟩`;
  return { re: value.re, im: value.im, radius: deviation, text, status: "not sharp", role };
}

/** A complex number to six digits, with the trade's minus sign. */
export function numberText(value: Complex): string {
  const part = (x: number): string => String(Number(x.toPrecision(6))).replaceAll("-", "−");
  const small = 1e-12 * Math.hypot(value.re, value.im);
  if (Math.abs(value.im) <= small) return part(value.re);
  if (Math.abs(value.re) <= small) return `${part(value.im)}i`;
  return `${part(value.re)}${value.im < 0 ? "−" : "+"}${part(Math.abs(value.im))}i`;
}
