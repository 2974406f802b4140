import { ExactOperator } from "../exact/operator.js";
import type { ExactTriplet } from "../exact/rows.js";
import { roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { fromTriplets } from "../numerics/sparse.js";
import { Operator } from "./operator.js";
import { settle } from "./settle.js";

/** A number with a bound on its error. */
export interface Enclosed {
  readonly value: number;
  readonly radius: number;
}

/**
 * The square root of a double-precision number that is known exactly: radius zero where the root is, half a unit in the last
 * place elsewhere.
 *
 * @param square - a non-negative number whose product of root and root is representable if the root has at most 26 bits
 */
export function exactRoot(square: number): Enclosed {
  const value = Math.sqrt(square);
  const isShort = Number.isInteger(value * 2 ** 8) && value < 2 ** 18;
  return { value, radius: isShort && value * value === square ? 0 : UNIT_ROUNDOFF * value };
}

/** Collects entries with radii of their own, each place at most once, and makes an operator of them. */
export class EntryList {
  readonly #n: number;
  readonly #rows: number[] = [];
  readonly #cols: number[] = [];
  readonly #re: number[] = [];
  readonly #im: number[] = [];
  readonly #radius: number[] = [];

  /** @param n - number of kets */
  constructor(n: number) {
    this.#n = n;
  }

  /** Adds one entry. */
  add(row: number, col: number, re: number, im: number, radius: number): void {
    this.#rows.push(row);
    this.#cols.push(col);
    this.#re.push(re);
    this.#im.push(im);
    this.#radius.push(radius);
  }

  /**
   * The operator; a place that was given twice holds the sum, with both radii and the rounding of the sum.
   *
   * @param exact - makes the triplets of exact entries, in any order, where they are known
   */
  finish(verb: string, exact?: () => Iterable<ExactTriplet>): Operator {
    const n = this.#n;
    const csr = fromTriplets(n, n, this.#rows, this.#cols, this.#re, this.#im);
    const radius = fromTriplets(n, n, this.#rows, this.#cols, this.#radius).re;
    if (csr.col.length < this.#rows.length) {
      const size = this.#re.map((x, k) => Math.abs(x) + Math.abs(this.#im[k] as number));
      const sizes = fromTriplets(n, n, this.#rows, this.#cols, size).re;
      const counts = fromTriplets(
        n,
        n,
        this.#rows,
        this.#cols,
        size.map(() => 1),
      ).re;
      for (let e = 0; e < radius.length; e++) {
        const extra = (counts[e] as number) - 1;
        if (extra === 0) continue;
        radius[e] = roundUp((radius[e] as number) + 2 * extra * UNIT_ROUNDOFF * (sizes[e] as number), 4 * extra + 8);
      }
    }
    const core = settle(verb, csr, radius);
    const operator = Operator.fromCsr(core.csr, core.radius);
    return exact === undefined ? operator : Operator.withExact(operator, () => ExactOperator.fromTriplets(n, exact()));
  }
}
