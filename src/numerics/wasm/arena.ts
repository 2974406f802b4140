import { GoodBasisError } from "../../errors.js";
import { commutatorSparse, productSparse } from "../bounded/sparse.js";
import type { Bounded } from "../bounded/types.js";
import type { Csr } from "../csr.js";
import { dropZeros } from "../sparse/build.js";
import { completeAntiHermitian, isHermitian } from "../sparse/hermitian.js";
import { frobenius } from "../sparse/norms.js";
import { requireCsr } from "../sparse/validate.js";
import { ArenaMemory, type Place, type Resident, tooLarge } from "./arena-memory.js";
import { type Kernels, newKernels } from "./runtime.js";

export type { Resident } from "./arena-memory.js";

/** A place in the stack of a {@link SparseArena}, from {@link SparseArena.mark}; to be handed back, not to be looked into. */
export interface ArenaMark {
  /** How many matrices lay below. */
  readonly depth: number;
}

/** What an arena is built on. */
interface ArenaKernels {
  readonly own: Kernels | undefined;
  readonly countedFrom?: number;
}

/** What the arena that gave a mark knows of it. */
interface Marked {
  readonly top: Resident | undefined;
  readonly end: number;
}

/**
 * Sparse matrices that stay in WebAssembly memory, so that products and commutators of large operators cost no copies:
 * an operator is copied in once, results are left where they were formed, and only what is asked for is copied out.
 *
 * Each arena has a memory of its own, which is freed with it. Inside, matrices are stacked: {@link SparseArena.release}
 * frees everything that came after a mark. Memory never shrinks but is used again. Without WebAssembly, and for a matrix for
 * which its memory (four gigabytes at most) does not suffice, the arena keeps plain arrays and works all the same.
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
  readonly #memory: ArenaMemory | undefined;
  /** In the order in which they came; a matrix that is kept in plain arrays stands here itself. */
  readonly #places = new Map<Resident, Place | Csr>();
  readonly #stack: Resident[] = [];
  readonly #marks = new WeakMap<ArenaMark, Marked>();

  /**
   * @param kernels - an instance of its own, or `undefined` for plain arrays; made where absent. `countedFrom` are the bytes of
   * room from which on the entries of a result are counted before they are formed
   * @internal
   */
  constructor(kernels: ArenaKernels = { own: newKernels() }) {
    this.#memory = kernels.own && new ArenaMemory(kernels.own, kernels.countedFrom);
  }

  /** Bytes of WebAssembly memory in use by the matrices. */
  get bytes(): number {
    return this.#memory?.end ?? 0;
  }

  /**
   * Copies a matrix in.
   *
   * @param a - the matrix; columns ascend within a row
   * @param options - `hermitian: true` asserts A = A†, which is checked
   * @throws GoodBasisError `shape` when it is not one (columns that are out of range or do not ascend included), `not-finite`
   * for an entry that is NaN or infinite, `not-hermitian` when the assertion fails
   */
  load(a: Csr, options: { readonly hermitian?: boolean } = {}): Resident {
    requireCsr("SparseArena.load", a);
    const hermitian = options?.hermitian === true;
    if (hermitian && !isHermitian(a)) {
      throw new GoodBasisError(
        "not-hermitian",
        "SparseArena.load: expected a Hermitian matrix, got one that differs from its adjoint; load it without the flag",
      );
    }
    const memory = this.#memory;
    const place = memory?.attempt(() => memory.copyIn(a)) ?? copyOf(a);
    return this.#keep({ ...traitsOf(a), hermitian, upper: false }, place);
  }

  /**
   * The product AB with a bound on its rounding; the result stays in the arena. A factor of which only the upper triangle is
   * stored is written out for the time of the call.
   *
   * @throws GoodBasisError `shape` when the factors do not fit or are not in this arena; `memory` when the result has no room
   * in WebAssembly memory nor in plain arrays
   */
  product(a: Resident, b: Resident): Bounded<Resident> {
    const [left, right] = [this.#place("product", a), this.#place("product", b)];
    if (a.cols !== b.rows) throw misfit("product", a, b);
    return this.#combine(false, a, left, b, right);
  }

  /**
   * The commutator AB − BA with a bound on its rounding; the result stays in the arena. Of two matrices that were loaded
   * as Hermitian only the upper triangle is formed, with half the work and half the memory: the result is anti-Hermitian.
   * A factor of which only the upper triangle is stored is written out for the time of the call.
   *
   * @throws GoodBasisError `shape` when the matrices are not square of one order or not in this arena; `memory` when the result
   * has no room in WebAssembly memory nor in plain arrays
   */
  commutator(a: Resident, b: Resident): Bounded<Resident> {
    const [left, right] = [this.#place("commutator", a), this.#place("commutator", b)];
    if (a.rows !== a.cols || b.rows !== b.cols || a.rows !== b.rows) throw misfit("commutator", a, b);
    return this.#combine(true, a, left, b, right);
  }

  /** The Frobenius norm; not rounded up. Squares beyond the range of doubles overflow or vanish. */
  frobenius(a: Resident): number {
    const place = this.#place("frobenius", a);
    if (isPlain(place)) return frobenius(place);
    return Math.sqrt(this.#memory?.sumOfSquares({ resident: a, place }) ?? 0);
  }

  /** A copy outside the arena, columns ascending, both triangles. */
  read(a: Resident): Csr {
    return copyOf(this.#stored(a, this.#place("read", a)));
  }

  /** Where the stack of matrices ends now. */
  mark(): ArenaMark {
    const mark = { depth: this.#stack.length };
    this.#marks.set(mark, { top: this.#stack[mark.depth - 1], end: this.bytes });
    return mark;
  }

  /**
   * Frees every matrix that came after the mark; using one of them is refused from then on. The mark stays good until an older
   * one is released.
   *
   * @throws GoodBasisError `option` for what is no mark of this arena, or one that went with an older mark
   */
  release(mark: ArenaMark): void {
    const marked = typeof mark === "object" && mark !== null ? this.#marks.get(mark) : undefined;
    const depth = marked === undefined ? -1 : mark.depth;
    if (marked === undefined || depth > this.#stack.length || this.#stack[depth - 1] !== marked.top) {
      const got = marked === undefined ? "something else" : "one that was freed with an older mark";
      throw new GoodBasisError(
        "option",
        `SparseArena.release: expected a mark of this arena, got ${got}; pass what arena.mark() returned, the newest first`,
      );
    }
    for (const resident of this.#stack.splice(depth)) this.#places.delete(resident);
    if (this.#memory !== undefined) this.#memory.end = marked.end;
  }

  #combine(commutes: boolean, a: Resident, left: Place | Csr, b: Resident, right: Place | Csr): Bounded<Resident> {
    const memory = this.#memory;
    if (memory !== undefined && !isPlain(left) && !isPlain(right)) {
      const [x, y] = [
        { resident: a, place: left },
        { resident: b, place: right },
      ];
      const found = memory.attempt(() => memory.combine(commutes, x, y));
      if (found !== undefined) return { value: this.#keep(found.resident, found.place), error: found.error };
    }
    try {
      const [x, y] = [this.#stored(a, left), this.#stored(b, right)];
      const { value, error } = commutes ? commutatorSparse(x, y) : productSparse(x, y);
      return { value: this.#keep({ ...traitsOf(value), hermitian: false, upper: false }, value), error };
    } catch (error) {
      if (!(error instanceof RangeError)) throw error;
      throw tooLarge(commutes ? "commutator" : "product", a, b);
    }
  }

  /** A matrix with both triangles: itself, or views of memory that last until it grows. */
  #stored(resident: Resident, place: Place | Csr): Csr {
    if (isPlain(place) || this.#memory === undefined) return isPlain(place) ? place : emptyCsr(resident);
    const csr = this.#memory.view({ resident, place });
    return resident.upper ? completeAntiHermitian(csr) : csr;
  }

  #keep(resident: Resident, place: Place | Csr): Resident {
    this.#places.set(resident, place);
    this.#stack.push(resident);
    return resident;
  }

  #place(where: string, a: Resident): Place | Csr {
    const place = this.#places.get(a);
    if (place !== undefined) return place;
    throw new GoodBasisError(
      "shape",
      `SparseArena.${where}: expected a matrix of this arena, got another value, or one that was freed; load it, or keep it below ` +
        "the released mark",
    );
  }
}

const isPlain = (place: Place | Csr): place is Csr => "rows" in place;

function traitsOf(a: Csr): Pick<Resident, "rows" | "cols" | "entries" | "complex"> {
  return { rows: a.rows, cols: a.cols, entries: a.col.length, complex: a.im !== undefined };
}

function copyOf({ rows, cols, ptr, col, re, im }: Csr): Csr {
  return { rows, cols, ptr: ptr.slice(), col: col.slice(), re: re.slice(), im: dropZeros(im?.slice()) };
}

const emptyCsr = ({ rows, cols }: Resident): Csr => ({
  rows,
  cols,
  ptr: new Int32Array(rows + 1),
  col: new Int32Array(0),
  re: new Float64Array(0),
  im: undefined,
});

function misfit(where: string, a: Resident, b: Resident): GoodBasisError {
  return new GoodBasisError(
    "shape",
    `SparseArena.${where}: a matrix of ${a.rows} × ${a.cols} and one of ${b.rows} × ${b.cols} do not fit`,
    { left: [a.rows, a.cols], right: [b.rows, b.cols] },
  );
}
