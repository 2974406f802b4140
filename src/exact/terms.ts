import type { Fraction } from "fraction.js";
import { GoodBasisError } from "../errors.js";
import { coprimeBase, overBase } from "./coprime-base.js";
import { gcd } from "./integer.js";
import { splitSquare } from "./squarefree.js";

/** One term (re + i im) √root of a `Surd`. */
export interface SurdTerm {
  /** ≥ 1, not a square unless 1. */
  readonly root: bigint;
  /** Real part of the coefficient. */
  readonly re: Fraction;
  /** Imaginary part of the coefficient. */
  readonly im: Fraction;
}

/**
 * A number in its general form: Σ_k (re_k + i im_k) √roots_k / den, all whole numbers.
 *
 * Invariants: roots ascend, are ≥ 1, and no product of two of them is a square, so that their square roots are linearly
 * independent over Q(i) and the number is zero only as the empty sum; no term is zero; den ≥ 1 has no divisor in common with
 * all coefficients. Where `plain`, every root is known to be square-free and the form is unique.
 */
export interface Terms {
  /** Whole numbers ≥ 1 under the root, ascending. */
  readonly roots: readonly bigint[];
  /** Numerators of the real parts. */
  readonly re: readonly bigint[];
  /** Numerators of the imaginary parts. */
  readonly im: readonly bigint[];
  /** ≥ 1. */
  readonly den: bigint;
  /** Whether every root is known to be square-free. */
  readonly plain: boolean;
}

/** A sum being gathered, terms in any order, equal roots allowed. */
interface Gathered {
  readonly roots: bigint[];
  readonly re: bigint[];
  readonly im: bigint[];
}

/** Terms that a product may gather before like roots are collected: beyond this even one number is out of hand. */
const MOST_TERMS = 1 << 18;

/** Zero as an empty sum. */
export const NO_TERMS: Terms = { roots: [], re: [], im: [], den: 1n, plain: true };

/** A number with one term (re + i im) √root / den; `root` ≥ 1 may hold squares, den ≠ 0. */
export function oneTerm(re: bigint, im: bigint, root: bigint, den: bigint): Terms {
  const { square, free, certified } = splitSquare(root);
  return reduce([free], [re * square], [im * square], den, certified);
}

/** √(p / q) for p > 0 and q > 0 without common divisor: squares are looked for in each of them. */
export function rootTerm(p: bigint, q: bigint): Terms {
  const [up, down] = [splitSquare(p), splitSquare(q)];
  // √(p / q) = s √f / (t √g) = s √(f g) / (t g), and f g is square-free where f and g are
  return reduce([up.free * down.free], [up.square], [0n], down.square * down.free, up.certified && down.certified);
}

/** a + b. */
export function addTerms(a: Terms, b: Terms): Terms {
  const shared = a.den === b.den ? a.den : gcd(a.den, b.den);
  const [forA, forB] = [b.den / shared, a.den / shared];
  const scaled = (list: readonly bigint[], factor: bigint): readonly bigint[] =>
    factor === 1n ? list : list.map((n) => n * factor);
  return collect(
    {
      roots: [...a.roots, ...b.roots],
      re: [...scaled(a.re, forA), ...scaled(b.re, forB)],
      im: [...scaled(a.im, forA), ...scaled(b.im, forB)],
    },
    a.den * forA,
    a.plain && b.plain,
  );
}

/**
 * a · b.
 *
 * @throws GoodBasisError `budget` - far too many square roots
 */
export function multiplyTerms(a: Terms, b: Terms): Terms {
  const count = a.roots.length * b.roots.length;
  if (count > MOST_TERMS) {
    const message =
      `a product of numbers with ${a.roots.length} and ${b.roots.length} square roots is out of hand; ` +
      "split the space by more symmetries first, or use floating-point operators with rigorous bounds";
    throw new GoodBasisError("budget", message, { kind: "roots", most: MOST_TERMS });
  }
  const roots: bigint[] = [];
  const re: bigint[] = [];
  const im: bigint[] = [];
  for (let j = 0; j < a.roots.length; j++) {
    const [r, x, y] = [a.roots[j] as bigint, a.re[j] as bigint, a.im[j] as bigint];
    for (let k = 0; k < b.roots.length; k++) {
      const [s, u, v] = [b.roots[k] as bigint, b.re[k] as bigint, b.im[k] as bigint];
      // √r √s = g √((r/g)(s/g)) with g = gcd(r, s); square-free where r and s are
      const g = r === 1n || s === 1n ? 1n : r === s ? r : gcd(r, s);
      roots.push(g === 1n ? r * s : (r / g) * (s / g));
      const real = y === 0n && v === 0n;
      const p = real ? x * u : x * u - y * v;
      const q = real ? 0n : x * v + y * u;
      re.push(g === 1n ? p : p * g);
      im.push(g === 1n ? q : q * g);
    }
  }
  return collect({ roots, re, im }, a.den * b.den, a.plain && b.plain);
}

