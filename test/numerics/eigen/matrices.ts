import type { HermitianEigen } from "../../../src/numerics/eigen.js";

/** A full Hermitian matrix of a test, row by row. */
export interface Sample {
  readonly n: number;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

export const U: number = 2 ** -53;

/** Uniform numbers in [−1/2, 1/2), by the seed (mulberry32, a value from memory). */
export function generator(seed: number): () => number {
  let state = seed >>> 0;
  return () => {
    state = (state + 0x6d2b79f5) >>> 0;
    let t = state;
    t = Math.imul(t ^ (t >>> 15), t | 1);
    t ^= t + Math.imul(t ^ (t >>> 7), t | 61);
    return ((t ^ (t >>> 14)) >>> 0) / 2 ** 32 - 0.5;
  };
}

/** A matrix from a rule for the lower triangle. */
export function sample(n: number, complex: boolean, entry: (i: number, j: number) => [number, number]): Sample {
  const re = new Float64Array(n * n);
  const im = complex ? new Float64Array(n * n) : undefined;
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const [x, y] = entry(i, j);
      re[i * n + j] = x;
      re[j * n + i] = x;
      if (im !== undefined && i !== j) {
        im[i * n + j] = y;
        im[j * n + i] = -y;
      }
    }
  }
  return { n, re, im };
}

export function randomSample(n: number, complex: boolean, seed: number): Sample {
  const random = generator(seed);
  return sample(n, complex, () => [random(), random()]);
}

/** Q diag(values) Q† with Q a product of n random reflectors. */
export function withSpectrum(values: readonly number[], complex: boolean, seed: number): Sample {
  const n = values.length;
  const diagonal = sample(n, complex, (i, j) => [i === j ? (values[i] as number) : 0, 0]);
  return conjugated(diagonal, n, seed);
}

/** The same matrix in another basis: `times` random reflectors from both sides. */
export function conjugated(of: Sample, times: number, seed: number): Sample {
  const { n } = of;
  const random = generator(seed);
  const re = of.re.slice();
  const im = of.im?.slice() ?? new Float64Array(n * n);
  const complex = of.im !== undefined;
  const vr = new Float64Array(n);
  const vi = new Float64Array(n);
  const yr = new Float64Array(n);
  const yi = new Float64Array(n);
  for (let t = 0; t < times; t++) {
    let square = 0;
    for (let i = 0; i < n; i++) {
      vr[i] = random();
      vi[i] = complex ? random() : 0;
      square += (vr[i] as number) ** 2 + (vi[i] as number) ** 2;
    }
    const unit = 1 / Math.sqrt(square);
    for (let i = 0; i < n; i++) {
      vr[i] = (vr[i] as number) * unit;
      vi[i] = (vi[i] as number) * unit;
    }
    // A ← A − 2 v (y − c v)† − 2 (y − c v) v† with y = A v, c = v† A v.
    let c = 0;
    for (let i = 0; i < n; i++) {
      let a = 0;
      let b = 0;
      for (let j = 0; j < n; j++) {
        const p = re[i * n + j] as number;
        const q = im[i * n + j] as number;
        a += p * (vr[j] as number) - q * (vi[j] as number);
        b += p * (vi[j] as number) + q * (vr[j] as number);
      }
      yr[i] = a;
      yi[i] = b;
      c += a * (vr[i] as number) + b * (vi[i] as number);
    }
    for (let i = 0; i < n; i++) {
      for (let j = 0; j <= i; j++) {
        const [a, b, d, e] = [vr[i], vi[i], vr[j], vi[j]] as [number, number, number, number];
        const f = (yr[i] as number) - c * a;
        const g = (yi[i] as number) - c * b;
        const h = (yr[j] as number) - c * d;
        const k = (yi[j] as number) - c * e;
        const x = (re[i * n + j] as number) - 2 * (a * h + b * k + f * d + g * e);
        const y = i === j ? 0 : (im[i * n + j] as number) - 2 * (b * h - a * k + g * d - f * e);
        re[i * n + j] = x;
        re[j * n + i] = x;
        im[i * n + j] = y;
        im[j * n + i] = -y;
      }
    }
  }
  return { n, re, im: complex ? im : undefined };
}

/**
 * Frobenius norms in units of n u: of A Q − Q Λ beside the largest |eigenvalue|, and of Q† Q − 1; of the columns `which`
 * of both where given.
 */
export function quality(
  of: Sample,
  found: HermitianEigen,
  which?: readonly number[],
): { residual: number; orthogonality: number } {
  const { n, re, im } = of;
  const norm = Math.max(Math.abs(found.values[0] ?? 0), Math.abs(found.values[n - 1] ?? 0)) || 1;
  const a = re.map((x) => x / norm);
  const b = im?.map((x) => x / norm) ?? new Float64Array(n * n);
  const vr = found.re;
  const vi = found.im ?? new Float64Array(n * n);
  let residual = 0;
  let orthogonality = 0;
  for (const k of which ?? found.values.keys()) {
    const value = (found.values[k] as number) / norm;
    for (let i = 0; i < n; i++) {
      let s = -value * (vr[k * n + i] as number);
      let t = -value * (vi[k * n + i] as number);
      let p = i === k ? -1 : 0;
      let q = 0;
      for (let j = 0; j < n; j++) {
        const x = vr[k * n + j] as number;
        const y = vi[k * n + j] as number;
        s += (a[i * n + j] as number) * x - (b[i * n + j] as number) * y;
        t += (a[i * n + j] as number) * y + (b[i * n + j] as number) * x;
        p += (vr[i * n + j] as number) * x + (vi[i * n + j] as number) * y;
        q += (vr[i * n + j] as number) * y - (vi[i * n + j] as number) * x;
      }
      residual += s * s + t * t;
      orthogonality += p * p + q * q;
    }
  }
  return { residual: Math.sqrt(residual) / (n * U), orthogonality: Math.sqrt(orthogonality) / (n * U) };
}
