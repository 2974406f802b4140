import { exactSqrt, gcd } from "./integer.js";

/**
 * A pairwise coprime base of non-squares: every given number is a product of powers of its elements.
 *
 * Wherever two numbers share a divisor g they are replaced by g and their cofactors, until nothing is shared; no number is
 * ever factored. Square roots of distinct products of base elements are linearly independent over the rationals, since a
 * product of distinct coprime non-squares is never a square.
 *
 * @param numbers - whole numbers ≥ 1
 * @returns the base, ascending, without 1
 *
 * Source: Bach, Driscoll and Shallit, "Factor refinement", J. Algorithms 15, 199 (1993).
 */
export function coprimeBase(numbers: readonly bigint[]): bigint[] {
  const base: bigint[] = [];
  const pending = numbers.filter((n) => n > 1n);
  for (let n = pending.pop(); n !== undefined; n = pending.pop()) {
    let shared = 1n;
    let at = 0;
    for (; at < base.length; at++) {
      shared = gcd(n, base[at] as bigint);
      if (shared > 1n) break;
    }
    if (at === base.length) {
      base.push(withoutSquares(n));
      continue;
    }
    const [other] = base.splice(at, 1) as [bigint];
    // the product of all numbers falls by the factor g each time, so this ends
    for (const part of [shared, other / shared, n / shared]) if (part > 1n) pending.push(part);
  }
  return base.sort((a, b) => (a < b ? -1 : 1));
}

/** The number whose repeated square n is, itself not a square. */
function withoutSquares(n: bigint): bigint {
  let free = n;
  for (let root = exactSqrt(free); root !== undefined; root = exactSqrt(free)) free = root;
  return free;
}

/**
 * A number over a coprime base, squares taken out: n = square² · free with `free` a product of distinct base elements.
 *
 * @param n - a whole number ≥ 1
 * @param base - pairwise coprime; n is a product of powers of its elements
 */
export function overBase(n: bigint, base: readonly bigint[]): { square: bigint; free: bigint } {
  let square = 1n;
  let free = 1n;
  let rest = n;
  for (const element of base) {
    let power = 0;
    while (rest % element === 0n) {
      rest /= element;
      power++;
    }
    square *= element ** BigInt(power >> 1);
    if (power % 2 === 1) free *= element;
  }
  return { square, free };
}
