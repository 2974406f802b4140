import { GoodBasisError } from "../../errors.js";
import { commutatorSparse, finishBound, productSparse } from "../bounded/sparse.js";
import type { Bounded } from "../bounded/types.js";
import type { Csr } from "../csr.js";
import { dropZeros } from "../sparse/build.js";
import { completeAntiHermitian, isHermitian } from "../sparse/hermitian.js";
import { frobenius } from "../sparse/norms.js";
import { type Kernels, newKernels } from "./runtime.js";

/** A sparse matrix that stays in the memory of a {@link SparseArena}. */
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

/** Where a resident matrix lies: addresses in bytes, or the matrix itself where there is no WebAssembly. */
interface Place {
  readonly ptr: number;
  readonly col: number;
  readonly re: number;
  readonly im: number;
  readonly norms: number;
  readonly plain: Csr | undefined;
}

/** A memory mark of {@link SparseArena.mark}. */
export type ArenaMark = number & {
  /** Tells a mark from other numbers; never there. */
  readonly brand?: "ArenaMark";
};

/**
 * Sparse matrices that stay in WebAssembly memory, so that products and commutators of large operators cost no copies:
 * an operator is copied in once, results are left where they were formed, and only what is asked for is copied out.
 *
 * Each arena has a memory of its own, which is freed with it. Inside, matrices are stacked: {@link SparseArena.release}
 * frees everything that came after a mark. Memory never shrinks but is used again. Without WebAssembly the arena keeps
 * plain arrays and works all the same.
 *
 * ```ts
 * import { Operator } from "goodbasis";
 * import { SparseArena } from "goodbasis/kernels";
 *
 * const arena = new SparseArena();
 * const hop = Operator.fromTriplets(1000, Array.from({ length: 999 }, (_, k) => [k, k + 1, 1]));
 * const field = Operator.from({ diagonal: Array.from({ length: 1000 }, (_, k) => k) });
 * const [h, x] = [hop.plus(hop.adjoint()), field].map(({ csr }) => arena.load(csr, { hermitian: true }));
 * if (h !== undefined && x !== undefined) {
 *   const mark = arena.mark();
 *   const { value, error } = arena.commutator(h, x);
 *   console.log(arena.frobenius(value), error); // √1998, and a bound on what rounding did
 *   arena.release(mark); // h and x stay
 * }
 * ```
 */
export class SparseArena {
  readonly #kernels: Kernels | undefined;
  readonly #places = new Map<Resident, Place>();
  #end: number;

  /**
   * @param kernels - an instance of its own, or `undefined` for plain arrays; made where absent
   * @internal
   */
  constructor(kernels: { readonly own: Kernels | undefined } = { own: newKernels() }) {
    this.#kernels = kernels.own;
    this.#end = kernels.own === undefined ? 0 : kernels.own.exports.heapStart.value;
  }

  /** Bytes of WebAssembly memory in use by the matrices. */
  get bytes(): number {
    return this.#end;
  }

  /**
   * Copies a matrix in.
   *
   * @param a - the matrix; columns ascend within a row
   * @param options - `hermitian: true` asserts A = A†, which is checked
   * @throws GoodBasisError `not-hermitian` when the assertion fails
   */
  load(a: Csr, options: { readonly hermitian?: boolean } = {}): Resident {
    const hermitian = options.hermitian === true;
    if (hermitian && !isHermitian(a)) {
      throw new GoodBasisError(
        "not-hermitian",
        "SparseArena.load: expected a Hermitian matrix, got one that differs from its adjoint; load it without the flag",
      );
    }
    const resident = {
      rows: a.rows,
      cols: a.cols,
      entries: a.col.length,
      complex: a.im !== undefined,
      hermitian,
      upper: false,
    };
    const kernels = this.#kernels;
    if (kernels === undefined) return this.#keep(resident, { ptr: 0, col: 0, re: 0, im: 0, norms: 0, plain: a });
    const place = this.#reserve(kernels, a.rows, a.col.length, resident.complex);
    const buffer = kernels.exports.memory.buffer;
    new Int32Array(buffer, place.ptr, a.rows + 1).set(a.ptr);
    new Int32Array(buffer, place.col, a.col.length).set(a.col);
    new Float64Array(buffer, place.re, a.re.length).set(a.re);
    if (a.im !== undefined) new Float64Array(buffer, place.im, a.im.length).set(a.im);
    kernels.exports.rowNorms(a.rows, place.ptr, place.re, place.im, place.norms);
    return this.#keep(resident, place);
  }

