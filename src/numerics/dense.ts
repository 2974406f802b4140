/** A dense row-major matrix, real and imaginary parts apart; `im` absent for a real one. */
export interface Dense {
  /** Real parts, row-major. */
  readonly re: Float64Array;
  /** Imaginary parts, row-major; undefined for a real matrix. */
  readonly im: Float64Array | undefined;
}

/** Rows of B that are kept in cache while all rows of A pass over them. */
const DEPTH = 64;

/**
 * The product of two dense n × n row-major matrices, blocked over the inner index (common practice).
 *
 * Any real entry takes at most n roundings on its longest path, any complex one n + 1 (four-multiplication products).
 *
 * @param n - dimension
 * @param a - left factor
 * @param b - right factor
 */
export function multiplyDense(n: number, a: Dense, b: Dense): Dense {
  const re = new Float64Array(n * n);
  const complex = a.im !== undefined || b.im !== undefined;
  if (!complex) {
    realProduct(n, a.re, b.re, re);
    return { re, im: undefined };
  }
  const im = new Float64Array(n * n);
  if (a.im === undefined) {
    realProduct(n, a.re, b.re, re);
    if (b.im !== undefined) realProduct(n, a.re, b.im, im);
  } else if (b.im === undefined) {
    realProduct(n, a.re, b.re, re);
    realProduct(n, a.im, b.re, im);
  } else {
    complexProduct(n, a.re, a.im, b.re, b.im, re, im);
  }
  return { re, im };
}

/** out += A B. */
function realProduct(n: number, a: Float64Array, b: Float64Array, out: Float64Array): void {
  for (let k0 = 0; k0 < n; k0 += DEPTH) {
    const k1 = Math.min(n, k0 + DEPTH);
    for (let i = 0; i < n; i++) {
      const row = i * n;
      let k = k0;
      for (; k + 3 < k1; k += 4) {
        const x0 = a[row + k] as number;
        const x1 = a[row + k + 1] as number;
        const x2 = a[row + k + 2] as number;
        const x3 = a[row + k + 3] as number;
        const p0 = k * n;
        const p1 = p0 + n;
        const p2 = p1 + n;
        const p3 = p2 + n;
        for (let j = 0; j < n; j++) {
          const s = x0 * (b[p0 + j] as number) + x1 * (b[p1 + j] as number);
          const t = x2 * (b[p2 + j] as number) + x3 * (b[p3 + j] as number);
          out[row + j] = (out[row + j] as number) + (s + t);
        }
      }
      for (; k < k1; k++) {
        const x = a[row + k] as number;
        const p = k * n;
        for (let j = 0; j < n; j++) out[row + j] = (out[row + j] as number) + x * (b[p + j] as number);
      }
    }
  }
}

function complexProduct(
  n: number,
  aRe: Float64Array,
  aIm: Float64Array,
  bRe: Float64Array,
  bIm: Float64Array,
  re: Float64Array,
  im: Float64Array,
): void {
  for (let k0 = 0; k0 < n; k0 += DEPTH) {
    const k1 = Math.min(n, k0 + DEPTH);
    for (let i = 0; i < n; i++) {
      const row = i * n;
      for (let k = k0; k < k1; k++) {
        const x = aRe[row + k] as number;
        const y = aIm[row + k] as number;
        const p = k * n;
        for (let j = 0; j < n; j++) {
          const u = bRe[p + j] as number;
          const v = bIm[p + j] as number;
          re[row + j] = (re[row + j] as number) + (x * u - y * v);
          im[row + j] = (im[row + j] as number) + (x * v + y * u);
        }
      }
    }
  }
}
