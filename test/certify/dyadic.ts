import type { BasisState } from "../../src/index.js";
import type { Operator } from "../../src/operator/operator.js";

/** Every double used here is a whole multiple of 2^−SHIFT. */
const SHIFT = 400;

/** A double as a whole number of units 2^−SHIFT, exactly. */
function units(x: number): bigint {
  if (x === 0) return 0n;
  const exponent = Math.max(-1022, Math.floor(Math.log2(Math.abs(x)))) - 53;
  const mantissa = x / 2 ** exponent;
  if (!Number.isInteger(mantissa) || exponent + SHIFT < 0) throw new RangeError(`${x} does not fit`);
  return BigInt(mantissa) << BigInt(exponent + SHIFT);
}

interface Exact {
  readonly re: bigint;
  readonly im: bigint;
}

/** A matrix over the kets, entry by entry, in units. */
export type ExactMatrix = readonly (readonly Exact[])[];

/** The entries of an operator, exactly. */
export function exactMatrix(operator: Operator): ExactMatrix {
  const all = Array.from({ length: operator.n }, (_, i) => i);
  return all.map((i) =>
    all.map((j) => {
      const { re, im } = operator.entry(i, j);
      return { re: units(re), im: units(im) };
    }),
  );
}

/** The vector of a state, exactly. */
export function exactVector({ vector }: BasisState, n: number): readonly Exact[] {
  const out: Exact[] = Array.from({ length: n }, () => ({ re: 0n, im: 0n }));
  vector.kets.forEach((ket, k) => {
    out[ket] = { re: units(vector.re[k] ?? 0), im: units(vector.im?.[k] ?? 0) };
  });
  return out;
}

function dot(a: readonly Exact[], b: readonly Exact[], conjugate: boolean): Exact {
  let re = 0n;
  let im = 0n;
  a.forEach((x, k) => {
    const y = b[k];
    if (y === undefined) return;
    const s = conjugate ? -x.im : x.im;
    re += x.re * y.re - s * y.im;
    im += x.re * y.im + s * y.re;
  });
  return { re, im };
}

/** A modulus, kept as its exact square in units of 2^(−2 · scale). */
export class Modulus {
  readonly square: bigint;
  readonly scale: number;

  constructor(square: bigint, scale: number) {
    this.square = square;
    this.scale = scale;
  }

  /** Whether the modulus is at most a double, decided exactly. */
  atMost(bound: number): boolean {
    if (bound === Number.POSITIVE_INFINITY) return true;
    const x = units(bound);
    return x >= 0n && this.square <= (x * x) << BigInt(2 * (this.scale - SHIFT));
  }

  /** To double precision, for comparisons with a margin. */
  get value(): number {
    const bits = this.square.toString(2).length;
    const drop = Math.max(0, bits - 106 + (bits % 2));
    return Math.sqrt(Number(this.square >> BigInt(drop))) * 2 ** (drop / 2 - this.scale);
  }
}

/** |a†M b|, exactly. */
export function exactElement(a: readonly Exact[], matrix: ExactMatrix, b: readonly Exact[]): Modulus {
  const image = matrix.map((row) => dot(row, b, false));
  const { re, im } = dot(a, image, true);
  return new Modulus(re * re + im * im, 3 * SHIFT);
}

/** ‖M b − e b‖, exactly. */
export function exactResidual(matrix: ExactMatrix, b: readonly Exact[], e: number): Modulus {
  const value = units(e);
  let square = 0n;
  matrix.forEach((row, k) => {
    const { re, im } = dot(row, b, false);
    const x = re - value * (b[k]?.re ?? 0n);
    const y = im - value * (b[k]?.im ?? 0n);
    square += x * x + y * y;
  });
  return new Modulus(square, 2 * SHIFT);
}
