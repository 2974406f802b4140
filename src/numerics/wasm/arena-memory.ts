import { GoodBasisError } from "../../errors.js";
import { finishBound } from "../bounded/sparse.js";
import type { Csr } from "../csr.js";
import { completeAntiHermitian } from "../sparse/hermitian.js";
import { type Kernels, OutOfMemory } from "./runtime.js";

/** A sparse matrix that stays in the memory of a `SparseArena`. */
export interface Resident {
  /** Number of rows. */
  readonly rows: number;
  /** Number of columns. */
  readonly cols: number;
  /** Number of stored entries. */
  readonly entries: number;
  /** Whether it has imaginary parts. */
  readonly complex: boolean;
  /** Whether it equals its adjoint, exactly. */
  readonly hermitian: boolean;
  /** Whether only the upper triangle is stored; the rest follows from C† = −C. */
  readonly upper: boolean;
}

/** Where a resident matrix lies in memory: addresses in bytes; `im` is 0 for a real one. */
export interface Place {
  readonly ptr: number;
  readonly col: number;
  readonly re: number;
  readonly im: number;
  readonly norms: number;
}

/** A matrix with its place. */
export interface Placed {
  readonly resident: Resident;
  readonly place: Place;
}

/** Results for which this many bytes suffice get room for all their products; for larger ones the entries are counted first. */
const COUNTED_FROM = 2 ** 29;
/** Entries that row starts of four bytes can count. */
const MOST_ENTRIES = 2 ** 31 - 1;

/**
 * The memory of one instance of the kernels as a stack of sparse matrices. What takes memory throws `OutOfMemory` where the
 * platform does not give it; {@link ArenaMemory.attempt} makes that `undefined`.
 *
 * @internal
 */
export class ArenaMemory {
  readonly #kernels: Kernels;
  /** The first byte beyond the matrices; setting it back frees what came after. */
  end: number;
  readonly #countedFrom: number;

  /**
   * @param kernels - an instance of its own
   * @param countedFrom - bytes of room from which on the entries of a result are counted first
   */
  constructor(kernels: Kernels, countedFrom: number = COUNTED_FROM) {
    this.#kernels = kernels;
    this.#countedFrom = countedFrom;
    this.end = kernels.exports.heapStart.value;
  }

  /** Runs something that takes memory; `undefined`, and nothing taken, where the platform does not give it. */
  attempt<T>(run: () => T): T | undefined {
    const start = this.end;
    try {
      return run();
    } catch (error) {
      this.end = start;
      if (error instanceof OutOfMemory) return undefined;
      throw error;
    }
  }

  /** Copies a matrix to the end of the stack. */
  copyIn(a: Csr): Place {
    const place = this.#reserve(a.rows, a.col.length, a.im !== undefined);
    const { exports } = this.#kernels;
    const { buffer } = exports.memory;
    new Int32Array(buffer, place.ptr, a.rows + 1).set(a.ptr);
    new Int32Array(buffer, place.col, a.col.length).set(a.col);
    new Float64Array(buffer, place.re, a.re.length).set(a.re);
    if (a.im !== undefined) new Float64Array(buffer, place.im, a.im.length).set(a.im);
    exports.rowNorms(a.rows, place.ptr, place.re, place.im, place.norms);
    return place;
  }

  /** What is stored of a matrix, columns ascending, as views that last until memory grows. */
  view({ resident, place }: Placed): Csr {
    const { rows, cols, entries, complex } = resident;
    const { exports } = this.#kernels;
    exports.sortSparseRows(rows, place.ptr, place.col, place.re, place.im);
    const { buffer } = exports.memory;
    const ptr = new Int32Array(buffer, place.ptr, rows + 1);
    const col = new Int32Array(buffer, place.col, entries);
    const re = new Float64Array(buffer, place.re, entries);
    return { rows, cols, ptr, col, re, im: complex ? new Float64Array(buffer, place.im, entries) : undefined };
  }

  /** Σ |c_ij|². */
  sumOfSquares({ resident, place }: Placed): number {
    const { rows, upper } = resident;
    return this.#kernels.exports.sumOfSquares(rows, upper, place.ptr, place.col, place.re, place.im);
  }

