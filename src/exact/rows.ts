import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import { Entries } from "./entries.js";
import { Surd, type SurdInput } from "./surd.js";

/** Sparse rows of exact numbers; columns ascend strictly within a row and no stored entry is zero. */
export interface ExactRows {
  /** Row starts. */
  readonly ptr: Int32Array;
  /** Column of each entry. */
  readonly col: Int32Array;
  /** The entries, row by row. */
  readonly entries: Entries;
}

/** One entry of an exact matrix: row, column, value. */
export type ExactTriplet = readonly [row: number, col: number, value: SurdInput];

/**
 * Sparse rows of triplets in any order; duplicates are summed, zeros dropped.
 *
 * @param where - the function that asks, for messages
 * @throws GoodBasisError `shape` - an index outside the matrix; what {@link Surd.from} throws
 */
export function rowsOfTriplets(where: string, n: number, triplets: Iterable<ExactTriplet>): ExactRows {
  const rows = Array.from({ length: n }, () => new Map<number, Surd>());
  for (const [row, col, value] of triplets) {
    const target = rows[row];
    if (target === undefined || !Number.isInteger(col) || col < 0 || col >= n) {
      const message = `${where}: entry (${shown(row)}, ${shown(col)}) is outside 0 … ${n - 1}`;
      throw new GoodBasisError("shape", message, { row, col, n });
    }
    const before = target.get(col);
    const number = Surd.from(value);
    target.set(col, before === undefined ? number : before.plus(number));
  }
  return rowsOfMaps(rows);
}

function rowsOfMaps(rows: readonly ReadonlyMap<number, Surd>[]): ExactRows {
  const ptr = new Int32Array(rows.length + 1);
  const col: number[] = [];
  const values: Surd[] = [];
  for (const [row, entries] of rows.entries()) {
    for (const j of [...entries.keys()].sort((a, b) => a - b)) {
      const value = entries.get(j);
      if (value === undefined || value.isZero) continue;
      col.push(j);
      values.push(value);
    }
    ptr[row + 1] = col.length;
  }
  return { ptr, col: Int32Array.from(col), entries: Entries.ofSurds(values) };
}

/** A ± B of matrices of one size. */
export function sumRows(a: ExactRows, b: ExactRows, sign: 1 | -1): ExactRows {
  const n = a.ptr.length - 1;
  const [x, y] = [a.entries.surds, b.entries.surds];
  const ptr = new Int32Array(n + 1);
  const col: number[] = [];
  const values: Surd[] = [];
  for (let row = 0; row < n; row++) {
    let e = a.ptr[row] as number;
    let f = b.ptr[row] as number;
    const [eEnd, fEnd] = [a.ptr[row + 1] as number, b.ptr[row + 1] as number];
    while (e < eEnd || f < fEnd) {
      const c = e < eEnd ? (a.col[e] as number) : n;
      const d = f < fEnd ? (b.col[f] as number) : n;
      let value = c <= d ? (x[e++] as Surd) : Surd.zero;
      if (d <= c) {
        const other = y[f++] as Surd;
        value = sign === 1 ? value.plus(other) : value.minus(other);
      }
      if (value.isZero) continue;
      col.push(Math.min(c, d));
      values.push(value);
    }
    ptr[row + 1] = col.length;
  }
  return { ptr, col: Int32Array.from(col), entries: Entries.ofSurds(values) };
}

/** z A. */
export function scaleRows(a: ExactRows, z: Surd): ExactRows {
  if (z.isZero) return { ptr: new Int32Array(a.ptr.length), col: new Int32Array(0), entries: Entries.ofSurds([]) };
  return { ...a, entries: Entries.ofSurds(a.entries.surds.map((x) => x.times(z))) };
}

/** The transpose, or the adjoint. */
export function flipRows(a: ExactRows, conjugate: boolean): ExactRows {
  const n = a.ptr.length - 1;
  const ptr = new Int32Array(n + 1);
  for (const j of a.col) ptr[j + 1] = (ptr[j + 1] as number) + 1;
  for (let j = 0; j < n; j++) ptr[j + 1] = (ptr[j + 1] as number) + (ptr[j] as number);
  const next = ptr.slice();
  const col = new Int32Array(a.col.length);
  const order = new Int32Array(a.col.length);
  for (let row = 0; row < n; row++) {
    for (let e = a.ptr[row] as number; e < (a.ptr[row + 1] as number); e++) {
      const j = a.col[e] as number;
      const place = next[j] as number;
      next[j] = place + 1;
      col[place] = row;
      order[place] = e;
    }
  }
  return { ptr, col, entries: a.entries.gather(order, conjugate) };
}

/** A ⊗ B; the index of A is the slow one. */
export function kronRows(a: ExactRows, b: ExactRows): ExactRows {
  const [n, m] = [a.ptr.length - 1, b.ptr.length - 1];
  const [x, y] = [a.entries.surds, b.entries.surds];
  const ptr = new Int32Array(n * m + 1);
  const col = new Int32Array(x.length * y.length);
  const values: Surd[] = [];
  for (let row = 0; row < n; row++) {
    for (let inner = 0; inner < m; inner++) {
      for (let e = a.ptr[row] as number; e < (a.ptr[row + 1] as number); e++) {
        for (let f = b.ptr[inner] as number; f < (b.ptr[inner + 1] as number); f++) {
          col[values.length] = (a.col[e] as number) * m + (b.col[f] as number);
          values.push((x[e] as Surd).times(y[f] as Surd));
        }
      }
      ptr[row * m + inner + 1] = values.length;
    }
  }
  return { ptr, col, entries: Entries.ofSurds(values) };
}

/** The rows and columns of the chosen kets, in ascending order. */
export function principalRows(a: ExactRows, chosen: readonly number[]): ExactRows {
  const place = new Map(chosen.map((index, k) => [index, k]));
  const ptr = new Int32Array(chosen.length + 1);
  const col: number[] = [];
  const order: number[] = [];
  for (const [k, row] of chosen.entries()) {
    for (let e = a.ptr[row] as number; e < (a.ptr[row + 1] as number); e++) {
      const j = place.get(a.col[e] as number);
      if (j === undefined) continue;
      col.push(j);
      order.push(e);
    }
    ptr[k + 1] = col.length;
  }
  return { ptr, col: Int32Array.from(col), entries: a.entries.gather(order, false) };
}
