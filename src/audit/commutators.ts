import { gamma, roundUp } from "../numerics/rounding.js";
import type { Operator } from "../operator/operator.js";
import { COMMUTATOR_SHARE } from "./resolution.js";

/** Whether two operators commute to the stated resolution. */
export type CommutatorVerdict = "commutes" | "broken" | "undecided";

/** An element of a commutator, with its kets. */
export interface OffendingElement {
  readonly row: number;
  readonly column: number;
  readonly rowKet: string;
  readonly columnKet: string;
  /** Modulus of the element. */
  readonly size: number;
}

/** What is known of one commutator [A, B]. */
export interface CommutatorFinding {
  readonly left: string;
  readonly right: string;
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
}

const LARGEST_SHOWN = 3;

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
  const scale = left.operator.norm * right.operator.norm;
  const threshold = resolution * COMMUTATOR_SHARE * scale;
  const { csr } = commutator;
  const entries = csr.re.length;
  let sum = 0;
  let radii = 0;
  let atLeast = 0;
  for (let p = 0; p < entries; p++) {
    const x = csr.re[p] as number;
    const y = csr.im === undefined ? 0 : (csr.im[p] as number);
    const square = x * x + y * y;
    const radius = commutator.radius === undefined ? gamma(1) * Math.sqrt(square) : (commutator.radius[p] as number);
    sum += square;
    radii += radius * radius;
    const low = Math.sqrt(square) * (1 - 4 * gamma(1)) - radius;
    if (low > atLeast) atLeast = low;
  }
  const norm = Math.sqrt(sum);
  const frobeniusBound = roundUp(norm + Math.sqrt(radii), entries + 8);
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
  };
}

function largestElements(operator: Operator, ket: (i: number) => string): OffendingElement[] {
  const { csr } = operator;
  const best: OffendingElement[] = [];
  for (let i = 0; i < csr.rows; i++) {
    for (let p = csr.ptr[i] as number; p < (csr.ptr[i + 1] as number); p++) {
      const x = csr.re[p] as number;
      const y = csr.im === undefined ? 0 : (csr.im[p] as number);
      const size = Math.sqrt(x * x + y * y);
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