  /**
   * AB, or AB − BA, at the end of the stack, with its bound.
   *
   * @throws GoodBasisError `memory` when the result has more entries than can be counted
   */
  combine(commutes: boolean, a: Placed, b: Placed): Placed & { readonly error: number } {
    const { exports } = this.#kernels;
    const { rows } = a.resident;
    const { cols } = b.resident;
    const upper = commutes && a.resident.hermitian && b.resident.hermitian;
    const complex = a.resident.complex || b.resident.complex;
    const start = this.end;
    const left = this.#whole(a);
    const right = a.resident === b.resident ? left : this.#whole(b);
    const written = this.end > start;
    const fits = upper ? (rows * (rows + 1)) / 2 : rows * cols;
    let room = exports.productCount(rows, upper, left.ptr, left.col, right.ptr, right.col);
    if (commutes) room += exports.productCount(rows, upper, right.ptr, right.col, left.ptr, left.col);
    room = Math.min(room, fits);
    const few = room * (complex ? 20 : 12) < this.#countedFrom;
    let place = few ? this.attempt(() => this.#reserve(rows, room, complex, cols)) : undefined;
    if (place === undefined) {
      const places = this.#blankIntegers(this.end, cols);
      room = exports.countEntries(rows, commutes, upper, left.ptr, left.col, right.ptr, right.col, places);
      if (room > MOST_ENTRIES) throw tooLarge(commutes ? "commutator" : "product", a.resident, b.resident);
      place = this.#reserve(rows, room, complex, cols);
    }
    const places = this.#blankIntegers(this.end, cols);
    const entries = exports.combineSparse(
      rows,
      commutes,
      upper,
      left.ptr,
      left.col,
      left.re,
      left.im,
      left.norms,
      right.ptr,
      right.col,
      right.re,
      right.im,
      right.norms,
      place.ptr,
      place.col,
      place.re,
      place.im,
      places,
    );
    const bound = { squares: exports.errorSquares.value, most: exports.mostTerms.value };
    // Reserved pages that were not written cost nothing but addresses: moving pays where a good part is left over.
    const settled = !written && entries > 0.75 * room ? place : this.#settle(start, place, rows, entries);
    exports.rowNorms(rows, settled.ptr, settled.re, settled.im, settled.norms);
    const resident = { rows, cols, entries, complex, hermitian: false, upper };
    const length = upper ? 2 * entries : entries;
    return { resident, place: settled, error: finishBound(bound, a.resident, b.resident, { col: { length } }) };
  }

  /** The place of a factor with both triangles, at the end of the stack where it has to be written out. */
  #whole(a: Placed): Place {
    return a.resident.upper ? this.copyIn(completeAntiHermitian(this.view(a))) : a.place;
  }

  /** Room for a matrix at the end of the stack, `scratch` integers beyond it. Pages that are reserved but never written cost no memory. */
  #reserve(rows: number, entries: number, complex: boolean, scratch = 0): Place {
    const lengths = [4 * (rows + 1), 8 * rows, 4 * entries, 8 * entries, complex ? 8 * entries : 0, 4 * scratch];
    const [ptr = 0, norms = 0, col = 0, re = 0, im = 0, end = 0] = this.#kernels.stretches(this.end, lengths);
    this.end = end;
    return { ptr, norms, col, re, im: complex ? im : 0 };
  }

  /** Integers that are all −1, for the time of a call. */
  #blankIntegers(from: number, count: number): number {
    const [start = 0] = this.#kernels.stretches(from, [4 * count]);
    new Int32Array(this.#kernels.exports.memory.buffer, start, count).fill(-1);
    return start;
  }

  /** Moves a finished result down to `start`, its stretches together, so that what was reserved too much can be used again. */
  #settle(start: number, place: Place, rows: number, entries: number): Place {
    this.end = start;
    const packed = this.#reserve(rows, entries, place.im !== 0);
    const bytes = new Uint8Array(this.#kernels.exports.memory.buffer);
    // In the order in which they lie, so that none is overwritten before it has been moved; the norms are yet to come.
    const move = (to: number, from: number, length: number): void => {
      if (to !== from) bytes.copyWithin(to, from, from + length);
    };
    move(packed.ptr, place.ptr, 4 * (rows + 1));
    move(packed.col, place.col, 4 * entries);
    move(packed.re, place.re, 8 * entries);
    if (place.im !== 0) move(packed.im, place.im, 8 * entries);
    return packed;
  }
}

/** The error for a result that has no room anywhere. */
export function tooLarge(where: string, a: Resident, b: Resident): GoodBasisError {
  return new GoodBasisError(
    "memory",
    `SparseArena.${where}: the result of matrices with ${a.entries} and ${b.entries} entries has no room in memory; split one ` +
      "of them into stretches of rows, or release what is no longer needed",
    { left: a.entries, right: b.entries },
  );
}
