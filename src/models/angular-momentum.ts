import { GoodBasisError } from "../errors.js";
import type { ExactTriplet } from "../exact/rows.js";
import { shown } from "../misuse.js";
import { EntryList, exactRoot } from "../operator/builder.js";
import { Operator } from "../operator/operator.js";
import { wholeRoot } from "./roots.js";

/** The operators of one angular momentum, in units of ħ. */
export interface AngularMomentum {
  /** J_x = (J₊ + J₋)/2, real. */
  readonly x: Operator;
  /** J_y = (J₊ − J₋)/2i, imaginary. */
  readonly y: Operator;
  /** J_z = diag(j, j − 1, …, −j), exact. */
  readonly z: Operator;
  /** J₊, which raises m by one. */
  readonly plus: Operator;
  /** J₋ = J₊†. */
  readonly minus: Operator;
  /** J² = j(j + 1), exact. */
  readonly squared: Operator;
  /** 2j + 1. */
  readonly n: number;
  /** Names of the kets, `"1/2"`, `"-1/2"` and so on: the values of m in their order. */
  readonly kets: readonly string[];
}

/**
 * The operators of an angular momentum j on its 2j + 1 kets |j m⟩, m = +j first, then descending to −j.
 *
 * Condon–Shortley phases: J± |m⟩ = √(j(j + 1) − m(m ± 1)) |m ± 1⟩ with the positive root (Condon and Shortley, The Theory of
 * Atomic Spectra, 1935, ch. III). Roots that are whole or half numbers are exact, others carry half a unit in the last place; all
 * are known exactly, see {@link Operator.exact}.
 *
 * @param j - 0, 1/2, 1, 3/2, …
 * @throws GoodBasisError `option` - j is not a whole or half number from 0 to below 2^20
 *
 * @example
 * ```ts
 * import { angularMomentum } from "goodbasis";
 *
 * const s = angularMomentum(1 / 2);
 * console.log(s.kets, s.plus.entry(0, 1).re); // [ '1/2', '-1/2' ] 1
 * ```
 */
export function angularMomentum(j: number): AngularMomentum {
  const n = multiplicity("angularMomentum", j);
  const ladder = new EntryList(n);
  for (let k = 1; k < n; k++) {
    const { value, radius } = exactRoot(ladderSquare(j, k));
    ladder.add(k - 1, k, value, 0, radius);
  }
  const plus = ladder.finish("angularMomentum", () => ladderTriplets(j, n));
  const minus = plus.adjoint();
  const m = Float64Array.from({ length: n }, (_, k) => j - k);
  return {
    x: plus.plus(minus).scale(0.5),
    y: plus.minus(minus).scale({ re: 0, im: -0.5 }),
    z: Operator.diagonal(m, { uncertainty: "exact" }),
    plus,
    minus,
    squared: Operator.diagonal(new Float64Array(n).fill(j * (j + 1)), { uncertainty: "exact" }),
    n,
    kets: Array.from(m, halfText),
  };
}

/** ⟨j, m + 1| J₊ |j, m⟩² for m = j − k: j(j + 1) − m(m + 1) = k (2j + 1 − k), a whole number. */
function ladderSquare(j: number, k: number): number {
  return k * (2 * j + 1 - k);
}

function* ladderTriplets(j: number, n: number): Generator<ExactTriplet> {
  for (let k = 1; k < n; k++) yield [k - 1, k, wholeRoot(ladderSquare(j, k))];
}

/**
 * The number of kets 2j + 1.
 *
 * @throws GoodBasisError `option` - j is not a whole or half number from 0 on
 */
export function multiplicity(verb: string, j: number): number {
  if (typeof j === "number" && Number.isInteger(2 * j) && j >= 0 && j < 2 ** 20) return 2 * j + 1;
  const message = `${verb}: j must be one of the numbers 0, 1/2, 1, 3/2, …, below 2^20, got ${shown(j)}`;
  throw new GoodBasisError("option", message, { j });
}

/** A whole or half number as text: `"3/2"`, `"-1"`. */
export function halfText(value: number): string {
  return Number.isInteger(value) ? `${value}` : `${2 * value}/2`;
}
