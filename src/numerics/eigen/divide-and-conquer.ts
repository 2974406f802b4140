import { UNIT_ROUNDOFF } from "../rounding.js";
import { implicitQl } from "./implicit-ql.js";
import { addProduct, type Panel } from "./packed-product.js";
import { recomputeWeights, secularRoot } from "./secular.js";

/** What the recursion shares. */
interface Tree {
  readonly n: number;
  readonly diagonal: Float64Array;
  readonly off: Float64Array;
  readonly v: Float64Array;
  readonly order: Int32Array;
  /** Blocks up to this order go to implicit QL. */
  readonly leaf: number;
  /** Absolute threshold of the leaves. */
  readonly floor: number;
  /** Absolute threshold of deflation. */
  readonly tolerance: number;
  /** z of the merge at hand, n numbers. */
  readonly z: Float64Array;
  /**
   * Room for the differences (at most n²), the gathered rows and the product of a merge (at most n² / 2 each, rounded
   * up).
   */
  readonly gaps: Float64Array;
  readonly gathered: Float64Array;
  readonly product: Float64Array;
  readonly rotations: Float64Array;
  readonly productScratch: Float64Array;
}

/** In which columns a row of eigenvectors may differ from zero: the first half, the second, or both. */
const FIRST = 0;
const BOTH = 1;
const SECOND = 2;

/**
 * All eigenpairs of a symmetric tridiagonal matrix by divide and conquer with deflation.
 *
 * Source: Cuppen, Numer. Math. 36, 177 (1981); deflation: Bunch, Nielsen and Sorensen, Numer. Math. 31, 31 (1978);
 * orthogonal vectors from recomputed z: Gu and Eisenstat, SIAM J. Matrix Anal. Appl. 16, 172 (1995). What is deflated
 * is below four units in the last place of the norm of the whole matrix.
 *
 * @param n - order
 * @param diagonal - diagonal entries; on return the eigenvalue of each row of `v`, unsorted
 * @param off - `off[i]` couples i and i + 1; destroyed
 * @param v - row-major n × n, zero on entry; on return its rows are the eigenvectors
 * @param order - receives the rows by ascending eigenvalue
 * @param norm - the largest modulus of an entry of the tridiagonal matrix
 * @param leaf - blocks up to this order, at least 1, are left to implicit QL
 * @param floor - absolute threshold of the leaves
 * @param rotations - scratch, 2 n numbers
 * @param productScratch - scratch for {@link addProduct}
 * @throws GoodBasisError `no-convergence` from a leaf or from the secular equation
 */
export function divideAndConquer(
  n: number,
  diagonal: Float64Array,
  off: Float64Array,
  v: Float64Array,
  order: Int32Array,
  norm: number,
  leaf: number,
  floor: number,
  rotations: Float64Array,
  productScratch: Float64Array,
): void {
  const half = n * (n - (n >> 1));
  const merges = n > leaf;
  solve(0, n, {
    n,
    diagonal,
    off,
    v,
    order,
    leaf,
    floor,
    tolerance: 8 * UNIT_ROUNDOFF * norm,
    z: new Float64Array(n),
    gaps: new Float64Array(merges ? n * n : 0),
    gathered: new Float64Array(merges ? half : 0),
    product: new Float64Array(merges ? half : 0),
    rotations,
    productScratch,
  });
  // The secular equation gives ascending roots up to rounding; this settles the last place.
  sortOrder(order, 0, n, diagonal);
}

/** Solves rows `start` to `end` (exclusive) and orders them. */
function solve(start: number, end: number, tree: Tree): void {
  const { n, diagonal, off, v, order, leaf, floor, rotations } = tree;
  const size = end - start;
  if (size <= leaf) {
    solveLeaf(start, end, diagonal, off, v, n, order, floor, rotations);
    return;
  }
  const middle = start + (size >> 1);
  const coupling = off[middle - 1] as number;
  const rho = Math.abs(coupling);
  diagonal[middle - 1] = (diagonal[middle - 1] as number) - rho;
  diagonal[middle] = (diagonal[middle] as number) - rho;
  solve(start, middle, tree);
  solve(middle, end, tree);
  merge(start, middle, end, 2 * rho, coupling < 0 ? -1 : 1, tree);
}

