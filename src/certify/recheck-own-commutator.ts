import type { Csr } from "../numerics/csr.js";
import { gamma, roundUp } from "../numerics/rounding.js";
import type { Operator } from "../operator/operator.js";

/** What the re-check finds of one commutator. */
export interface OwnCommutator {
  readonly norm: number;
  /** Norm of all element radii together. */
  readonly radius: number;
  readonly bound: number;
  readonly frobeniusBound: number;
  /** The parts of both bounds that are no rounding. */
  readonly certain: number;
  readonly frobeniusCertain: number;
  /** Largest element plus its radius: no lower bound by elements is higher. */
  readonly most: number;
  /** Largest element minus its radius. */
  readonly atLeast: number;
}

/**
 * AB − BA, element by element with a radius each: entry uncertainties, and the rounding of the sums (Higham, Accuracy and
 * Stability of Numerical Algorithms, ch. 3) unless all numbers are dyadic and fit 53 bits.
 */
export function ownCommutator(a: Operator, b: Operator): OwnCommutator {
  const tally = new Tally(a.n);
  if (a === b) return tally.finish();
  const left = onDiagonal(a.csr);
  const right = onDiagonal(b.csr);
  if (left) diagonalRows(a, b, tally);
  else if (right) diagonalRows(b, a, tally);
  else generalRows(a, b, tally);
  return tally.finish();
}

/** Collects the elements of one row and the norms of all. */
class Tally {
  readonly #n: number;
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly radius: Float64Array;
  readonly size: Float64Array;
  readonly #mark: Int32Array;
  readonly #list: Int32Array;
  #count = 0;
  #row = 0;
  readonly #columns: Float64Array;
  readonly #columnRadii: Float64Array;
  #entries = 0;
  #sum = 0;
  #radii = 0;
  #rounding = 0;
  #uncertain = 0;
  #rows = 0;
  #rowRadii = 0;
  #most = 0;
  #atLeast = 0;

  constructor(n: number) {
    this.#n = n;
    this.re = new Float64Array(n);
    this.im = new Float64Array(n);
    this.radius = new Float64Array(n);
    this.size = new Float64Array(n);
    this.#mark = new Int32Array(n);
    this.#list = new Int32Array(n);
    this.#columns = new Float64Array(n);
    this.#columnRadii = new Float64Array(n);
  }

  open(): void {
    this.#row++;
    this.#count = 0;
  }

