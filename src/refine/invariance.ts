import { LABEL_WIDTH } from "../audit/resolution.js";
import type { Csr } from "../numerics/csr.js";
import { conjugate, frobenius, multiply, transpose } from "../numerics/sparse.js";
import { images } from "../operator/images.js";
import type { Operator } from "../operator/operator.js";

/** Whether an operator maps a subspace into itself, and its matrix there. */
export interface Invariance {
  readonly invariant: boolean;
  /** ⟨i|A|j⟩ over the vectors of the subspace. */
  readonly matrix: Csr;
}

/**
 * Whether a normal operator maps the span of a frame into itself, as far as rounding shows.
 *
 * ‖A F†‖² = ‖F A F†‖² + ‖(1 − F†F) A F†‖² in the Frobenius norm for orthonormal rows F. The answer decides only whether a
 * refinement is attempted: its residuals are bounded afterwards on the vectors themselves.
 *
 * @param frame - orthonormal vectors as rows over the kets
 */
export function invariance(frame: Csr, operator: Operator): Invariance {
  const rows = images(frame, operator);
  const matrix = multiply(conjugate(frame), transpose(rows));
  const all = frobenius(rows);
  const inside = frobenius(matrix);
  const leak = Math.sqrt(Math.max(0, all - inside)) * Math.sqrt(all + inside);
  // the difference of squares loses half the digits; 2^−18 of the norm is well above that and well below any real leak
  return { invariant: leak <= Math.sqrt(LABEL_WIDTH) * operator.norm, matrix };
}