/**
 * Solves rows `start` to `end` (exclusive) by implicit QL and orders them.
 *
 * @param start - first row
 * @param end - row after the last
 * @param diagonal - diagonal entries; on return the eigenvalue of each row
 * @param off - off-diagonal entries; destroyed
 * @param v - rows of `stride` numbers, zero on entry in rows and columns of the block; on return the eigenvectors
 * @param stride - length of a row of `v`
 * @param order - receives the rows by ascending eigenvalue
 * @param floor - absolute threshold for off-diagonal entries
 * @param rotations - scratch, 2 · `end` numbers
 * @throws GoodBasisError `no-convergence` from implicit QL
 */
export function solveLeaf(
  start: number,
  end: number,
  diagonal: Float64Array,
  off: Float64Array,
  v: Float64Array,
  stride: number,
  order: Int32Array,
  floor: number,
  rotations: Float64Array,
): void {
  for (let i = start; i < end; i++) {
    v[i * stride + i] = 1;
    order[i] = i;
  }
  implicitQl(end - start, start, diagonal, off, v, stride, floor, rotations);
  sortOrder(order, start, end, diagonal);
}

/** Sorts a stretch of row indices by ascending eigenvalue; insertion, stable and quick on what is nearly sorted. */
function sortOrder(order: Int32Array, start: number, end: number, values: Float64Array): void {
  for (let i = start + 1; i < end; i++) {
    const row = order[i] as number;
    const value = values[row] as number;
    let k = i - 1;
    for (; k >= start && (values[order[k] as number] as number) > value; k--) order[k + 1] = order[k] as number;
    order[k + 1] = row;
  }
}

/** Joins two solved halves: eigenpairs of diag(d) + rho z zᵀ with ‖z‖ = 1. */
function merge(start: number, middle: number, end: number, rho: number, sign: number, tree: Tree): void {
  const { n, diagonal, v, z, order } = tree;
  for (let r = start; r < end; r++) {
    z[r] = (r < middle ? (v[r * n + middle - 1] as number) : sign * (v[r * n + middle] as number)) * Math.SQRT1_2;
  }
  const { kept, deflated, span } = deflate(start, middle, end, rho, tree);
  if (kept.length > 0) {
    updateVectors(start, middle, end, kept, span, rho, tree);
  }
  deflated.sort((p, q) => (diagonal[p] as number) - (diagonal[q] as number) || p - q);
  mergeLists(kept, deflated, diagonal, order, start);
}

/**
 * Sets aside the rows whose eigenpairs the coupling leaves alone within the tolerance: those with a small z, and one of
 * each two so close that a rotation can take z from it.
 */
function deflate(
  start: number,
  middle: number,
  end: number,
  rho: number,
  tree: Tree,
): { kept: number[]; deflated: number[]; span: Uint8Array } {
  const { n, diagonal, v, z, order, tolerance } = tree;
  const span = new Uint8Array(end - start);
  span.fill(SECOND, middle - start);
  const rows = new Int32Array(end - start);
  mergeLists(order.subarray(start, middle), order.subarray(middle, end), diagonal, rows, 0);
  const kept: number[] = [];
  const deflated: number[] = [];
  let previous = -1;
  for (const row of rows) {
    if (rho * Math.abs(z[row] as number) <= tolerance) {
      deflated.push(row);
      continue;
    }
    if (previous >= 0) {
      const x = z[previous] as number;
      const y = z[row] as number;
      const radius = Math.sqrt(x * x + y * y);
      const c = y / radius;
      const s = x / radius;
      const low = diagonal[previous] as number;
      const high = diagonal[row] as number;
      if (Math.abs((high - low) * c * s) <= tolerance) {
        z[row] = radius;
        z[previous] = 0;
        const a = span[previous - start] as number;
        const b = span[row - start] as number;
        const from = a === SECOND && b === SECOND ? middle : start;
        const to = a === FIRST && b === FIRST ? middle : end;
        rotateRows(v, previous * n + from, row * n + from, to - from, c, s);
        if (a !== b) span[row - start] = BOTH;
        diagonal[previous] = low * c * c + high * s * s;
        diagonal[row] = low * s * s + high * c * c;
        deflated.push(previous);
      } else kept.push(previous);
    }
    previous = row;
  }
  if (previous >= 0) kept.push(previous);
  return { kept, deflated, span };
}

