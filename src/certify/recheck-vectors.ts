import type { Csr } from "../numerics/csr.js";
import type { Certificate } from "./certificate-format.js";

/** All vectors of a certificate, one after the other, and which of them touch each ket. */
export interface Vectors {
  /** Number of kets. */
  readonly n: number;
  /** Number of vectors. */
  readonly count: number;
  /** Vector s holds the entries `ptr[s] .. ptr[s + 1] − 1`. */
  readonly ptr: Int32Array;
  readonly ket: Int32Array;
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly complex: boolean;
  /** First vector of each level, and the number of vectors at the end. */
  readonly first: readonly number[];
  /** Level of each vector. */
  readonly level: Int32Array;
  /** Whether a vector is a single ket with coefficient ±1, so that its products round nothing. */
  readonly unit: Uint8Array;
  /** Ket i is touched by the entries `byKet[i] .. byKet[i + 1] − 1` of the three lists below, vectors ascending. */
  readonly byKet: Int32Array;
  readonly vector: Int32Array;
  readonly byRe: Float64Array;
  readonly byIm: Float64Array;
}

/** Gathers the vectors of all levels. */
export function gatherVectors({ n, levels }: Certificate): Vectors {
  const first = [0];
  let count = 0;
  let total = 0;
  let complex = false;
  for (const level of levels) {
    count += level.states.length;
    first.push(count);
    for (const { vector } of level.states) {
      total += vector.kets.length;
      if (vector.im !== undefined) complex = true;
    }
  }
  const ptr = new Int32Array(count + 1);
  const ket = new Int32Array(total);
  const re = new Float64Array(total);
  const im = new Float64Array(total);
  const level = new Int32Array(count);
  const unit = new Uint8Array(count);
  const byKet = new Int32Array(n + 1);
  let s = 0;
  let at = 0;
  levels.forEach(({ states }, l) => {
    for (const { vector } of states) {
      const { kets } = vector;
      for (let k = 0; k < kets.length; k++) {
        const i = kets[k] as number;
        ket[at] = i;
        re[at] = vector.re[k] as number;
        im[at] = vector.im === undefined ? 0 : (vector.im[k] as number);
        byKet[i + 1] = (byKet[i + 1] as number) + 1;
        at++;
      }
      if (kets.length === 1 && vector.im === undefined && Math.abs(vector.re[0] as number) === 1) unit[s] = 1;
      level[s] = l;
      s++;
      ptr[s] = at;
    }
  });
  for (let i = 0; i < n; i++) byKet[i + 1] = (byKet[i + 1] as number) + (byKet[i] as number);
  const next = byKet.slice(0, n);
  const vector = new Int32Array(total);
  const byRe = new Float64Array(total);
  const byIm = new Float64Array(total);
  for (let t = 0; t < count; t++) {
    for (let p = ptr[t] as number; p < (ptr[t + 1] as number); p++) {
      const i = ket[p] as number;
      const e = next[i] as number;
      next[i] = e + 1;
      vector[e] = t;
      byRe[e] = re[p] as number;
      byIm[e] = im[p] as number;
    }
  }
  return { n, count, ptr, ket, re, im, complex, first, level, unit, byKet, vector, byRe, byIm };
}

/** A matrix by columns: what multiplies a sparse vector. */
export interface Columns {
  /** Column k holds the entries `ptr[k] .. ptr[k + 1] − 1`. */
  readonly ptr: Int32Array;
  readonly row: Int32Array;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
  /** Largest number of entries in a row: the longest sum of a product. */
  readonly longest: number;
}

/** The columns of A. */
export function columnsOf(a: Csr): Columns {
  const ptr = new Int32Array(a.cols + 1);
  for (let e = 0; e < a.col.length; e++) {
    const c = a.col[e] as number;
    ptr[c + 1] = (ptr[c + 1] as number) + 1;
  }
  for (let c = 0; c < a.cols; c++) ptr[c + 1] = (ptr[c + 1] as number) + (ptr[c] as number);
  const next = ptr.slice(0, a.cols);
  const row = new Int32Array(a.col.length);
  const re = new Float64Array(a.col.length);
  const im = a.im === undefined ? undefined : new Float64Array(a.col.length);
  let longest = 0;
  for (let r = 0; r < a.rows; r++) {
    const from = a.ptr[r] as number;
    const to = a.ptr[r + 1] as number;
    longest = Math.max(longest, to - from);
    for (let e = from; e < to; e++) {
      const c = a.col[e] as number;
      const f = next[c] as number;
      next[c] = f + 1;
      row[f] = r;
      re[f] = a.re[e] as number;
      if (im !== undefined && a.im !== undefined) im[f] = a.im[e] as number;
    }
  }
  return { ptr, row, re, im, longest };
}

/** The columns of A†: the rows of A, conjugated. */
export function adjointColumnsOf(a: Csr): Columns {
  const counts = new Int32Array(a.cols);
  let longest = 0;
  for (let e = 0; e < a.col.length; e++) {
    const c = a.col[e] as number;
    counts[c] = (counts[c] as number) + 1;
    longest = Math.max(longest, counts[c] as number);
  }
  return { ptr: a.ptr, row: a.col, re: a.re, im: a.im?.map((y) => -y), longest };
}

