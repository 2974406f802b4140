import Fraction from "fraction.js";
import type { Operator } from "../../src/operator/operator.js";

/** An exact complex number. */
export interface ExactComplex {
  readonly re: Fraction;
  readonly im: Fraction;
}

export type ExactMatrix = ExactComplex[][];

/** The fraction that a double-precision number is. */
export function fractionOf(x: number): Fraction {
  let denominator = 1n;
  let value = x;
  while (!Number.isInteger(value)) {
    value *= 2;
    denominator *= 2n;
  }
  return new Fraction(BigInt(value), denominator);
}

export const complex = (re: Fraction, im: Fraction): ExactComplex => ({ re, im });
export const plus = (a: ExactComplex, b: ExactComplex): ExactComplex => complex(a.re.add(b.re), a.im.add(b.im));
export const minus = (a: ExactComplex, b: ExactComplex): ExactComplex => complex(a.re.sub(b.re), a.im.sub(b.im));
export const times = (a: ExactComplex, b: ExactComplex): ExactComplex =>
  complex(a.re.mul(b.re).sub(a.im.mul(b.im)), a.re.mul(b.im).add(a.im.mul(b.re)));

const ZERO: ExactComplex = complex(new Fraction(0), new Fraction(0));

/** The stored values, exactly. */
export function exactOf(operator: Operator): ExactMatrix {
  return Array.from({ length: operator.n }, (_, i) =>
    Array.from({ length: operator.n }, (_, j) => {
      const { re, im } = operator.entry(i, j);
      return complex(fractionOf(re), fractionOf(im));
    }),
  );
}

export function exactSum(a: ExactMatrix, b: ExactMatrix, combine: typeof plus = plus): ExactMatrix {
  return a.map((row, i) => row.map((x, j) => combine(x, b[i]?.[j] ?? ZERO)));
}

export function exactProduct(a: ExactMatrix, b: ExactMatrix): ExactMatrix {
  return a.map((row) =>
    (b[0] ?? []).map((_, j) => row.reduce((sum, x, k) => plus(sum, times(x, b[k]?.[j] ?? ZERO)), ZERO)),
  );
}

/** The radius of entry (i, j); 0 where nothing is stored. */
export function radiusOf(operator: Operator, i: number, j: number): number {
  const { ptr, col, re, im } = operator.csr;
  for (let e = ptr[i] ?? 0; e < (ptr[i + 1] ?? 0); e++) {
    if (col[e] !== j) continue;
    const own = operator.radius;
    return own === undefined ? 2 ** -53 * Math.hypot(re[e] ?? 0, im?.[e] ?? 0) * (1 + 1e-15) : (own[e] ?? 0);
  }
  return 0;
}

/** The places where an operator is further from the truth than its radius allows. */
export function violations(operator: Operator, truth: ExactMatrix): string[] {
  const found: string[] = [];
  for (let i = 0; i < operator.n; i++) {
    for (let j = 0; j < operator.n; j++) {
      const { re, im } = operator.entry(i, j);
      const error = minus(complex(fractionOf(re), fractionOf(im)), truth[i]?.[j] ?? ZERO);
      const square = error.re.mul(error.re).add(error.im.mul(error.im));
      const radius = fractionOf(radiusOf(operator, i, j));
      if (square.compare(radius.mul(radius)) > 0) found.push(`(${i}, ${j}): error² ${square.valueOf()}`);
    }
  }
  return found;
}
