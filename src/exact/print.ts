import { GoodBasisError } from "../errors.js";
import { requireOptions, shown } from "../misuse.js";
import { gcd } from "./integer.js";
import type { Terms } from "./terms.js";

/**
 * How an exact number is written: `plain` as in "-1/2*sqrt(3)", `unicode` as in "−√3/2", `latex` as in
 * "-\frac{\sqrt{3}}{2}". Every one of them is read back to the same number.
 */
export type SurdForm = "plain" | "unicode" | "latex";

/** Options of the text of an exact number. */
export interface SurdTextOptions {
  /** `plain` unless stated. */
  readonly form?: SurdForm | undefined;
  /**
   * Writes a number that is one square root with everything under it, as tables of coupling coefficients do: √(8/15), and
   * √(3/4) where √3/2 is the usual form.
   */
  readonly underRoot?: boolean | undefined;
}

/** One summand without its sign: (re + i im) / den · √(up / down), lowest terms, up and down without common divisor. */
interface Summand {
  readonly negative: boolean;
  readonly re: bigint;
  readonly im: bigint;
  readonly den: bigint;
  readonly up: bigint;
  readonly down: bigint;
  /** Whether 1/√d is to be written √(1/d). */
  readonly underRoot: boolean;
}

/** The text of a number. */
export function textOf(a: Terms, options: SurdTextOptions = {}): string {
  requireOptions("Surd.text", options, ["form", "underRoot"]);
  const { form = "plain", underRoot = false } = options;
  if (!Object.hasOwn(WRITERS, form)) {
    const message = `Surd.text: there is no form ${shown(form)}; give "plain", "unicode" or "latex"`;
    throw new GoodBasisError("option", message, { form });
  }
  const all = a.roots.flatMap((_, k) => summandsOf(a, k));
  // real ones first, as 1 + 2i is written
  const summands = [...all.filter(({ im }) => im === 0n), ...all.filter(({ im }) => im !== 0n)];
  if (summands.length === 0) return "0";
  const [only] = summands;
  if (underRoot && only !== undefined && summands.length === 1) summands[0] = gathered(only);
  const minus = form === "unicode" ? "−" : "-";
  const space = form === "plain" ? "" : " ";
  return summands
    .map((summand, k) => {
      const sign = summand.negative ? minus : k > 0 ? "+" : "";
      const gap = k > 0 ? space : "";
      return `${gap}${sign}${gap}${WRITERS[form](summand, coefficient(summand, minus))}`;
    })
    .join("");
}

/** A term as summands: two for a complex rational number, so that it reads 1/2+3i/4. */
function summandsOf(a: Terms, k: number): Summand[] {
  const [root, re, im] = [a.roots[k] as bigint, a.re[k] as bigint, a.im[k] as bigint];
  if (root === 1n && re !== 0n && im !== 0n) return [summandOf(re, 0n, root, a.den), summandOf(0n, im, root, a.den)];
  return [summandOf(re, im, root, a.den)];
}

function summandOf(re: bigint, im: bigint, root: bigint, den: bigint): Summand {
  const common = gcd(gcd(re, im), den);
  const negative = re < 0n || (re === 0n && im < 0n);
  const factor = negative ? -common : common;
  // √d / b = √(d/g) / √g / (b/g) with g = gcd(b, d)
  const shared = gcd(den / common, root);
  return {
    negative,
    re: re / factor,
    im: im / factor,
    den: den / common / shared,
    up: root / shared,
    down: shared,
    underRoot: false,
  };
}

/** The same with a real or purely imaginary coefficient taken under the root. */
function gathered(summand: Summand): Summand {
  const { re, im, den, up, down } = summand;
  if ((re !== 0n && im !== 0n) || (up === 1n && down === 1n)) return summand;
  const size = re === 0n ? im : re;
  const [n, d] = [size * size * up, den * den * down];
  const common = gcd(n, d);
  return {
    negative: summand.negative,
    re: re === 0n ? 0n : 1n,
    im: re === 0n ? 1n : 0n,
    den: 1n,
    up: n / common,
    down: d / common,
    underRoot: true,
  };
}

/** The numerator as text: "" for 1 (to be seen as a factor), "3", "i", "3i" or "1+2i" (a sum, to be put in parentheses). */
function coefficient({ re, im }: Summand, minus: string): { text: string; isSum: boolean } {
  if (im === 0n) return { text: re === 1n ? "" : `${re}`, isSum: false };
  const size = im < 0n ? -im : im;
  const imaginary = size === 1n ? "i" : `${size}i`;
  if (re === 0n) return { text: imaginary, isSum: false };
  return { text: `${re}${im < 0n ? minus : "+"}${imaginary}`, isSum: true };
}

type Writer = (summand: Summand, numerator: { text: string; isSum: boolean }) => string;

const WRITERS: Readonly<Record<SurdForm, Writer>> = {
  plain({ den, up, down, underRoot }, { text, isSum }) {
    const factor = isSum ? `(${text})` : text;
    if (up === 1n && down === 1n) return den === 1n ? factor || "1" : `${factor || "1"}/${den}`;
    if (up === 1n && !underRoot) return `${factor || "1"}/${den === 1n ? `sqrt(${down})` : `(${den}*sqrt(${down}))`}`;
    const root = `sqrt(${down === 1n ? up : `${up}/${down}`})`;
    if (den !== 1n) return `${factor || "1"}/${den}*${root}`;
    return factor === "" ? root : `${factor}*${root}`;
  },
  unicode({ den, up, down, underRoot }, { text, isSum }) {
    const factor = isSum ? `(${text})` : text;
    if (up === 1n && down === 1n) return den === 1n ? factor || "1" : `${factor || "1"}/${den}`;
    if (up === 1n && !underRoot) return `${factor || "1"}/${den === 1n ? `√${down}` : `(${den}√${down})`}`;
    const root = down === 1n ? `√${up}` : `√(${up}/${down})`;
    return `${factor}${root}${den === 1n ? "" : `/${den}`}`;
  },
  latex({ den, up, down, underRoot }, { text, isSum }) {
    const factor = isSum ? `(${text})` : text;
    const fraction = (n: string, d: string): string => `\\frac{${n}}{${d}}`;
    if (up === 1n && down === 1n) return den === 1n ? factor || "1" : fraction(text || "1", `${den}`);
    if (up === 1n && !underRoot) return fraction(text || "1", `${den === 1n ? "" : den}\\sqrt{${down}}`);
    if (down === 1n) {
      const product = `${factor}\\sqrt{${up}}`;
      return den === 1n ? product : fraction(product, `${den}`);
    }
    const root = `\\sqrt{${fraction(`${up}`, `${down}`)}}`;
    return `${den === 1n ? factor : fraction(text || "1", `${den}`)}${root}`;
  },
};
