import { GoodBasisError } from "../errors.js";

/** A double as whole number times a power of two. */
export interface Dyadic {
  /** Odd, or 0. */
  readonly numerator: bigint;
  /** The double is numerator · 2^exponent. */
  readonly exponent: number;
}

/**
 * The exact value of a double, read from its bits: 0.1 is 3602879701896397 · 2^−55, not 1/10.
 *
 * @param where - the function that asks, for the message
 * @throws GoodBasisError `not-finite` - NaN or infinite
 */
export function dyadic(where: string, x: number): Dyadic {
  if (!Number.isFinite(x)) {
    const message = `${where}: expected a finite number, got ${x}; an exact number has no infinity`;
    throw new GoodBasisError("not-finite", message, { value: x });
  }
  if (x === 0) return { numerator: 0n, exponent: 0 };
  const bits = new DataView(new ArrayBuffer(8));
  bits.setFloat64(0, x);
  const raw = bits.getBigUint64(0);
  const biased = Number((raw >> 52n) & 0x7ffn);
  const fraction = raw & 0xfffffffffffffn;
  let numerator = biased === 0 ? fraction : fraction | 0x10000000000000n;
  let exponent = Math.max(biased, 1) - 1075;
  while ((numerator & 1n) === 0n) {
    numerator >>= 1n;
    exponent++;
  }
  return { numerator: x < 0 ? -numerator : numerator, exponent };
}