  /**
   * The product AB with a bound on its rounding; the result stays in the arena.
   *
   * @throws GoodBasisError `shape` when the factors do not fit or are not in this arena
   */
  product(a: Resident, b: Resident): Bounded<Resident> {
    if (a.cols !== b.rows) throw this.#misfit("product", a, b);
    return this.#combine(a, b, false);
  }

  /**
   * The commutator AB − BA with a bound on its rounding; the result stays in the arena. Of two matrices that were loaded
   * as Hermitian only the upper triangle is formed, with half the work and half the memory: the result is anti-Hermitian.
   *
   * @throws GoodBasisError `shape` when the matrices are not square of one order or not in this arena
   */
  commutator(a: Resident, b: Resident): Bounded<Resident> {
    if (a.rows !== a.cols || b.rows !== b.cols || a.rows !== b.rows) throw this.#misfit("commutator", a, b);
    return this.#combine(a, b, true);
  }

  /** The Frobenius norm; not rounded up. Squares beyond the range of doubles overflow or vanish. */
  frobenius(a: Resident): number {
    const place = this.#place(a);
    if (place.plain !== undefined || this.#kernels === undefined) {
      return place.plain === undefined ? 0 : frobenius(place.plain);
    }
    const { exports } = this.#kernels;
    return Math.sqrt(exports.sumOfSquares(a.rows, a.upper, place.ptr, place.col, place.re, place.im));
  }

