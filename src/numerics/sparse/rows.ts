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
  readonly #bits: Int32Array;
  #col: Int32Array;
  #outRe: Float64Array;
  #outIm: Float64Array;
  #filled = 0;
  /** Whether the rows are gathered in arrays that the next product will use again. */
  #borrowed = true;

  /**
   * @param rows - rows of the result
   * @param cols - columns of the result
   * @param complex - whether imaginary parts are accumulated
   */
  constructor(rows: number, cols: number, complex: boolean) {
    const { scratch, firstTag } = scratchFor(rows, cols);
    this.re = scratch.re;
    this.im = complex ? scratch.im : NO_IMAGINARY_PART;
    this.mark = scratch.mark;
    this.list = scratch.list;
    this.firstTag = firstTag;
    this.#bits = scratch.bits;
    this.#rows = rows;
    this.#cols = cols;
    this.#ptr = new Int32Array(rows + 1);
    this.#complex = complex;
    this.#col = GATHERED.col;
    this.#outRe = GATHERED.re;
    this.#outIm = GATHERED.im;
  }

  /** Appends the accumulated row, whose `count` columns stand in `list`. */
  finishRow(row: number, count: number): void {
    const list = this.list;
    sortColumns(list, count, this.#cols, this.#bits);
    const first = this.#filled;
    if (first + count > this.#col.length) this.#grow(first + count);
    const col = this.#col;
    const outRe = this.#outRe;
    const re = this.re;
    for (let k = 0; k < count; k++) {
      const c = list[k] as number;
      col[first + k] = c;
      outRe[first + k] = re[c] as number;
    }
    if (this.#complex) {
      const outIm = this.#outIm;
      const im = this.im;
      for (let k = 0; k < count; k++) outIm[first + k] = im[list[k] as number] as number;
    }
    this.#filled = first + count;
    this.#ptr[row + 1] = first + count;
  }

  /** The finished matrix. */
  finish(): Csr {
    const used = this.#filled;
    const exact = !this.#borrowed && used === this.#col.length;
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
    const re = new Float64Array(capacity);
    re.set(this.#outRe);
    if (this.#complex) {
      const im = new Float64Array(capacity);
      im.set(this.#outIm);
      this.#outIm = im;
    }
    this.#col = col;
    this.#outRe = re;
    this.#borrowed = false;
  }
}

/** Dense rows to accumulate in; tags only ever grow, so that nothing need be cleared. */
interface Scratch {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly mark: Int32Array;
  readonly list: Int32Array;
  /** One bit a column, all zero between rows. */
  readonly bits: Int32Array;
  nextTag: number;
}

const NO_IMAGINARY_PART = new Float64Array(0);
const LARGEST_TAG = 2 ** 31 - 1;

/** Results up to this many entries are gathered here before they are copied; larger ones get arrays of their own. */
const KEPT_ENTRIES = 2 ** 17;
const GATHERED = {
  col: new Int32Array(KEPT_ENTRIES),
  re: new Float64Array(KEPT_ENTRIES),
  im: new Float64Array(KEPT_ENTRIES),
};

/** Kept from product to product, since clearing it would cost more than most products; every place is written before it is read. */
let kept: Scratch = makeScratch(64);

function makeScratch(size: number): Scratch {
  return {
    re: new Float64Array(size),
    im: new Float64Array(size),
    mark: new Int32Array(size).fill(-1),
    list: new Int32Array(size),
    bits: new Int32Array((size + 31) >> 5),
    nextTag: 0,
  };
}

function scratchFor(rows: number, cols: number): { scratch: Scratch; firstTag: number } {
  if (kept.mark.length < cols || kept.nextTag > LARGEST_TAG - rows)
    kept = makeScratch(Math.max(cols, kept.mark.length));
  const firstTag = kept.nextTag;
  kept.nextTag += rows;
  return { scratch: kept, firstTag };
}

/** Sorts the first `count` numbers of the list, all different and below `cols`. */
function sortColumns(list: Int32Array, count: number, cols: number, bits: Int32Array): void {
  let sorted = 1;
  while (sorted < count && (list[sorted - 1] as number) < (list[sorted] as number)) sorted++;
  if (sorted >= count) return;
  if (count <= 16) sortShort(list, sorted, count);
  else if (cols <= 256 * count) sortByBits(list, count, cols, bits);
  else list.subarray(0, count).sort();
}

/** Insertion sort of a list whose first `sorted` numbers are in order. */
function sortShort(list: Int32Array, sorted: number, count: number): void {
  for (let k = sorted; k < count; k++) {
    const value = list[k] as number;
    let m = k - 1;
    while (m >= 0 && (list[m] as number) > value) {
      list[m + 1] = list[m] as number;
      m--;
    }
    list[m + 1] = value;
  }
}

/** Marks every column by one bit and reads the bits off in order. */
function sortByBits(list: Int32Array, count: number, cols: number, bits: Int32Array): void {
  for (let k = 0; k < count; k++) {
    const c = list[k] as number;
    bits[c >> 5] = (bits[c >> 5] as number) | (1 << (c & 31));
  }
  const words = (cols + 31) >> 5;
  let k = 0;
  for (let w = 0; w < words; w++) {
    let word = bits[w] as number;
    if (word === 0) continue;
    bits[w] = 0;
    while (word !== 0) {
      const lowest = word & -word;
      list[k++] = (w << 5) | (31 - Math.clz32(lowest));
      word ^= lowest;
    }
  }
}
