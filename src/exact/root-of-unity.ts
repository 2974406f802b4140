import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import { gcdSafe } from "./integer.js";
import { Surd } from "./surd.js";

/** The orders of all roots of unity in the field: cos and sin of 15° are (√6 ± √2)/4, those of 72° need nested roots. */
const ORDER = 24;

/** e^{2πi/24}. */
const PRIMITIVE: Surd = Surd.from("(sqrt(6)+sqrt(2))/4 + i*(sqrt(6)-sqrt(2))/4");

/**
 * e^{2πi k / order} where it lies in the field, that is, where the order in lowest terms divides 24; undefined elsewhere.
 *
 * @param k - a whole number, of either sign
 * @param order - 1, 2, 3, …
 * @throws GoodBasisError `option`
 *
 * @example
 * ```ts
 * import { exactRootOfUnity } from "goodbasis";
 *
 * console.log(exactRootOfUnity(1, 8)?.text(), exactRootOfUnity(1, 10)); // (1+i)/sqrt(2) undefined
 * ```
 */
export function exactRootOfUnity(k: number, order: number): Surd | undefined {
  if (!Number.isSafeInteger(k) || !Number.isSafeInteger(order) || order < 1) {
    const message = `exactRootOfUnity: expected a whole number and an order from 1 on, got ${shown(k)} and ${shown(order)}`;
    throw new GoodBasisError("option", message, { k, order });
  }
  const common = gcdSafe(k, order);
  if (ORDER % (order / common) !== 0) return undefined;
  const turns = (((k / common) * (ORDER / (order / common))) % ORDER) + ORDER;
  return PRIMITIVE.power(turns % ORDER);
}
