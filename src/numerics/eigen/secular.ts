import { GoodBasisError } from "../../errors.js";
import { UNIT_ROUNDOFF } from "../rounding.js";

/**
 * Steps allowed for one root; from step {@link BISECT_FROM} on every second one halves the bracket, which settles it.
 */
const MAX_STEPS = 400;
const BISECT_FROM = 16;

/**
 * Root j of the secular equation 1 + Σ_i w_i / (d_i − λ) = 0, between d_j and d_{j+1} (the last: between d_{K−1} and
 * d_{K−1} + Σ w_i).
 *
 * The origin is moved to the nearer pole, so that every difference d_i − λ comes out to high relative accuracy; each
 * step fits the two halves of the sum by one pole each, inside a shrinking bracket, which is halved where
 * the fit leads out of it.
 * Source: Bunch, Nielsen and Sorensen, Numer. Math. 31, 31 (1978); choice of origin and first guess: Li, LAPACK Working
 * Note 89 (1994).
 *
 * @param count - number K of poles
 * @param j - index of the root, ascending
 * @param poles - K poles d_i, strictly ascending
 * @param weights - K positive weights w_i
 * @param total - Σ w_i
 * @param gaps - receives the K differences d_i − λ from index `at` on
 * @param at - where they start
 * @returns λ, rounded
 * @throws GoodBasisError `no-convergence` when the bracket has not settled after {@link MAX_STEPS} steps
 */
export function secularRoot(
  count: number,
  j: number,
  poles: Float64Array,
  weights: Float64Array,
  total: number,
  gaps: Float64Array,
  at: number,
): number {
  if (count === 1) {
    gaps[at] = -(weights[0] as number);
    return (poles[0] as number) + (weights[0] as number);
  }
  const last = j === count - 1;
  // Poles before `split` make the first half of the sum, fitted by the pole left of it; the rest by the pole at it.
  const split = last ? count - 1 : j + 1;
  let origin = poles[j] as number;
  const width = last ? total : (poles[j + 1] as number) - origin;
  shiftPoles(count, poles, origin, gaps, at);
  let low = 0;
  let high = width;
  let eta = 0.5 * width;
  for (let step = 0; step < MAX_STEPS; step++) {
    let psi = 0;
    let psiSlope = 0;
    for (let i = 0; i < split; i++) {
      const inverse = 1 / ((gaps[at + i] as number) - eta);
      const term = (weights[i] as number) * inverse;
      psi += term;
      psiSlope += term * inverse;
    }
    let phi = 0;
    let phiSlope = 0;
    for (let i = split; i < count; i++) {
      const inverse = 1 / ((gaps[at + i] as number) - eta);
      const term = (weights[i] as number) * inverse;
      phi += term;
      phiSlope += term * inverse;
    }
    const value = 1 + psi + phi;
    const slope = psiSlope + phiSlope;
    if (step === 0 && !last && value <= 0) {
      origin = poles[j + 1] as number;
      shiftPoles(count, poles, origin, gaps, at);
      eta = -0.5 * width;
      low = eta;
      high = 0;
    } else if (value > 0) high = eta;
    else low = eta;
    const noise = 8 * (Math.abs(psi) + Math.abs(phi)) + 2 + Math.abs(eta) * slope;
    if (step > 0 && Math.abs(value) <= 2 * UNIT_ROUNDOFF * noise) return settle(count, gaps, at, origin, eta);

    const left = (gaps[at + split - 1] as number) - eta;
    const right = (gaps[at + split] as number) - eta;
    let a: number;
    let c: number;
    if (step === 0) {
      const wLeft = weights[split - 1] as number;
      const wRight = weights[split] as number;
      c = value - wLeft / left - wRight / right;
      a = c * (left + right) + wLeft + wRight;
    } else {
      c = value - psiSlope * left - phiSlope * right;
      a = (left + right) * value - left * right * slope;
    }
    let next = eta + nearerRoot(a, left * right * value, c, last);
    if (!(next > low && next < high) || (step >= BISECT_FROM && step % 2 === 0)) next = 0.5 * (low + high);
    if (next === low || next === high) return settle(count, gaps, at, origin, eta);
    const moved = Math.abs(next - eta);
    eta = next;
    if (moved <= 2 * UNIT_ROUNDOFF * Math.abs(eta)) return settle(count, gaps, at, origin, eta);
  }
  throw new GoodBasisError(
    "no-convergence",
    `secularRoot: root ${j} of ${count} did not settle in ${MAX_STEPS} steps; ` +
      "check the matrix for entries that overflow",
    { index: j, size: count },
  );
}

function shiftPoles(count: number, poles: Float64Array, origin: number, gaps: Float64Array, at: number): void {
  for (let i = 0; i < count; i++) gaps[at + i] = (poles[i] as number) - origin;
}

function settle(count: number, gaps: Float64Array, at: number, origin: number, eta: number): number {
  for (let i = 0; i < count; i++) gaps[at + i] = (gaps[at + i] as number) - eta;
  return origin + eta;
}

/**
 * The root of c x² − a x + b = 0 that lies between the two poles, or beyond both for the last one; without
 * cancellation.
 */
function nearerRoot(a: number, b: number, c: number, last: boolean): number {
  const root = Math.sqrt(Math.abs(a * a - 4 * b * c));
  if (last) return a >= 0 ? (c === 0 ? b / a : (a + root) / (2 * c)) : (2 * b) / (a - root);
  return a <= 0 ? (c === 0 ? b / a : (a - root) / (2 * c)) : (2 * b) / (a + root);
}

/**
 * The vector z for which the computed roots are the exact ones: z_i² = Π_j (λ_j − d_i) / Π_{j≠i} (d_j − d_i), one
 * factor a root. With it, eigenvectors from Löwner's formula are orthogonal to roundoff however close the roots lie.
 *
 * Source: Gu and Eisenstat, SIAM J. Matrix Anal. Appl. 16, 172 (1995), after Löwner, Math. Z. 38, 177 (1934).
 *
 * @param count - number K of poles
 * @param poles - K poles d_i, strictly ascending
 * @param gaps - K × K: row j holds d_i − λ_j
 * @param z - on entry only the signs count; on return the recomputed components
 */
export function recomputeWeights(count: number, poles: Float64Array, gaps: Float64Array, z: Float64Array): void {
  const product = z.slice(0, count);
  for (let i = 0; i < count; i++) product[i] = 1;
  for (let j = 0; j < count; j++) {
    const row = j * count;
    const pole = poles[j] as number;
    for (let i = 0; i < j; i++) {
      product[i] = (product[i] as number) * ((gaps[row + i] as number) / ((poles[i] as number) - pole));
    }
    product[j] = (product[j] as number) * (gaps[row + j] as number);
    for (let i = j + 1; i < count; i++) {
      product[i] = (product[i] as number) * ((gaps[row + i] as number) / ((poles[i] as number) - pole));
    }
  }
  for (let i = 0; i < count; i++) {
    const size = Math.sqrt(Math.abs(product[i] as number));
    z[i] = (z[i] as number) < 0 ? -size : size;
  }
}