/** −a, and the complex conjugate, and i a, and others that only touch signs: each coefficient is mapped on its own. */
export function mapTerms(a: Terms, map: (re: bigint, im: bigint) => readonly [bigint, bigint]): Terms {
  const pairs = a.re.map((re, k) => map(re, a.im[k] as bigint));
  return { ...a, re: pairs.map(([re]) => re), im: pairs.map(([, im]) => im) };
}

/** The real part. */
export function realTerms(a: Terms): Terms {
  return reduce([...a.roots], [...a.re], a.im.map(zero), a.den, a.plain);
}

/** The imaginary part, as a real number. */
export function imaginaryTerms(a: Terms): Terms {
  return reduce([...a.roots], [...a.im], a.re.map(zero), a.den, a.plain);
}

const zero = (): bigint => 0n;

/** The terms whose root passes, over the same denominator. */
export function selectTerms(a: Terms, keep: (root: bigint) => boolean): Terms {
  const chosen = a.roots.map(keep);
  const pick = (list: readonly bigint[]): bigint[] => list.filter((_, k) => chosen[k]);
  return reduce(pick(a.roots), pick(a.re), pick(a.im), a.den, a.plain);
}

/** Brings like roots together; where a root may hide a square, over a coprime base of all of them. */
function collect(sum: Gathered, den: bigint, plain: boolean): Terms {
  const certified = plain ? true : refine(sum);
  const place = new Map<bigint, number>();
  const roots: bigint[] = [];
  const re: bigint[] = [];
  const im: bigint[] = [];
  for (let k = 0; k < sum.roots.length; k++) {
    const root = sum.roots[k] as bigint;
    const at = place.get(root);
    if (at === undefined) {
      place.set(root, roots.length);
      roots.push(root);
      re.push(sum.re[k] as bigint);
      im.push(sum.im[k] as bigint);
    } else {
      re[at] = (re[at] as bigint) + (sum.re[k] as bigint);
      im[at] = (im[at] as bigint) + (sum.im[k] as bigint);
    }
  }
  return reduce(roots, re, im, den, certified);
}

/**
 * Rewrites all roots over one coprime base of non-squares, in place.
 *
 * @returns whether every root is now known to be square-free
 */
function refine(sum: Gathered): boolean {
  const splits = coprimeBase(sum.roots).map((element) => ({ element, ...splitSquare(element) }));
  const base = splits.map(({ element }) => element);
  for (let k = 0; k < sum.roots.length; k++) {
    let { square, free } = overBase(sum.roots[k] as bigint, base);
    for (const split of splits) {
      if (split.square === 1n || free % split.element !== 0n) continue;
      free = (free / split.element) * split.free;
      square *= split.square;
    }
    sum.roots[k] = free;
    sum.re[k] = (sum.re[k] as bigint) * square;
    sum.im[k] = (sum.im[k] as bigint) * square;
  }
  return splits.every(({ certified }) => certified);
}

/** Drops zero terms, sorts by root, and takes the common divisor out. */
function reduce(roots: bigint[], re: bigint[], im: bigint[], den: bigint, plain: boolean): Terms {
  const order: number[] = [];
  for (let k = 0; k < roots.length; k++) if (re[k] !== 0n || im[k] !== 0n) order.push(k);
  if (order.length === 0) return NO_TERMS;
  if (order.length > 1) order.sort((j, k) => ((roots[j] as bigint) < (roots[k] as bigint) ? -1 : 1));
  let divisor = den < 0n ? -den : den;
  for (const k of order) {
    if (divisor === 1n) break;
    divisor = gcd(gcd(divisor, re[k] as bigint), im[k] as bigint);
  }
  if (den < 0n) divisor = -divisor;
  const pick = (list: readonly bigint[]): bigint[] =>
    order.map((k) => (divisor === 1n ? (list[k] as bigint) : (list[k] as bigint) / divisor));
  return { roots: order.map((k) => roots[k] as bigint), re: pick(re), im: pick(im), den: den / divisor, plain };
}