/** Room for one image and its products with many vectors. */
export class Bench {
  readonly #vectors: Vectors;
  /** The image, by ket; valid at the kets touched. */
  readonly yRe: Float64Array;
  readonly yIm: Float64Array;
  readonly #mark: Int32Array;
  readonly #kets: Int32Array;
  #touched = 0;
  #stamp = 0;
  /** Products q†y, by vector; valid at the vectors met. */
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly #seen: Int32Array;
  /** The vectors met, in the order of meeting: the first `met` places. */
  readonly partners: Int32Array;
  met = 0;

  constructor(vectors: Vectors) {
    const { n, count } = vectors;
    this.#vectors = vectors;
    this.yRe = new Float64Array(n);
    this.yIm = new Float64Array(n);
    this.#mark = new Int32Array(n);
    this.#kets = new Int32Array(n);
    this.re = new Float64Array(count);
    this.im = new Float64Array(count);
    this.#seen = new Int32Array(count);
    this.partners = new Int32Array(count);
  }

  /** Number of kets that the image touches. */
  get touched(): number {
    return this.#touched;
  }

  /** Forgets the last image. */
  clear(): void {
    this.#stamp++;
    this.#touched = 0;
    this.met = 0;
  }

  #touch(i: number): void {
    if (this.#mark[i] === this.#stamp) return;
    this.#mark[i] = this.#stamp;
    this.#kets[this.#touched++] = i;
    this.yRe[i] = 0;
    this.yIm[i] = 0;
  }

  /** y = q_s. */
  take(s: number): void {
    this.clear();
    this.add(s, 1, 0);
  }

  /** y += (a + ib) q_s. */
  add(s: number, a: number, b: number): void {
    const { ptr, ket, re, im } = this.#vectors;
    const { yRe, yIm } = this;
    for (let p = ptr[s] as number; p < (ptr[s + 1] as number); p++) {
      const i = ket[p] as number;
      const x = re[p] as number;
      const y = im[p] as number;
      this.#touch(i);
      yRe[i] = (yRe[i] as number) + (a * x - b * y);
      yIm[i] = (yIm[i] as number) + (a * y + b * x);
    }
  }

  /** y = A q_s. */
  image(columns: Columns, s: number): void {
    this.clear();
    const { ptr, ket, re, im, complex } = this.#vectors;
    const { yRe, yIm } = this;
    const plain = !complex && columns.im === undefined;
    for (let p = ptr[s] as number; p < (ptr[s + 1] as number); p++) {
      const k = ket[p] as number;
      const x = re[p] as number;
      const y = im[p] as number;
      const end = columns.ptr[k + 1] as number;
      for (let e = columns.ptr[k] as number; e < end; e++) {
        const i = columns.row[e] as number;
        this.#touch(i);
        const a = columns.re[e] as number;
        if (plain) {
          yRe[i] = (yRe[i] as number) + a * x;
          continue;
        }
        const b = columns.im === undefined ? 0 : (columns.im[e] as number);
        yRe[i] = (yRe[i] as number) + (a * x - b * y);
        yIm[i] = (yIm[i] as number) + (a * y + b * x);
      }
    }
  }

  /** Products q_c† y with the vectors from .. to − 1 that share a ket with y. */
  project(from: number, to: number, realImage = false): void {
    const { byKet, vector, byRe, byIm, complex } = this.#vectors;
    const { yRe, yIm, re, im, partners } = this;
    const plain = !complex && realImage;
    this.met = 0;
    const stamp = this.#stamp;
    const seen = this.#seen;
    for (let t = 0; t < this.#touched; t++) {
      const i = this.#kets[t] as number;
      const u = yRe[i] as number;
      const v = yIm[i] as number;
      const end = byKet[i + 1] as number;
      for (let e = lowest(vector, byKet[i] as number, end, from); e < end; e++) {
        const c = vector[e] as number;
        if (c >= to) break;
        if (seen[c] !== stamp) {
          seen[c] = stamp;
          partners[this.met++] = c;
          re[c] = 0;
          im[c] = 0;
        }
        const x = byRe[e] as number;
        if (plain) {
          re[c] = (re[c] as number) + x * u;
          continue;
        }
        const y = byIm[e] as number;
        re[c] = (re[c] as number) + (x * u + y * v);
        im[c] = (im[c] as number) + (x * v - y * u);
      }
    }
  }

  /** ‖y − (a + ib) q_s‖; the image is changed to that difference. */
  residual(s: number, a: number, b: number): number {
    this.add(s, -a, -b);
    let sum = 0;
    for (let t = 0; t < this.#touched; t++) {
      const i = this.#kets[t] as number;
      const x = this.yRe[i] as number;
      const y = this.yIm[i] as number;
      sum += x * x + y * y;
    }
    return Math.sqrt(sum);
  }
}

/** First place from `low` on whose entry is at least `least`. */
function lowest(list: Int32Array, low: number, high: number, least: number): number {
  let a = low;
  let b = high;
  while (a < b) {
    const middle = (a + b) >> 1;
    if ((list[middle] as number) < least) a = middle + 1;
    else b = middle;
  }
  return a;
}

/** |x + iy|; squares only where none can be lost. */
export function modulusOf(x: number, y: number): number {
  if (y === 0) return Math.abs(x);
  const square = x * x + y * y;
  return square > 1e-280 && square < 1e280 ? Math.sqrt(square) : Math.hypot(x, y);
}
