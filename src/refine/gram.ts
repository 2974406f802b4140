import { gamma, roundUp } from "../numerics/rounding.js";

/**
 * Rigorous bound on ‖Q Q† − 1‖₂ for `count` vectors stored as dense rows, by its Frobenius norm.
 *
 * Each computed inner product of length n is in error by at most √2 γ_{n+2} Σ|a||b| ≤ √2 γ_{n+2} ‖a‖‖b‖ (complex products,
 * Higham ch. 3), which is added entry by entry.
 *
 * @param re - real parts, row-major `count` × `length`
 * @param im - imaginary parts; absent where all are zero
 */
export function orthonormalityDefect(
  count: number,
  length: number,
  re: Float64Array,
  im: Float64Array | undefined,
): number {
  const rounding = Math.SQRT2 * gamma(length + 4);
  let sum = 0;
  for (let a = 0; a < count; a++) {
    for (let b = 0; b <= a; b++) {
      let x = 0;
      let y = 0;
      const p = a * length;
      const q = b * length;
      if (im === undefined) {
        for (let k = 0; k < length; k++) x += (re[p + k] as number) * (re[q + k] as number);
      } else {
        for (let k = 0; k < length; k++) {
          const ar = re[p + k] as number;
          const ai = im[p + k] as number;
          const br = re[q + k] as number;
          const bi = im[q + k] as number;
          x += ar * br + ai * bi;
          y += ar * bi - ai * br;
        }
      }
      if (a === b) {
        // |x − 1| with the vector's own length as the scale of the rounding error
        const e = Math.abs(x - 1) + rounding * (x + rounding);
        sum += e * e;
      } else {
        const e = Math.sqrt(x * x + y * y) + rounding * 1.01;
        sum += 2 * e * e;
      }
    }
  }
  return roundUp(Math.sqrt(sum), count * count + 8);
}
