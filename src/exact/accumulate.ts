import type { Meter } from "./budget.js";
import { Entries, type WholeEntries } from "./entries.js";
import { gcdSafe } from "./integer.js";
import type { ExactRows } from "./rows.js";
import { Surd } from "./surd.js";

/** One product in a signed sum of products. */
export interface SignedProduct {
  readonly left: ExactRows;
  readonly right: ExactRows;
  readonly sign: 1 | -1;
}

const MOST = Number.MAX_SAFE_INTEGER;

/**
 * Σ ± A B of n × n matrices in sparse rows, row by row (Gustavson, ACM Trans. Math. Softw. 4, 250 (1978)). In machine integers where all factors allow it
 * and no partial sum outgrows them, otherwise in exact numbers of any size.
 *
 * @param products - factors of one set of sizes n × n; where machine integers are used, all products share one denominator
 * @param meter - counts multiplications and weighs results
 */
export function sumOfProducts(n: number, products: readonly SignedProduct[], meter: Meter): ExactRows {
  return wholeSum(n, products, meter) ?? surdSum(n, products, meter);
}

/** Walks over the contributions of one product to one row. */
function walkRow(
  row: number,
  left: ExactRows,
  right: ExactRows,
  visit: (j: number, e: number, f: number) => void,
): void {
  const end = left.ptr[row + 1] as number;
  for (let e = left.ptr[row] as number; e < end; e++) {
    const k = left.col[e] as number;
    const last = right.ptr[k + 1] as number;
    for (let f = right.ptr[k] as number; f < last; f++) visit(right.col[f] as number, e, f);
  }
}

/** The touched columns of one row. */
class Touched {
  readonly list: number[] = [];
  readonly #marks: Int32Array;

  constructor(n: number) {
    this.#marks = new Int32Array(n).fill(-1);
  }

