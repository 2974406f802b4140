import { ExactOperator } from "../exact/operator.js";
import type { RecogniseOptions } from "../exact/recognise.js";
import { type NoOperatorProposal, recogniseMatrix } from "../exact/recognise-matrix.js";
import { Surd } from "../exact/surd.js";
import { requireOptions } from "../misuse.js";
import { valueAt } from "../numerics/sparse.js";
import type { MatrixInput } from "./input.js";
import { Operator } from "./operator.js";
import { type Radius, radiusAt } from "./radius.js";

/** An entry for which a number was proposed that is not the very double. */
export interface ProposedEntry {
  /** Row, 0-based. */
  readonly row: number;
  /** Column, 0-based. */
  readonly col: number;
  /** What is proposed; zero for an entry of rounding size. */
  readonly value: Surd;
  /** The modulus of the change, rounded up. */
  readonly distance: number;
  /** Whether the change is within the radius of the entry, so that the given matrix may have meant it. */
  readonly withinRadius: boolean;
}

/** An operator with exact entries that a floating one may stand for: a guess, for whoever knows the matrix to confirm. */
export interface ProposedOperator {
  /** Says what it is. */
  readonly kind: "proposal";
  /** The operator of the proposed entries, with its exact companion. */
  readonly operator: Operator;
  /** The entries that were changed, row by row. */
  readonly changes: readonly ProposedEntry[];
  /** The largest change, rounded up. */
  readonly distance: number;
}

/**
 * Proposes fractions and square roots of fractions for the entries of a floating operator. Nothing is proved by it: what is
 * computed from the proposal holds for the proposed matrix.
 *
 * @param input - the operator; entries of rounding size come out as zero
 * @param options - what counts as a hit
 * @returns a new operator, with the changes made; or the entries for which no number, or more than one, was found
 * @throws GoodBasisError `option`; what {@link Operator.from} throws
 *
 * @example
 * ```ts
 * import { recogniseOperator } from "goodbasis";
 *
 * const found = recogniseOperator([[1, 0.816496580927726], [0.816496580927726, 0.3333333333333333]]);
 * if (found.kind === "proposal") console.log(found.operator.exact?.entry(0, 1).text(), found.changes.length); // sqrt(2/3) 3
 * ```
 */
export function recogniseOperator(
  input: MatrixInput,
  options: RecogniseOptions = {},
): ProposedOperator | NoOperatorProposal {
  requireOptions("recogniseOperator", options, ["tolerance", "scale", "maxDenominator", "maxSquare"]);
  const given = Operator.from(input);
  const found = recogniseMatrix(given.csr, options);
  if (found.kind === "none") return found;
  const radius: Radius = given.isExact ? "exact" : (given.radius ?? "default");
  const changes: ProposedEntry[] = [];
  for (const { row, col } of ExactOperator.fromFloating(given.csr).elements()) {
    const value = found.operator.entry(row, col);
    const { re, im } = valueAt(given.csr, row, col);
    const square = value.minus(Surd.from({ re, im })).squaredModulus();
    if (square.isZero) continue;
    const allowed = Surd.from(radiusAt({ csr: given.csr, radius }, placeOf(given, row, col)));
    const withinRadius = square.compare(allowed.times(allowed)) <= 0;
    changes.push({ row, col, value, distance: rootAbove(square), withinRadius });
  }
  const distance = changes.reduce((most, change) => Math.max(most, change.distance), 0);
  return { kind: "proposal", operator: Operator.from(found.operator), changes, distance };
}

function placeOf({ csr }: Operator, row: number, col: number): number {
  let e = csr.ptr[row] as number;
  while (csr.col[e] !== col) e++;
  return e;
}

/** A double at or above the square root of a number ≥ 0: two roundings of half a unit, and one more for the safe side. */
function rootAbove(square: Surd): number {
  return Math.sqrt(square.enclosure()[1]) * (1 + 2 ** -51) + Number.MIN_VALUE;
}
