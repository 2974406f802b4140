/** A complex number. */
export interface Complex {
  /** Real part. */
  readonly re: number;
  /** Imaginary part. */
  readonly im: number;
}

/** A real number, or a complex one as `{ re, im }`. */
export type Scalar = number | Complex;

/** Whether a value is a number, or an object with two numbers `re` and `im`. */
export function isScalar(value: unknown): value is Scalar {
  if (typeof value === "number") return true;
  if (typeof value !== "object" || value === null || !("re" in value) || !("im" in value)) return false;
  return typeof value.re === "number" && typeof value.im === "number";
}

/** The real part of a scalar. */
export function realPart(value: Scalar): number {
  return typeof value === "number" ? value : value.re;
}

/** The imaginary part of a scalar. */
export function imaginaryPart(value: Scalar): number {
  return typeof value === "number" ? 0 : value.im;
}

/**
 * The modulus √(re² + im²), safe against overflow and underflow.
 *
 * Relative error at most 8 units roundoff (plus half the smallest positive number): two products, a sum and a square root,
 * and where the squares leave the range one scaling more.
 */
export function modulus(re: number, im: number): number {
  const square = re * re + im * im;
  if (square > 1e-290 && square < 1e300) return Math.sqrt(square);
  const x = Math.abs(re);
  const y = Math.abs(im);
  const large = Math.max(x, y);
  if (large === 0 || large === Number.POSITIVE_INFINITY) return large;
  const a = x / large;
  const b = y / large;
  return large * Math.sqrt(a * a + b * b);
}
