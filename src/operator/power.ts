import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";

/**
 * A factor to a whole power from 1 on, by repeated squaring.
 *
 * @throws GoodBasisError `option` - not a whole number from 0 on; what `times` throws
 */
export function powerOf<T extends { times(other: T): T }>(base: T, exponent: number): T {
  if (!Number.isInteger(exponent) || exponent < 0) {
    throw new GoodBasisError("option", `power: the exponent must be 0, 1, 2, …, got ${shown(exponent)}`, { exponent });
  }
  if (exponent <= 1) return base;
  const half = powerOf(base, Math.floor(exponent / 2));
  const square = half.times(half);
  return exponent % 2 === 0 ? square : square.times(base);
}