  /** A copy outside the arena, columns ascending, both triangles. */
  read(a: Resident): Csr {
    const place = this.#place(a);
    if (place.plain !== undefined || this.#kernels === undefined) return place.plain ?? emptyCsr(a);
    const { exports } = this.#kernels;
    exports.sortSparseRows(a.rows, place.ptr, place.col, place.re, place.im);
    const buffer = exports.memory.buffer;
    const doubles = (start: number): Float64Array => new Float64Array(buffer, start, a.entries).slice();
    const csr: Csr = {
      rows: a.rows,
      cols: a.cols,
      ptr: new Int32Array(buffer, place.ptr, a.rows + 1).slice(),
      col: new Int32Array(buffer, place.col, a.entries).slice(),
      re: doubles(place.re),
      im: a.complex ? dropZeros(doubles(place.im)) : undefined,
    };
    return a.upper ? completeAntiHermitian(csr) : csr;
  }

  /** Where the stack of matrices ends now. */
  mark(): ArenaMark {
    return this.#kernels === undefined ? this.#places.size : this.#end;
  }

  /** Frees every matrix that came after the mark; using one of them is refused from then on. */
  release(mark: ArenaMark): void {
    let index = 0;
    for (const [resident, place] of this.#places) {
      if ((this.#kernels === undefined ? index : place.ptr) >= mark) this.#places.delete(resident);
      index++;
    }
    if (this.#kernels !== undefined) this.#end = Math.min(this.#end, mark);
  }

  #combine(a: Resident, b: Resident, commutes: boolean): Bounded<Resident> {
    const left = this.#place(a);
    const right = this.#place(b);
    const upper = commutes && a.hermitian && b.hermitian;
    const complex = a.complex || b.complex;
    const shape = { rows: a.rows, cols: b.cols, complex, hermitian: false };
    const kernels = this.#kernels;
    if (kernels === undefined || left.plain !== undefined || right.plain !== undefined) {
      if (left.plain === undefined || right.plain === undefined) throw this.#misfit("commutator", a, b);
      const { value, error } = commutes
        ? commutatorSparse(left.plain, right.plain)
        : productSparse(left.plain, right.plain);
      const resident = { ...shape, complex: value.im !== undefined, entries: value.col.length, upper: false };
      return { value: this.#keep(resident, { ...left, plain: value }), error };
    }
    const { exports } = kernels;
    let room = exports.productCount(a.rows, left.ptr, left.col, right.ptr);
    if (commutes) room += exports.productCount(b.rows, right.ptr, right.col, left.ptr);
    room = Math.min(room, a.rows * b.cols);
    const start = this.#end;
    const place = this.#reserve(kernels, a.rows, room, complex, b.cols);
    const places = this.#end;
    new Int32Array(exports.memory.buffer, places, b.cols).fill(-1);
    const entries = exports.combineSparse(
      a.rows,
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
    // The upper triangle stands for twice its square, at most.
    const squares = exports.errorSquares.value * (upper ? 2 : 1);
    const most = exports.mostTerms.value;
    // Reserved pages that were not written cost nothing but addresses: moving pays where a good part is left over.
    const settled = entries > 0.75 * room ? place : this.#settle(kernels, start, place, a.rows, entries);
    exports.rowNorms(a.rows, settled.ptr, settled.re, settled.im, settled.norms);
    const error = finishBound({ squares, most }, a, b, { col: { length: upper ? 2 * entries : entries } });
    return { value: this.#keep({ ...shape, entries, upper }, settled), error };
  }

  /** Room for a matrix at the end of the stack, `scratch` integers beyond it. Pages that are reserved but never written cost no memory. */
  #reserve(kernels: Kernels, rows: number, entries: number, complex: boolean, scratch = 0): Place {
    const lengths = [4 * (rows + 1), 8 * rows, 4 * entries, 8 * entries, complex ? 8 * entries : 0, 4 * scratch];
    const [ptr = 0, norms = 0, col = 0, re = 0, im = 0, end = 0] = kernels.stretches(this.#end, lengths);
    this.#end = end;
    return { ptr, norms, col, re, im: complex ? im : 0, plain: undefined };
  }

  /** Moves the stretches of a finished result together, so that what was reserved too much can be used again. */
  #settle(kernels: Kernels, start: number, place: Place, rows: number, entries: number): Place {
    this.#end = start;
    const packed = this.#reserve(kernels, rows, entries, place.im !== 0);
    const bytes = new Uint8Array(kernels.exports.memory.buffer);
    const move = (to: number, from: number, length: number): void => {
      if (to !== from) bytes.copyWithin(to, from, from + length);
    };
    move(packed.col, place.col, 4 * entries);
    move(packed.re, place.re, 8 * entries);
    if (place.im !== 0) move(packed.im, place.im, 8 * entries);
    return packed;
  }

  #keep(resident: Resident, place: Place): Resident {
    this.#places.set(resident, place);
    return resident;
  }

  #place(a: Resident): Place {
    const place = this.#places.get(a);
    if (place !== undefined) return place;
    throw new GoodBasisError(
      "shape",
      `SparseArena: the ${a.rows} × ${a.cols} matrix is not in this arena; load it, or keep it below the released mark`,
    );
  }

  #misfit(where: string, a: Resident, b: Resident): GoodBasisError {
    return new GoodBasisError(
      "shape",
      `SparseArena.${where}: a matrix of ${a.rows} × ${a.cols} and one of ${b.rows} × ${b.cols} do not fit`,
      { left: [a.rows, a.cols], right: [b.rows, b.cols] },
    );
  }
}

const emptyCsr = (a: Resident): Csr => ({
  rows: a.rows,
  cols: a.cols,
  ptr: new Int32Array(a.rows + 1),
  col: new Int32Array(0),
  re: new Float64Array(0),
  im: undefined,
});
