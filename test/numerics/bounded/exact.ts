/** Exact complex matrices as integers times 2^−1200, so that every double and every product of two has a place. */

const SHIFT = 1200n;

/** A double as an integer times 2^−SHIFT. */
function scaled(x: number): bigint {
  if (x === 0) return 0n;
  const exponent = Math.max(-1022, Math.floor(Math.log2(Math.abs(x)))) - 52;
  // Both factors are doubles, so that subnormal numbers keep their digits.
  const half = Math.trunc(exponent / 2);
  const mantissa = BigInt((x / 2 ** half) * 2 ** (half - exponent));
  return mantissa << (SHIFT + BigInt(exponent));
}

export interface Parts {
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/** Pairs of factors with the signs of their products, as in [1, A, B], [−1, B, A]. */
export type Terms = readonly (readonly [sign: number, x: Parts, y: Parts])[];

/** Σ over terms sign · X Y of n × n matrices, minus a computed matrix: the square of the Frobenius norm, times 2^−4 SHIFT. */
function squareOfDistance(n: number, terms: Terms, computed: Parts): bigint {
  const whole = (m: Float64Array | undefined): bigint[] => Array.from(m ?? new Float64Array(n * n), scaled);
  const exact = terms.map(([sign, x, y]) => ({
    sign: BigInt(sign),
    x: [whole(x.re), whole(x.im)] as const,
    y: [whole(y.re), whole(y.im)] as const,
  }));
  const [cRe, cIm] = [whole(computed.re), whole(computed.im)];
  let square = 0n;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const at = i * n + j;
      let re = -((cRe[at] as bigint) << SHIFT);
      let im = -((cIm[at] as bigint) << SHIFT);
      for (const { sign, x, y } of exact) {
        for (let k = 0; k < n; k++) {
          const [a, b] = [x[0][i * n + k] as bigint, x[1][i * n + k] as bigint];
          const [c, d] = [y[0][k * n + j] as bigint, y[1][k * n + j] as bigint];
          re += sign * (a * c - b * d);
          im += sign * (a * d + b * c);
        }
      }
      square += re * re + im * im;
    }
  }
  return square;
}

/** The Frobenius norm of Σ over terms sign · X Y of n × n matrices minus a computed matrix, rounded down. */
export function distance(n: number, terms: Terms, computed: Parts): number {
  // √square · 2^−2400, the root rounded by an integer step at most.
  return toDouble(root(squareOfDistance(n, terms, computed)), 2 * Number(SHIFT));
}

/** Whether that norm is at most a bound, without any rounding. */
export function isWithin(n: number, terms: Terms, computed: Parts, bound: number): boolean {
  if (bound === Number.POSITIVE_INFINITY) return true;
  const side = scaled(bound) << SHIFT;
  return bound >= 0 && squareOfDistance(n, terms, computed) <= side * side;
}

/** The integer part of a square root (Newton). */
function root(x: bigint): bigint {
  if (x < 2n) return x;
  let r = 1n << BigInt((x.toString(2).length + 1) >> 1);
  for (;;) {
    const next = (r + x / r) >> 1n;
    if (next >= r) return r;
    r = next;
  }
}

/** x · 2^−shift. */
function toDouble(x: bigint, shift: number): number {
  const digits = x.toString(2).length;
  const drop = Math.max(0, digits - 60);
  const exponent = drop - shift;
  const half = Math.trunc(exponent / 2);
  return Number(x >> BigInt(drop)) * 2 ** half * 2 ** (exponent - half);
}
