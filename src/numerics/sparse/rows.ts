import type { Csr } from "../csr.js";
import { dropZeros } from "./build.js";

/**
 * The dense accumulator of a row-wise sparse product: one row at a time is scattered into it, then gathered with ascending
 * columns (Gustavson, ACM Trans. Math. Softw. 4, 250 (1978)).
 *
 * The caller scatters: where `mark[c]` is not the row's tag, it sets it, appends c to `list` and stores; else it adds.
 */
export class RowAccumulator {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly mark: Int32Array;
  readonly list: Int32Array;
  /** Marks of row r are `firstTag + r`. */
  readonly firstTag: number;
  readonly #rows: number;
  readonly #cols: number;
  readonly #ptr: Int32Array;
  readonly #complex: boolean;
  #col: Int32Array;
  #outRe: Float64Array;
  #outIm: Float64Array;
  #filled = 0;

  /**
   * @param rows - rows of the result
   * @param cols - columns of the result
   * @param complex - whether imaginary parts are accumulated
   * @param expected - a guess of the number of entries
   */
  constructor(rows: number, cols: number, complex: boolean, expected: number) {
    const scratch = scratchFor(rows, cols, complex);
    this.re = scratch.re;
    this.im = scratch.im;
    this.mark = scratch.mark;
    this.list = scratch.list;
    this.firstTag = scratch.firstTag;
    this.#rows = rows;
    this.#cols = cols;
    this.#ptr = new Int32Array(rows + 1);
    this.#complex = complex;
    const capacity = Math.max(8, Math.min(expected, rows * cols));
    this.#col = new Int32Array(capacity);
    this.#outRe = new Float64Array(capacity);
    this.#outIm = new Float64Array(complex ? capacity : 0);
  }

  /** Appends the accumulated row, whose `count` columns stand in `list`. */
  finishRow(row: number, count: number): void {
    if (this.#filled + count > this.#col.length) this.#grow(this.#filled + count);
    const list = this.list;
    if (count * 8 > this.#cols) {
      let k = 0;
      const tag = this.firstTag + row;
      for (let c = 0; c < this.#cols; c++) if (this.mark[c] === tag) list[k++] = c;
    } else if (count > 24) {
      list.subarray(0, count).sort();
    } else {
      sortShort(list, count);
    }
    let f = this.#filled;
    for (let k = 0; k < count; k++, f++) {
      const c = list[k] as number;
      this.#col[f] = c;
      this.#outRe[f] = this.re[c] as number;
      if (this.#complex) this.#outIm[f] = this.im[c] as number;
    }
    this.#filled = f;
    this.#ptr[row + 1] = f;
  }

  /** The finished matrix. */
  finish(): Csr {
    const used = this.#filled;
    const exact = used === this.#col.length;
    const im = this.#complex ? (exact ? this.#outIm : this.#outIm.slice(0, used)) : undefined;
    return {
      rows: this.#rows,
      cols: this.#cols,
      ptr: this.#ptr,
      col: exact ? this.#col : this.#col.slice(0, used),
      re: exact ? this.#outRe : this.#outRe.slice(0, used),
      im: dropZeros(im),
    };
  }

  #grow(needed: number): void {
    const capacity = Math.max(needed, 2 * this.#col.length);
    const col = new Int32Array(capacity);
    col.set(this.#col);
    this.#col = col;
    const re = new Float64Array(capacity);
    re.set(this.#outRe);
    this.#outRe = re;
    if (!this.#complex) return;
    const im = new Float64Array(capacity);
    im.set(this.#outIm);
    this.#outIm = im;
  }
}

/** Dense rows to accumulate in; tags only ever grow, so that nothing need be cleared. */
interface Scratch {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly mark: Int32Array;
  readonly list: Int32Array;
  nextTag: number;
}

const NO_IMAGINARY_PART = new Float64Array(0);
const LARGEST_TAG = 2 ** 31 - 1;

/** Kept from product to product, since clearing it would cost more than most products; every place is written before it is read. */
let kept: Scratch = {
  re: new Float64Array(64),
  im: new Float64Array(64),
  mark: new Int32Array(64).fill(-1),
  list: new Int32Array(64),
  nextTag: 0,
};

function scratchFor(rows: number, cols: number, complex: boolean): Omit<Scratch, "nextTag"> & { firstTag: number } {
  if (kept.mark.length < cols || kept.nextTag > LARGEST_TAG - rows) {
    const size = Math.max(cols, kept.mark.length);
    kept = {
      re: new Float64Array(size),
      im: new Float64Array(size),
      mark: new Int32Array(size).fill(-1),
      list: new Int32Array(size),
      nextTag: 0,
    };
  }
  const firstTag = kept.nextTag;
  kept.nextTag += rows;
  return { re: kept.re, im: complex ? kept.im : NO_IMAGINARY_PART, mark: kept.mark, list: kept.list, firstTag };
}

function sortShort(list: Int32Array, count: number): void {
  for (let k = 1; k < count; k++) {
    const value = list[k] as number;
    let m = k - 1;
    while (m >= 0 && (list[m] as number) > value) {
      list[m + 1] = list[m] as number;
      m--;
    }
    list[m + 1] = value;
  }
}
