import { modulus } from "../numerics/complex.js";
import { gamma, roundUp } from "../numerics/rounding.js";
import { euclidean, frobenius } from "../numerics/sparse.js";
import type { Operator } from "../operator/operator.js";
import { commutatorThreshold } from "./resolution.js";

/** Whether two operators commute to the stated resolution. */
export type CommutatorVerdict = "commutes" | "broken" | "undecided";

/** An element of a commutator, with its kets. */
export interface OffendingElement {
  /** Number of the row's ket. */
  readonly row: number;
  /** Number of the column's ket. */
  readonly column: number;
  /** Name of the row's ket. */
  readonly rowKet: string;
  /** Name of the column's ket. */
  readonly columnKet: string;
  /** Modulus of the element. */
  readonly size: number;
}

/** What is known of one commutator [A, B]. */
export interface CommutatorFinding {
  /** Name of A. */
  readonly left: string;
  /** Name of B. */
  readonly right: string;
  /** Whether [A, B] vanishes to the threshold. */
  readonly verdict: CommutatorVerdict;
  /** Frobenius norm as computed. */
  readonly norm: number;
  /** Rigorous upper bound on the 2-norm, rounding and entry uncertainty included. */
  readonly bound: number;
  /** Rigorous upper bound on the Frobenius norm. */
  readonly frobeniusBound: number;
  /** Rigorous lower bound on the 2-norm. */
  readonly atLeast: number;
  /** The bound must be at or below this to count as commuting. */
  readonly threshold: number;
  /** The largest elements, in descending order; empty where the operators commute. */
  readonly largest: readonly OffendingElement[];
  /**
   * Whether the commutator fails at the last kets only: the likely edge of a truncated space (the last rows of a product of
   * truncated oscillator matrices, say) rather than physics.
   */
  readonly edge: boolean;
}

const LARGEST_SHOWN = 3;

/** Failures among this share of the kets, the last ones, are pointed out as a likely edge. */
const EDGE_SHARE = 1 / 4;

/** Fewer kets than this are not taken for a truncated space. */
const SMALLEST_TRUNCATED = 8;

/**
 * Bounds a commutator from both sides and gives the verdict.
 *
 * The elements are computed with a radius each (rounding of the products and the entries' own uncertainty, see
 * {@link Operator}); ‖C‖₂ lies between the largest |c_ij| − r_ij and √(‖C‖₁‖C‖_∞) plus the same norm of the radii.
 *
 * @param resolution - the stated resolution for couplings; a commutator is held to {@link COMMUTATOR_SHARE} of it
 */
export function judgeCommutator(
  left: { readonly name: string; readonly operator: Operator },
  right: { readonly name: string; readonly operator: Operator },
  resolution: number,
  ket: (i: number) => string,
): CommutatorFinding {
  const commutator = left.operator.commutator(right.operator);
  const threshold = commutatorThreshold(left.operator, right.operator, resolution);
  const { csr } = commutator;
  const entries = csr.re.length;
  let atLeast = 0;
  const edgeFrom = csr.rows - Math.ceil(csr.rows * EDGE_SHARE);
  let outsideEdge = 0;
  let row = 0;
  for (let p = 0; p < entries; p++) {
    while (p >= (csr.ptr[row + 1] as number)) row++;
    // scaled where squares would overflow or vanish: a lost element must not pass for zero
    const element = modulus(csr.re[p] as number, csr.im === undefined ? 0 : (csr.im[p] as number));
    const radius = commutator.radius === undefined ? gamma(1) * element : (commutator.radius[p] as number);
    const low = element * (1 - 16 * gamma(1)) - radius;
    if (low > atLeast) atLeast = low;
    if (row < edgeFrom || (csr.col[p] as number) < edgeFrom) {
      outsideEdge = Math.max(outsideEdge, element + radius);
    }
  }
  const norm = frobenius(csr);
  const radii = commutator.radius === undefined ? gamma(2) * norm : euclidean(commutator.radius);
  const frobeniusBound = roundUp(norm + radii, entries + 16);
  const bound = Math.min(frobeniusBound, roundUp(commutator.norm + commutator.error));
  const verdict = bound <= threshold ? "commutes" : atLeast > threshold ? "broken" : "undecided";
  return {
    left: left.name,
    right: right.name,
    verdict,
    norm,
    bound,
    frobeniusBound,
    atLeast: Math.min(atLeast, bound),
    threshold,
    largest: verdict === "commutes" ? [] : largestElements(commutator, ket),
    edge: verdict === "broken" && csr.rows >= SMALLEST_TRUNCATED && outsideEdge <= threshold,
  };
}

function largestElements(operator: Operator, ket: (i: number) => string): OffendingElement[] {
  const { csr } = operator;
  const best: OffendingElement[] = [];
  for (let i = 0; i < csr.rows; i++) {
    for (let p = csr.ptr[i] as number; p < (csr.ptr[i + 1] as number); p++) {
      const size = modulus(csr.re[p] as number, csr.im === undefined ? 0 : (csr.im[p] as number));
      const last = best[best.length - 1];
      if (size === 0 || (best.length === LARGEST_SHOWN && last !== undefined && size <= last.size)) continue;
      const column = csr.col[p] as number;
      let at = best.length;
      while (at > 0 && (best[at - 1] as OffendingElement).size < size) at--;
      best.splice(at, 0, { row: i, column, rowKet: ket(i), columnKet: ket(column), size });
      if (best.length > LARGEST_SHOWN) best.pop();
    }
  }
  return best;
}
