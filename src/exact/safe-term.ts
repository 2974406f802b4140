import { gcdSafe } from "./integer.js";

/** A number with one term in machine integers: (n + i m) √r / d in lowest terms, r square-free, d ≥ 1; zero is 0 √1 / 1. */
export interface SafeTerm {
  readonly n: number;
  readonly m: number;
  readonly r: number;
  readonly d: number;
}

/** A complex rational number in safe integers: (re + i im) / den. */
export interface SafeParts {
  /** Numerator of the real part. */
  readonly re: number;
  /** Numerator of the imaginary part. */
  readonly im: number;
  /** ≥ 1. */
  readonly den: number;
}

/** 0. */
export const ZERO_TERM: SafeTerm = { n: 0, m: 0, r: 1, d: 1 };

const MOST = Number.MAX_SAFE_INTEGER;

/** (n + i m) √r / d in lowest terms, from safe integers with r square-free and d ≥ 1. */
export function lowestTerm(n: number, m: number, r: number, d: number): SafeTerm {
  if (n === 0 && m === 0) return ZERO_TERM;
  const common = d === 1 ? 1 : gcdSafe(gcdSafe(d, n), m);
  // + 0 turns −0 into 0
  if (common === 1) return { n: n + 0, m: m + 0, r, d };
  return { n: n / common + 0, m: m / common + 0, r, d: d / common };
}

/** Whether it is a safe integer: a sum or product that is not exact is beyond that. */
function fits(n: number): boolean {
  return n <= MOST && n >= -MOST;
}

/** x + y where both have the same root; undefined where a whole number outgrows the safe integers. */
export function addSafe(x: SafeTerm, y: SafeTerm): SafeTerm | undefined {
  if (x.d === y.d) {
    const [n, m] = [x.n + y.n, x.m + y.m];
    return fits(n) && fits(m) ? lowestTerm(n, m, x.r, x.d) : undefined;
  }
  const common = x.d === 1 || y.d === 1 ? 1 : gcdSafe(x.d, y.d);
  const [forX, forY] = [y.d / common, x.d / common];
  const d = x.d * forX;
  const [a, b, c, e] = [x.n * forX, y.n * forY, x.m * forX, y.m * forY];
  if (!(fits(d) && fits(a) && fits(b) && fits(c) && fits(e) && fits(a + b) && fits(c + e))) return undefined;
  return lowestTerm(a + b, c + e, x.r, d);
}

/** x y; undefined where a whole number outgrows the safe integers. */
export function multiplySafe(x: SafeTerm, y: SafeTerm): SafeTerm | undefined {
  let n = x.n * y.n;
  let m = 0;
  if (x.m !== 0 || y.m !== 0) {
    const [b, c, e] = [x.m * y.m, x.n * y.m, x.m * y.n];
    if (!(fits(n) && fits(b) && fits(c) && fits(e))) return undefined;
    n -= b;
    m = c + e;
  }
  let { r } = x;
  if (r === 1) r = y.r;
  else if (y.r !== 1) {
    // √r √s = g √((r/g)(s/g)) with g = gcd(r, s)
    const common = r === y.r ? r : gcdSafe(r, y.r);
    r = (r / common) * (y.r / common);
    n *= common;
    m *= common;
  }
  const d = x.d * y.d;
  return fits(n) && fits(m) && fits(r) && fits(d) ? lowestTerm(n, m, r, d) : undefined;
}

/**
 * 1 / x of x ≠ 0: d / ((n + i m) √r) = d (n − i m) √r / ((n² + m²) r); undefined where a whole number outgrows the safe
 * integers.
 */
export function invertSafe({ n, m, r, d }: SafeTerm): SafeTerm | undefined {
  if (m === 0) {
    const den = Math.abs(n) * r;
    return fits(den) ? lowestTerm(Math.sign(n) * d, 0, r, den) : undefined;
  }
  const [re, im, den] = [n * d, -m * d, (n * n + m * m) * r];
  return fits(re) && fits(im) && fits(den) ? lowestTerm(re, im, r, den) : undefined;
}