  touch(j: number): void {
    if (this.#mark[j] === this.#row) return;
    this.#mark[j] = this.#row;
    this.#list[this.#count++] = j;
    this.re[j] = 0;
    this.im[j] = 0;
    this.radius[j] = 0;
    this.size[j] = 0;
  }

  /** Ends a row; `rounding` is relative to the sum of moduli. */
  close(rounding: number): void {
    let row = 0;
    let rowRadius = 0;
    for (let t = 0; t < this.#count; t++) {
      const j = this.#list[t] as number;
      const value = Math.hypot(this.re[j] as number, this.im[j] as number);
      const radius = (this.radius[j] as number) + rounding * (this.size[j] as number);
      this.#entries++;
      this.#sum += value * value;
      this.#radii += radius * radius;
      this.#rounding += (rounding * (this.size[j] as number)) ** 2;
      this.#uncertain += (this.radius[j] as number) ** 2;
      row += value;
      rowRadius += radius;
      this.#columns[j] = (this.#columns[j] as number) + value;
      this.#columnRadii[j] = (this.#columnRadii[j] as number) + radius;
      this.#most = Math.max(this.#most, value * (1 + gamma(8)) + radius);
      this.#atLeast = Math.max(this.#atLeast, value * (1 - gamma(8)) - radius);
    }
    this.#rows = Math.max(this.#rows, row);
    this.#rowRadii = Math.max(this.#rowRadii, rowRadius);
  }

  finish(): OwnCommutator {
    const norm = Math.sqrt(this.#sum);
    const radius = Math.sqrt(this.#radii);
    const frobeniusBound = roundUp(norm + radius, this.#entries + 16);
    const column = this.#columns.reduce((most, x) => Math.max(most, x), 0);
    const columnRadius = this.#columnRadii.reduce((most, x) => Math.max(most, x), 0);
    const values = Math.min(norm, Math.sqrt(column * this.#rows));
    const radii = Math.min(radius, Math.sqrt(columnRadius * this.#rowRadii));
    const bound = Math.min(frobeniusBound, roundUp(values + radii, this.#entries + 2 * this.#n + 16));
    const sure = (size: number): number => Math.max(0, size - Math.sqrt(this.#rounding));
    const uncertain = Math.sqrt(this.#uncertain);
    const frobeniusCertain = sure(norm) + uncertain;
    const certain = Math.min(frobeniusCertain, sure(values) + Math.min(uncertain, radii));
    return { norm, radius, bound, frobeniusBound, certain, frobeniusCertain, most: this.#most, atLeast: this.#atLeast };
  }
}

/** [D, B]_ij = (d_i − d_j) b_ij. */
function diagonalRows(d: Operator, b: Operator, tally: Tally): void {
  const n = d.n;
  const re = new Float64Array(n);
  const im = new Float64Array(n);
  const own = new Float64Array(n);
  const { csr } = d;
  for (let i = 0; i < n; i++) {
    const e = csr.ptr[i] as number;
    if (e === csr.ptr[i + 1]) continue;
    re[i] = csr.re[e] as number;
    im[i] = csr.im === undefined ? 0 : (csr.im[e] as number);
    own[i] = radiusAt(d, e);
  }
  const rounding = roundsNothing(d.csr, b.csr, 2) ? 0 : Math.SQRT2 * gamma(5);
  for (let i = 0; i < n; i++) {
    tally.open();
    for (let e = b.csr.ptr[i] as number; e < (b.csr.ptr[i + 1] as number); e++) {
      const j = b.csr.col[e] as number;
      if (j === i) continue;
      const x = (re[i] as number) - (re[j] as number);
      const y = (im[i] as number) - (im[j] as number);
      const u = b.csr.re[e] as number;
      const v = b.csr.im === undefined ? 0 : (b.csr.im[e] as number);
      const size = Math.hypot(u, v);
      const radius = radiusAt(b, e);
      tally.touch(j);
      tally.re[j] = x * u - y * v;
      tally.im[j] = x * v + y * u;
      tally.radius[j] = ((own[i] as number) + (own[j] as number)) * (size + radius) + Math.hypot(x, y) * radius;
      tally.size[j] = Math.hypot(x, y) * size;
    }
    tally.close(rounding);
  }
}

function generalRows(a: Operator, b: Operator, tally: Tally): void {
  const complex = a.csr.im !== undefined || b.csr.im !== undefined;
  const terms = a.rowEntries + b.rowEntries;
  const rounding = roundsNothing(a.csr, b.csr, terms) ? 0 : complex ? Math.SQRT2 * gamma(terms + 2) : gamma(terms);
  for (let i = 0; i < a.n; i++) {
    tally.open();
    addProduct(a, b, i, 1, tally);
    addProduct(b, a, i, -1, tally);
    tally.close(rounding);
  }
}

/** Adds sign · (row i of A) · B. */
function addProduct(a: Operator, b: Operator, i: number, sign: number, tally: Tally): void {
  const left = a.csr;
  const right = b.csr;
  const { re, im, radius, size } = tally;
  for (let e = left.ptr[i] as number; e < (left.ptr[i + 1] as number); e++) {
    const k = left.col[e] as number;
    const x = sign * (left.re[e] as number);
    const y = left.im === undefined ? 0 : sign * (left.im[e] as number);
    const modulus = y === 0 ? Math.abs(x) : Math.hypot(x, y);
    const r = radiusAt(a, e);
    const end = right.ptr[k + 1] as number;
    for (let f = right.ptr[k] as number; f < end; f++) {
      const j = right.col[f] as number;
      const u = right.re[f] as number;
      const v = right.im === undefined ? 0 : (right.im[f] as number);
      const other = v === 0 ? Math.abs(u) : Math.hypot(u, v);
      const s = radiusAt(b, f);
      tally.touch(j);
      re[j] = (re[j] as number) + (x * u - y * v);
      im[j] = (im[j] as number) + (x * v + y * u);
      radius[j] = (radius[j] as number) + (modulus * s + r * (other + s));
      size[j] = (size[j] as number) + modulus * other;
    }
  }
}

function radiusAt(a: Operator, e: number): number {
  const { radius, csr } = a;
  if (radius !== undefined) return radius[e] as number;
  const x = csr.re[e] as number;
  return gamma(1) * (csr.im === undefined ? Math.abs(x) : Math.hypot(x, csr.im[e] as number));
}

function onDiagonal(a: Csr): boolean {
  for (let i = 0; i < a.rows; i++) {
    for (let e = a.ptr[i] as number; e < (a.ptr[i + 1] as number); e++) if (a.col[e] !== i) return false;
  }
  return true;
}

/** Whether sums of up to `terms` products are exact: all entries are multiples of a power of two and the sums fit 53 bits. */
function roundsNothing(a: Csr, b: Csr, terms: number): boolean {
  const x = dyadic(a);
  const y = dyadic(b);
  return 2 * terms * x.most * y.most * 2 ** (x.bits + y.bits) <= 2 ** 53;
}

function dyadic({ re, im }: Csr): { most: number; bits: number } {
  let most = 0;
  let bits = 0;
  for (const part of im === undefined ? [re] : [re, im]) {
    for (let e = 0; e < part.length; e++) {
      const x = Math.abs(part[e] as number);
      if (x > most) most = x;
      while (bits <= 60 && !Number.isInteger(x * 2 ** bits)) bits++;
      if (bits > 60) return { most: Number.POSITIVE_INFINITY, bits };
    }
  }
  return { most, bits };
}
