import type { StateVector } from "../certify/outcome.js";
import { visible } from "./characters.js";
import { boundText, complexText, numberText } from "./numbers.js";
import type { Expansion, ExpansionTerm } from "./table.js";

/**
 * The largest terms of a state, in descending order of their moduli; equal ones (to six digits) in the order of the kets.
 *
 * @param terms - most terms kept
 * @param threshold - coefficients with a smaller modulus are left out; the count and weight of all left out are kept
 */
export function expand(vector: StateVector, ket: (i: number) => string, terms: number, threshold: number): Expansion {
  const all = Array.from(vector.kets, (index, k) => {
    const re = vector.re[k] ?? 0;
    const im = vector.im?.[k] ?? 0;
    const size = Math.hypot(re, im);
    return { index, re, im, size, rank: Number(size.toPrecision(6)) };
  }).filter((term) => term.size > 0);
  all.sort((a, b) => b.rank - a.rank || a.index - b.index);
  const large = all.filter((term) => term.size >= threshold).slice(0, terms);
  const kept = new Set(large);
  const rest = all.filter((term) => !kept.has(term));
  return {
    terms: large.map(({ re, im, index }): ExpansionTerm => ({ re, im, ket: ket(index) })),
    leftOut: { terms: rest.length, weight: rest.reduce((sum, { size }) => sum + size * size, 0) },
  };
}

/** How an expansion is put into signs; formats differ in kets and numbers only. */
export interface ExpansionStyle {
  readonly ket: (name: string) => string;
  /** Rewrites a number that {@link numberText} made. */
  readonly number: (text: string) => string;
  readonly dots: string;
}

/** Text: `0.816497 |1,−1/2⟩ − 0.57735 |0,1/2⟩ … (+5, weight 0.012)`. */
export const PLAIN_EXPANSION: ExpansionStyle = {
  ket: (name) => `|${visible(name)}⟩`,
  number: (text) => text,
  dots: "…",
};

/** Writes an expansion; a modulus that all of two or more real coefficients have in common is written once. */
export function expansionText(expansion: Expansion, style: ExpansionStyle = PLAIN_EXPANSION): string {
  const factor = commonFactor(expansion.terms);
  const minus = style.number("−");
  let text = "";
  expansion.terms.forEach(({ re, im, ket }, k) => {
    const { sign, coefficient } = split(re, im);
    if (k === 0) text = sign < 0 ? minus : "";
    else text += ` ${sign < 0 ? minus : "+"} `;
    const bare = factor !== undefined || coefficient === "1";
    text += `${bare ? "" : `${style.number(coefficient)} `}${style.ket(ket)}`;
  });
  if (factor !== undefined) text = `${style.number(factor)} (${text})`;
  const { terms, weight } = expansion.leftOut;
  if (terms === 0) return text === "" ? "0" : text;
  const rest = `${style.dots} (+${terms}, weight ${style.number(boundText(weight, 2))})`;
  return text === "" ? rest : `${text} ${rest}`;
}

/** The modulus that two or more real coefficients have in common to the digits printed. */
function commonFactor(terms: readonly ExpansionTerm[]): string | undefined {
  const sizes = new Set(terms.map(({ re, im }) => (im === 0 ? numberText(Math.abs(re)) : "")));
  const [only = ""] = sizes;
  return terms.length >= 2 && sizes.size === 1 && only !== "" ? only : undefined;
}

/** A coefficient without its sign; one that is truly complex stands in parentheses. */
function split(re: number, im: number): { sign: number; coefficient: string } {
  if (im === 0) return { sign: Math.sign(re), coefficient: numberText(Math.abs(re)) };
  const text = complexText(re, im);
  if (/.[+−]/u.test(text.replace(/e−/gu, "e"))) return { sign: 1, coefficient: `(${text})` };
  return text.startsWith("−") ? { sign: -1, coefficient: text.slice(1) } : { sign: 1, coefficient: text };
}
