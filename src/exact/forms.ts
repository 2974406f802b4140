import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, shown } from "../misuse.js";

/** The outer forms of what plain JavaScript may hand over, looked at before anything in them is. */

/** @throws GoodBasisError `option` */
export function requireList(verb: string, came: unknown): void {
  requireArgument(Array.isArray(came), verb, "a list", came, "give an array [ … ]");
}

/** @throws GoodBasisError `option` */
export function requireTriplets(verb: string, came: unknown): void {
  const good = isObject(came) && Symbol.iterator in came && (!Array.isArray(came) || came.every(Array.isArray));
  requireArgument(good, verb, "triplets [row, col, number]", came, "in any order");
}

/**
 * Refuses what is not square sparse rows of doubles; the entries are not looked at.
 *
 * @throws GoodBasisError `shape`
 */
export function requireSquareRows(verb: string, came: unknown): void {
  if (isObject(came) && "rows" in came && "cols" in came && "ptr" in came && "col" in came && "re" in came) {
    const { rows, cols, ptr, col, re } = came;
    const arrays = ptr instanceof Int32Array && col instanceof Int32Array && re instanceof Float64Array;
    if (arrays && rows === cols && ptr.length === Number(rows) + 1 && rows !== 0) return;
  }
  throw new GoodBasisError(
    "shape",
    `${verb}: expected square sparse rows such as the csr of an Operator, got ${shown(came)}`,
  );
}
