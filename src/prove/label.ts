import { type LabelDeclaration, onlyMember, recogniseFamily } from "../audit/label-family.js";
import { exactRootOfUnity } from "../exact/root-of-unity.js";
import { Surd } from "../exact/surd.js";
import type { Complex } from "../numerics/complex.js";
import type { BlockValue } from "./proof.js";
import { middleOf } from "./roots.js";
import { valueText } from "./value-text.js";

/** What is known of a candidate's labels. */
export interface LabelNames {
  readonly family: LabelDeclaration | undefined;
  /** N with A^N = 1, exactly. */
  readonly order: number | undefined;
}

/** The order of all roots of unity in the field. */
const FIELD_ORDER = 24;

/** Room for the correct rounding of an exact number. */
const ROUNDING = 2 ** -40;

/**
 * The family of a candidate's labels: the declared one, or the one that all its exact eigenvalues belong to.
 *
 * @param values - those that occur
 */
export function namesOf(
  declared: LabelDeclaration | undefined,
  values: readonly BlockValue[],
  order: number | undefined,
): LabelNames {
  if (declared !== undefined) return { family: declared, order };
  const exact = values.flatMap((value) => (value.kind === "value" ? [value.value.toComplex()] : []));
  const family = exact.length === 0 ? undefined : recogniseFamily(exact, ROUNDING);
  const real = exact.every(({ im }) => im === 0) && exact.length === values.length;
  return { family: !real && order !== undefined ? { root: order } : family, order };
}

/** A label as the trade writes it; members of a family are confirmed exactly, anything else is written as a number. */
export function labelText(value: BlockValue, names: LabelNames): string {
  if (value.kind === "value") return exactText(value.value, names);
  const { order } = names;
  if (value.kind === "unknown" || order === undefined || value.part === "whole") return valueText(value);
  const { intervals } = value.roots;
  const members = intervals.flatMap((bounds): Complex[] => {
    const t = middleOf(bounds);
    if (value.part === "im") return [{ re: value.re?.toNumber() ?? 0, im: t }];
    const y = Math.sqrt(Math.max(0, 1 - t * t));
    return [
      { re: t, im: y },
      { re: t, im: -y },
    ];
  });
  const texts = members.map((member) => onlyMember({ root: order }, member, ROUNDING)?.text ?? "?");
  return [...new Set(texts)].join(" | ");
}

function exactText(value: Surd, { family, order }: LabelNames): string {
  const double = value.toComplex();
  const member = family === undefined ? undefined : onlyMember(family, double, ROUNDING);
  if (family !== undefined && member !== undefined && isMember(value, family, order, member.text)) return member.text;
  const text = value.text({ form: "unicode" });
  // in a column of j a bare eigenvalue would be read as j
  return family === "j" ? `eigenvalue ${text}` : text;
}

/** Whether an exact number is the member of a family that its double points to. */
function isMember(value: Surd, family: LabelDeclaration, order: number | undefined, text: string): boolean {
  if (typeof family === "object" && "root" in family) {
    // if A^N = 1 its eigenvalues are N-th roots of unity, and the double tells which; else those of the field are
    // compared
    if (order !== undefined && family.root % order === 0) return true;
    const { re, im } = value.toComplex();
    const turn = Math.round((Math.atan2(im, re) / (2 * Math.PI)) * FIELD_ORDER);
    return exactRootOfUnity(turn, FIELD_ORDER)?.equals(value) === true;
  }
  const number = Surd.from(text);
  return value.equals(family === "j" ? number.times(number.plus(1)) : number);
}