/**
 * Solves the secular equation for the kept rows and replaces these rows by the new eigenvectors, ascending in `kept`.
 */
function updateVectors(
  start: number,
  middle: number,
  end: number,
  kept: readonly number[],
  span: Uint8Array,
  rho: number,
  tree: Tree,
): void {
  const { diagonal, z, gaps } = tree;
  const count = kept.length;
  const poles = new Float64Array(count);
  const weights = new Float64Array(count);
  const signed = new Float64Array(count);
  let total = 0;
  kept.forEach((row, i) => {
    const zi = z[row] as number;
    poles[i] = diagonal[row] as number;
    signed[i] = zi;
    weights[i] = rho * zi * zi;
    total += rho * zi * zi;
  });
  for (let j = 0; j < count; j++) {
    diagonal[kept[j] as number] = secularRoot(count, j, poles, weights, total, gaps, j * count);
  }
  recomputeWeights(count, poles, gaps, signed);

  // Rows in the order first half, both, second half: each half of the columns then needs one stretch of coefficients.
  const column = new Int32Array(count);
  let k = 0;
  const starts = [0, 0, 0, 0];
  for (const kind of [FIRST, BOTH, SECOND]) {
    for (let i = 0; i < count; i++) if (span[(kept[i] as number) - start] === kind) column[k++] = i;
    starts[kind + 1] = k;
  }
  const temporary = new Float64Array(count);
  for (let j = 0; j < count; j++) {
    const at = j * count;
    let square = 0;
    for (let i = 0; i < count; i++) {
      const x = (signed[i] as number) / (gaps[at + i] as number);
      temporary[i] = x;
      square += x * x;
    }
    const scale = 1 / Math.sqrt(square);
    for (let i = 0; i < count; i++) gaps[at + i] = scale * (temporary[column[i] as number] as number);
  }
  const [, endFirst = 0, endBoth = 0] = starts;
  multiplyHalf(start, middle, 0, endBoth, kept, column, tree);
  multiplyHalf(middle, end, endFirst, count, kept, column, tree);
}

/** New rows in the columns `from` to `to`: coefficients `first` to `last` of each times the old rows they belong to. */
function multiplyHalf(
  from: number,
  to: number,
  first: number,
  last: number,
  kept: readonly number[],
  column: Int32Array,
  tree: Tree,
): void {
  const { n, v, gaps, gathered, product, productScratch } = tree;
  const count = kept.length;
  const width = to - from;
  for (let k = first; k < last; k++) {
    const at = (kept[column[k] as number] as number) * n;
    gathered.set(v.subarray(at + from, at + to), (k - first) * width);
  }
  product.fill(0, 0, count * width);
  const coefficients: Panel = { data: gaps, at: first, rowStep: count, colStep: 1 };
  const old: Panel = { data: gathered, at: 0, rowStep: width, colStep: 1 };
  const out: Panel = { data: product, at: 0, rowStep: width, colStep: 1 };
  addProduct(count, width, last - first, 1, coefficients, old, out, productScratch);
  kept.forEach((row, j) => {
    v.set(product.subarray(j * width, (j + 1) * width), row * n + from);
  });
}

/** Merges two lists of rows, each ascending in its eigenvalue, into `to` from index `at` on. */
function mergeLists(
  a: ArrayLike<number>,
  b: ArrayLike<number>,
  values: Float64Array,
  to: Int32Array,
  at: number,
): void {
  let i = 0;
  let j = 0;
  for (let k = at; i < a.length || j < b.length; k++) {
    const takeA =
      j >= b.length || (i < a.length && (values[a[i] as number] as number) <= (values[b[j] as number] as number));
    to[k] = (takeA ? a[i++] : b[j++]) as number;
  }
}

/** Rotates two stretches of `length` numbers: (x, y) ← (c x − s y, s x + c y). */
function rotateRows(v: Float64Array, xStart: number, yStart: number, length: number, c: number, s: number): void {
  const end = xStart + length;
  for (let p = xStart, q = yStart; p < end; p++, q++) {
    const x = v[p] as number;
    const y = v[q] as number;
    v[p] = c * x - s * y;
    v[q] = s * x + c * y;
  }
}