  /** Whether column j is new in this row. */
  isNew(row: number, j: number): boolean {
    if (this.#marks[j] === row) return false;
    this.#marks[j] = row;
    this.list.push(j);
    return true;
  }

  /** Hands the columns out in order and starts afresh. */
  drain(use: (j: number) => void): void {
    this.list.sort((a, b) => a - b);
    for (const j of this.list) use(j);
    this.list.length = 0;
  }
}

interface WholeProduct extends SignedProduct {
  readonly a: WholeEntries;
  readonly b: WholeEntries;
}

/** Undefined where a factor or a partial sum does not fit. */
function wholeSum(n: number, products: readonly SignedProduct[], meter: Meter): ExactRows | undefined {
  const factors: WholeProduct[] = [];
  for (const product of products) {
    const [a, b] = [product.left.entries.whole, product.right.entries.whole];
    if (a === undefined || b === undefined) return undefined;
    factors.push({ ...product, a, b });
  }
  const den = factors[0] === undefined ? 1 : factors[0].a.den * factors[0].b.den;
  if (den > MOST || factors.some(({ a, b }) => a.den * b.den !== den)) return undefined;
  const complex = factors.some(({ a, b }) => a.im !== undefined || b.im !== undefined);
  const ptr = new Int32Array(n + 1);
  const col: number[] = [];
  const re: number[] = [];
  const im: number[] = [];
  const x = new Float64Array(n);
  const y = new Float64Array(n);
  const touched = new Touched(n);
  // bounds every product and every partial sum: all were exact if it is safe
  let largest = 0;
  for (let row = 0; row < n; row++) {
    for (const factor of factors) {
      const size = complex
        ? addComplexRow(row, factor, touched, x, y, meter)
        : addRealRow(row, factor, touched, x, meter);
      if (size > largest) largest = size;
    }
    if (largest > MOST) return undefined;
    touched.drain((j) => {
      const [real, imaginary] = [x[j] as number, complex ? (y[j] as number) : 0];
      if (real === 0 && imaginary === 0) return;
      col.push(j);
      // + 0 turns −0 into 0
      re.push(real + 0);
      if (complex) im.push(imaginary + 0);
    });
    ptr[row + 1] = col.length;
  }
  const isComplex = im.some((v) => v !== 0);
  const whole = { re: Float64Array.from(re), im: isComplex ? Float64Array.from(im) : undefined, den };
  return { ptr, col: Int32Array.from(col), entries: Entries.ofWhole(lowest(whole)) };
}

/**
 * Adds ± A B to row sums in machine integers.
 *
 * @param x - the sums by column, where `touched`
 * @returns the largest |product| + |sum before|, in doubles: where a true one is beyond 2^53, so is this
 */
function addRealRow(
  row: number,
  { left, right, sign, a, b }: WholeProduct,
  touched: Touched,
  x: Float64Array,
  meter: Meter,
): number {
  const [aRe, bRe, aCol, bCol, bPtr] = [a.re, b.re, left.col, right.col, right.ptr];
  let largest = 0;
  const end = left.ptr[row + 1] as number;
  for (let e = left.ptr[row] as number; e < end; e++) {
    const u = sign * (aRe[e] as number);
    const k = aCol[e] as number;
    const last = bPtr[k + 1] as number;
    const first = bPtr[k] as number;
    meter.spend(last - first);
    for (let f = first; f < last; f++) {
      const j = bCol[f] as number;
      const product = u * (bRe[f] as number);
      const before = touched.isNew(row, j) ? 0 : (x[j] as number);
      const size = Math.abs(product) + Math.abs(before);
      if (size > largest) largest = size;
      x[j] = before + product;
    }
  }
  return largest;
}

/** The same for complex numbers, real and imaginary sums apart. */
function addComplexRow(
  row: number,
  { left, right, sign, a, b }: WholeProduct,
  touched: Touched,
  x: Float64Array,
  y: Float64Array,
  meter: Meter,
): number {
  let largest = 0;
  let steps = 0;
  walkRow(row, left, right, (j, e, f) => {
    steps += 4;
    const [u, v] = [sign * (a.re[e] as number), a.im === undefined ? 0 : sign * (a.im[e] as number)];
    const [s, t] = [b.re[f] as number, b.im === undefined ? 0 : (b.im[f] as number)];
    const [us, vt, ut, vs] = [u * s, v * t, u * t, v * s];
    const fresh = touched.isNew(row, j);
    const [re, im] = fresh ? [0, 0] : [x[j] as number, y[j] as number];
    const onRe = Math.abs(us) + Math.abs(vt) + Math.abs(re);
    const onIm = Math.abs(ut) + Math.abs(vs) + Math.abs(im);
    largest = Math.max(largest, onRe, onIm);
    x[j] = re + (us - vt);
    y[j] = im + (ut + vs);
  });
  meter.spend(steps);
  return largest;
}

/** Takes a common divisor of all numbers out, so that denominators do not grow without need. */
function lowest(whole: WholeEntries): WholeEntries {
  if (whole.den === 1) return whole;
  let divisor = whole.den;
  for (const list of [whole.re, whole.im ?? new Float64Array(0)]) {
    for (let k = 0; k < list.length && divisor > 1; k++) divisor = gcdWithSafe(divisor, list[k] as number);
  }
  if (divisor === 1) return whole;
  const divided = (list: Float64Array): Float64Array => list.map((n) => n / divisor);
  return { re: divided(whole.re), im: whole.im && divided(whole.im), den: whole.den / divisor };
}

function gcdWithSafe(divisor: number, n: number): number {
  return n % divisor === 0 ? divisor : gcdSafe(divisor, n);
}

function surdSum(n: number, products: readonly SignedProduct[], meter: Meter): ExactRows {
  const ptr = new Int32Array(n + 1);
  const col: number[] = [];
  const values: Surd[] = [];
  const sums: Surd[] = new Array<Surd>(n).fill(Surd.zero);
  const touched = new Touched(n);
  for (let row = 0; row < n; row++) {
    for (const { left, right, sign } of products) {
      const [a, b] = [left.entries.surds, right.entries.surds];
      let steps = 0;
      walkRow(row, left, right, (j, e, f) => {
        steps++;
        const product = (a[e] as Surd).times(b[f] as Surd);
        const signed = sign === 1 ? product : product.negate();
        sums[j] = touched.isNew(row, j) ? signed : (sums[j] as Surd).plus(signed);
      });
      meter.spendProducts(steps);
    }
    touched.drain((j) => {
      const sum = sums[j] as Surd;
      if (sum.isZero) return;
      meter.weigh(sum.largeTerms);
      col.push(j);
      values.push(sum);
    });
    ptr[row + 1] = col.length;
  }
  return { ptr, col: Int32Array.from(col), entries: Entries.ofSurds(values) };
}
