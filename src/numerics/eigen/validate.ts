import { GoodBasisError } from "../../errors.js";
import type { EigenOptions, EigenWindow } from "./types.js";

/**
 * Refuses arrays that are not a square matrix of order n.
 *
 * @throws GoodBasisError `shape`
 */
export function requireShape(where: string, n: number, re: Float64Array, im: Float64Array | undefined): void {
  const length = n * n;
  if (!(re instanceof Float64Array) || !(im === undefined || im instanceof Float64Array)) {
    throw new GoodBasisError(
      "shape",
      `${where}: expected the entries as Float64Array, real and imaginary parts apart, got another kind of value; ` +
        "pass Float64Array.from(rows.flat()), or operator.dense().re and .im",
    );
  }
  if (Number.isInteger(n) && n >= 0 && re.length === length && (im === undefined || im.length === length)) return;
  throw new GoodBasisError(
    "shape",
    `${where}: expected arrays of n² numbers for n = ${typeof n === "number" ? n : typeof n}, got ` +
      `${re.length}${im === undefined ? "" : ` and ${im.length}`}; pass the full square, row by row`,
    { n, re: re.length, im: im?.length },
  );
}

/** What {@link requireBatch} counted. */
export interface BatchShape {
  /** A copy. */
  readonly orders: Int32Array;
  /** Sum of the orders. */
  readonly rows: number;
  /** Sum of their squares. */
  readonly numbers: number;
}

/**
 * Refuses orders that are none, and arrays that are not matrices of these orders one after the other.
 *
 * @throws GoodBasisError `shape`
 */
export function requireBatch(orders: ArrayLike<number>, re: Float64Array, im: Float64Array | undefined): BatchShape {
  if (typeof orders !== "object" || orders === null || !Number.isInteger(orders.length)) {
    throw batchError("expected a list of orders, got another kind of value");
  }
  const count = orders.length;
  let rows = 0;
  let numbers = 0;
  for (let k = 0; k < count; k++) {
    const n: unknown = orders[k];
    if (typeof n !== "number" || !Number.isInteger(n) || n < 0 || n >= 2 ** 31) {
      throw batchError(`expected orders ≥ 0, got ${typeof n === "number" ? n : typeof n} for matrix ${k}`);
    }
    rows += n;
    numbers += n * n;
  }
  if (!(re instanceof Float64Array) || !(im === undefined || im instanceof Float64Array)) {
    throw batchError(
      "expected the entries as Float64Array (im undefined for real matrices), got another kind of value",
    );
  }
  if (re.length !== numbers || (im !== undefined && im.length !== numbers)) {
    const got = `${re.length}${im === undefined ? "" : ` and ${im.length}`}`;
    throw batchError(`expected ${numbers} numbers for ${count} matrices of the given orders, got ${got}`);
  }
  return { orders: Int32Array.from(orders), rows, numbers };
}

function batchError(message: string): GoodBasisError {
  return new GoodBasisError("shape", `batchedHermitianEigen: ${message}; pass every matrix as a full square`);
}

/**
 * The options with their defaults filled in.
 *
 * @throws GoodBasisError `option` for options that are none
 */
export function readOptions(where: string, options: EigenOptions): Required<EigenOptions> {
  if (typeof options === "object" && options !== null) {
    const { window = {}, upper = "check" } = options;
    const windows = typeof window === "object" && window !== null;
    if (windows && (upper === "check" || upper === "ignore")) return { window, upper };
  }
  throw new GoodBasisError(
    "option",
    `${where}: expected options { window: { from, to, low, high }, upper: "check" or "ignore" }, got another kind of value; ` +
      "leave out what is not wanted",
  );
}

/**
 * Refuses a window that is none.
 *
 * @throws GoodBasisError `option`
 */
export function requireWindow(
  where: string,
  n: number,
  { from = 0, to = n, low = Number.NEGATIVE_INFINITY, high = Number.POSITIVE_INFINITY }: EigenWindow,
): void {
  const indices = Number.isInteger(from) && Number.isInteger(to) && from >= 0 && to <= n && from <= to;
  const values = typeof low === "number" && typeof high === "number" && low <= high;
  if (indices && values) return;
  const said = [from, to, low, high].map((x) => (typeof x === "number" ? x : typeof x));
  throw new GoodBasisError(
    "option",
    `${where}: expected a window with 0 ≤ from ≤ to ≤ ${n} and low ≤ high, got from ${said[0]}, to ${said[1]}, ` +
      `low ${said[2]}, high ${said[3]}; leave out what is not to restrict`,
    { from, to, low, high },
  );
}
