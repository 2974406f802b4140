import { rootOfUnity } from "../audit/root-of-unity.js";
import type { Csr } from "../numerics/csr.js";

/** The cycles of a monomial unitary matrix: where each index goes and with which phase. */
export interface Cycle {
  /** The indices of the cycle in the order in which the operator visits them. */
  readonly indices: Int32Array;
  /** Phase picked up on the step away from each index. */
  readonly phaseRe: Float64Array;
  readonly phaseIm: Float64Array;
}

/**
 * The cycle through `start` of a matrix with one entry per row and column, or undefined if the walk does not close within
 * `size` steps or an entry's modulus is not 1 to within `tolerance`.
 *
 * @param matrix - square; B_ij ≠ 0 says that index j goes to index i, so the walk follows columns: `image[j] = i`
 * @param image - row of the entry in each column
 * @param position - storage position of that entry
 */
export function cycleThrough(
  matrix: Csr,
  image: Int32Array,
  position: Int32Array,
  start: number,
  size: number,
  tolerance: number,
): Cycle | undefined {
  const indices = new Int32Array(size);
  const phaseRe = new Float64Array(size);
  const phaseIm = new Float64Array(size);
  let at = start;
  for (let step = 0; step < size; step++) {
    const p = position[at] as number;
    if (p < 0) return undefined;
    const re = matrix.re[p] as number;
    const im = matrix.im === undefined ? 0 : (matrix.im[p] as number);
    const modulus = Math.sqrt(re * re + im * im);
    if (Math.abs(modulus - 1) > tolerance) return undefined;
    indices[step] = at;
    const real = Math.abs(im) <= tolerance;
    const imaginary = Math.abs(re) <= tolerance;
    phaseRe[step] = real ? Math.sign(re) : imaginary ? 0 : re / modulus;
    phaseIm[step] = real ? 0 : imaginary ? Math.sign(im) : im / modulus;
    at = image[at] as number;
  }
  return at === start ? { indices, phaseRe, phaseIm } : undefined;
}

/** One eigenvector of a cycle, in the order of the cycle's indices. */
export interface CycleVector {
  readonly value: { readonly re: number; readonly im: number };
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/** The eigenvectors of one cycle. */
export interface CycleSolution {
  readonly vectors: readonly CycleVector[];
  /** Quarter turns of the phase product Φ where every step's phase is ±1 or ±i; otherwise undefined. */
  readonly turns: number | undefined;
}

/**
 * Eigenvalues and orthonormal eigenvectors of one cycle, in closed form.
 *
 * With A e_t = φ_t e_{t+1} around a cycle of length ℓ and Φ = Π φ_t, the eigenvalues are the ℓ-th roots λ of Φ, and the
 * components obey x_{t+1} = φ_t x_t / λ (projection on a cyclic group's characters; common practice).
 */
export function solveCycle(cycle: Cycle): CycleSolution {
  const length = cycle.indices.length;
  const pathRe = new Float64Array(length);
  const pathIm = new Float64Array(length);
  let re = 1;
  let im = 0;
  let plain = true;
  for (let t = 0; t < length; t++) {
    pathRe[t] = re;
    pathIm[t] = im;
    const pr = cycle.phaseRe[t] as number;
    const pi = cycle.phaseIm[t] as number;
    if (pr !== 0 && pi !== 0) plain = false;
    [re, im] = [re * pr - im * pi, re * pi + im * pr];
  }
  const turns = plain ? quarterTurns(re, im) : undefined;
  const scale = 1 / Math.sqrt(length);
  const vectors: CycleVector[] = [];
  for (let k = 0; k < length; k++) {
    const root = (power: number): { re: number; im: number } =>
      turns === undefined
        ? rotate(rootOfUnity(power * k, length), (power * Math.atan2(im, re)) / length)
        : rootOfUnity(power * (4 * k + turns), 4 * length);
    const xr = new Float64Array(length);
    const xi = new Float64Array(length);
    let real = true;
    for (let t = 0; t < length; t++) {
      const z = root(-t);
      const pr = pathRe[t] as number;
      const pi = pathIm[t] as number;
      xr[t] = scale * (z.re * pr - z.im * pi);
      const y = scale * (z.re * pi + z.im * pr);
      xi[t] = y;
      if (y !== 0) real = false;
    }
    vectors.push({ value: root(1), re: xr, im: real ? undefined : xi });
  }
  return { vectors, turns };
}

/** The quarter turns of a phase that is 1, i, −1 or −i. */
function quarterTurns(re: number, im: number): number {
  if (im === 0) return re > 0 ? 0 : 2;
  return im > 0 ? 1 : 3;
}

function rotate(z: { re: number; im: number }, angle: number): { re: number; im: number } {
  const c = Math.cos(angle);
  const s = Math.sin(angle);
  return { re: z.re * c - z.im * s, im: z.re * s + z.im * c };
}
