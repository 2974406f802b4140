import { requireOptions } from "../misuse.js";
import type { Csr } from "../numerics/csr.js";
import { requireSquareRows } from "./forms.js";
import { ExactOperator } from "./operator.js";
import { type RecogniseOptions, recognise } from "./recognise.js";
import type { ExactTriplet } from "./rows.js";
import { Surd } from "./surd.js";

/** An exact operator that a floating one may stand for: a guess, entry by entry. */
export interface OperatorProposal {
  /** Says what it is. */
  readonly kind: "proposal";
  /** The exact operator. */
  readonly operator: ExactOperator;
  /** The largest distance of a real or imaginary part from its proposal, rounded up. */
  readonly distance: number;
}

/** Entries for which no number, or more than one, was found. */
export interface NoOperatorProposal {
  /** No proposal is made. */
  readonly kind: "none";
  /** The entries in question, row by row. */
  readonly entries: readonly UnknownEntry[];
}

/** An entry that stands for no known number, or for several. */
export interface UnknownEntry {
  /** Row, 0-based. */
  readonly row: number;
  /** Column, 0-based. */
  readonly col: number;
  /** Its real part. */
  readonly re: number;
  /** Its imaginary part. */
  readonly im: number;
}

/**
 * {@link recognise} for every real and imaginary part of a square matrix; entries of rounding size come out as zero, since the
 * scale is that of the largest part unless stated.
 *
 * @throws GoodBasisError `not-finite`, `option`, `shape` - no rows
 *
 * @example
 * ```ts
 * import { Operator, recogniseMatrix } from "goodbasis";
 *
 * const floating = Operator.from([[1, Math.SQRT1_2], [Math.SQRT1_2, 1 / 3]]);
 * const proposal = recogniseMatrix(floating.csr);
 * if (proposal.kind === "proposal") console.log(proposal.operator.entry(0, 1).text()); // 1/sqrt(2)
 * ```
 */
export function recogniseMatrix(csr: Csr, options: RecogniseOptions = {}): OperatorProposal | NoOperatorProposal {
  requireSquareRows("recogniseMatrix", csr);
  requireOptions("recogniseMatrix", options, ["tolerance", "scale", "maxDenominator", "maxSquare"]);
  const scale = options.scale ?? Math.max(largest(csr.re), largest(csr.im ?? new Float64Array(0)));
  const triplets: ExactTriplet[] = [];
  const missed: UnknownEntry[] = [];
  let distance = 0;
  // matrices of the trade repeat few numbers
  const seen = new Map<number, ReturnType<typeof recognise>>();
  const part = (x: number): ReturnType<typeof recognise> => {
    if (!seen.has(x)) seen.set(x, recognise(x, { ...options, scale }));
    return seen.get(x);
  };
  for (let row = 0; row < csr.rows; row++) {
    for (let e = csr.ptr[row] as number; e < (csr.ptr[row + 1] as number); e++) {
      const [re, im] = [csr.re[e] as number, csr.im === undefined ? 0 : (csr.im[e] as number)];
      const [x, y] = [part(re), part(im)];
      const col = csr.col[e] as number;
      if (x === undefined || y === undefined) missed.push({ row, col, re, im });
      else {
        triplets.push([row, col, x.value.plus(y.value.times(Surd.i))]);
        distance = Math.max(distance, x.distance, y.distance);
      }
    }
  }
  if (missed.length > 0) return { kind: "none", entries: missed };
  return { kind: "proposal", operator: ExactOperator.fromTriplets(csr.rows, triplets), distance };
}

function largest(list: Float64Array): number {
  return list.reduce((most, x) => Math.max(most, Math.abs(x)), 0);
}
