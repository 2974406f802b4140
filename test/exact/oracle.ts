import type { Surd } from "../../src/exact/surd.js";

/** Binary places of the oracle. */
export const PLACES = 400n;

/** A complex number in fixed point: whole numbers times 2^−400. */
export interface Fixed {
  readonly re: bigint;
  readonly im: bigint;
}

const fixed = (n: bigint, d = 1n): Fixed => ({ re: (n << PLACES) / d, im: 0n });
export const plus = (a: Fixed, b: Fixed): Fixed => ({ re: a.re + b.re, im: a.im + b.im });
const minus = (a: Fixed, b: Fixed): Fixed => ({ re: a.re - b.re, im: a.im - b.im });
export const times = (a: Fixed, b: Fixed): Fixed => ({
  re: (a.re * b.re - a.im * b.im) >> PLACES,
  im: (a.re * b.im + a.im * b.re) >> PLACES,
});
/** √(n / d) by bisection on whole numbers, on purpose the slow way. */
export function root(n: bigint, d = 1n): Fixed {
  const square = (n << (2n * PLACES)) / d;
  let low = 0n;
  let high = 1n << BigInt(Math.ceil(square.toString(2).length / 2) + 1);
  while (high - low > 1n) {
    const middle = (low + high) >> 1n;
    if (middle * middle <= square) low = middle;
    else high = middle;
  }
  return { re: low, im: 0n };
}

/** The value of an exact number from its own terms. */
export function inFixed(x: Surd): Fixed {
  return x
    .parts()
    .map(({ root: r, re, im }) =>
      times(
        { re: ((re.s * re.n) << PLACES) / re.d, im: ((im.s * im.n) << PLACES) / im.d },
        r === 1n ? fixed(1n) : root(r),
      ),
    )
    .reduce(plus, fixed(0n));
}

/** Whether two values agree to within 2^−bits. */
export function agree(a: Fixed, b: Fixed, bits: bigint): boolean {
  const most = 1n << (PLACES - bits);
  const { re, im } = minus(a, b);
  return re <= most && re >= -most && im <= most && im >= -most;
}

/** A double of modulus at least 2^−340 or 0 as fixed point, exactly. */
export function ofDouble(x: number): bigint {
  if (x === 0) return 0n;
  const shift = 380;
  // a power of two changes the exponent alone
  return BigInt(x * 2 ** shift) << (PLACES - BigInt(shift));
}
