import type { Csr } from "../numerics/csr.js";
import { adjoint, findEntry, multiply } from "../numerics/sparse.js";

/** The largest ratio of one kind in the denominators guard, and the level it is with. */
export interface GuardRatio {
  /** ‖P_k X P_n‖_F / |E_k − E_n|, an upper bound up to the rounding of its evaluation. */
  readonly ratio: number;
  /** Place of the other level k; −1 if nothing is coupled. */
  readonly level: number;
}

/** What reaches out of a level inside one sector, and what comes back at second order. */
export interface SecondOrder {
  /** W = V R V over the vectors of the level: W_ij = Σ_k V_ik V_kj / (E0 − E_k), k outside the level. */
  readonly w: Csr;
  /** Largest √(Σ|V_ik|²) √(Σ|V_ik/(E0 − E_k)|²) over the vectors i: the scale of W. */
  readonly scale: number;
  /** Blockwise over the other levels of the sector: ‖P_k V P_n‖ / |E_k − E_n|. */
  readonly first: GuardRatio;
  /** Blockwise: ‖P_k (V − v) R V P_n‖ / |E_k − E_n|, v the mean first-order shift of the level here: an offset of V changes nothing. */
  readonly second: GuardRatio;
}

/**
 * The second-order effective operator of a level inside one sector, with the blockwise denominators guard.
 *
 * R = Σ_{k outside the level} |k⟩⟨k| / (E0 − E_k) excludes the whole level (Bloch, Nucl. Phys. 6, 329 (1958);
 * Messiah, Quantum Mechanics II, ch. XVI). V conserves the sector, so only its own vectors are intermediate states.
 *
 * @param energies - H0 of each vector of the sector
 * @param v - the perturbation in the sector's basis
 * @param indices - the vectors of the level
 * @param levelOf - level number of each vector of the sector
 * @param level - number of the level under study
 * @param energy - its energy E0
 * @param levelEnergies - energy of every level
 */
export function secondOrder(
  energies: Float64Array,
  v: Csr,
  indices: Int32Array,
  levelOf: Int32Array,
  level: number,
  energy: number,
  levelEnergies: Float64Array,
): SecondOrder {
  const out: Outside = { v, indices, energies, energy, levelOf, level };
  const squares = new LevelSums(levelEnergies.length);
  const first = firstGuard(out, levelEnergies, squares);
  return new Outward(out, scaleOf(out), first, secondGuard(out, levelEnergies, squares));
}

/** W is made when it is first asked for: by what is still together after V, and where V tells states apart. */
class Outward implements SecondOrder {
  readonly scale: number;
  readonly first: GuardRatio;
  readonly second: GuardRatio;
  readonly #out: Outside;
  #w: Csr | undefined;

  constructor(out: Outside, scale: number, first: GuardRatio, second: GuardRatio) {
    this.#out = out;
    this.scale = scale;
    this.first = first;
    this.second = second;
  }

  get w(): Csr {
    this.#w ??= effective(this.#out);
    return this.#w;
  }
}

/** V between the vectors of a part and those outside its level. */
interface Outside {
  readonly v: Csr;
  /** The part's vectors, as rows of V. */
  readonly indices: Int32Array;
  /** Energy of every vector of the sector. */
  readonly energies: Float64Array;
  readonly energy: number;
  readonly levelOf: Int32Array;
  readonly level: number;
}

/** 1 / (E0 − E_k) for column k of V. */
function weight({ energies, energy }: Outside, k: number): number {
  return 1 / (energy - (energies[k] as number));
}

/** W = (V R) V†. */
function effective(out: Outside): Csr {
  const { v, indices, levelOf, level } = out;
  const rows = indices.length;
  const ptr = new Int32Array(rows + 1);
  const source: number[] = [];
  for (let r = 0; r < rows; r++) {
    const i = indices[r] as number;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      if (levelOf[v.col[p] as number] !== level) source.push(p);
    }
    ptr[r + 1] = source.length;
  }
  const shape = { rows, cols: v.cols, ptr, col: Int32Array.from(source, (p) => v.col[p] as number) };
  const part = (values: Float64Array): Float64Array => Float64Array.from(source, (p) => values[p] as number);
  const weighted = (values: Float64Array): Float64Array =>
    values.map((x, q) => x * weight(out, shape.col[q] as number));
  const re = part(v.re);
  const im = v.im && part(v.im);
  return multiply({ ...shape, re: weighted(re), im: im && weighted(im) }, adjoint({ ...shape, re, im }));
}

/** Largest √(Σ|V_ik|²) √(Σ|V_ik/(E0 − E_k)|²) over the vectors i. */
function scaleOf(out: Outside): number {
  const { v, indices, levelOf, level } = out;
  let scale = 0;
  for (let r = 0; r < indices.length; r++) {
    const i = indices[r] as number;
    let bare = 0;
    let weighted = 0;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      const k = v.col[p] as number;
      if (levelOf[k] === level) continue;
      const w = weight(out, k);
      const x = v.re[p] as number;
      const y = v.im === undefined ? 0 : (v.im[p] as number);
      const square = x * x + y * y;
      bare += square;
      weighted += square * w * w;
    }
    scale = Math.max(scale, Math.sqrt(bare) * Math.sqrt(weighted));
  }
  return scale;
}

function firstGuard(out: Outside, levelEnergies: Float64Array, squares: LevelSums): GuardRatio {
  const { v, indices, levelOf, level, energy } = out;
  for (let r = 0; r < indices.length; r++) {
    const i = indices[r] as number;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      const k = levelOf[v.col[p] as number] as number;
      if (k === level) continue;
      const x = v.re[p] as number;
      const y = v.im === undefined ? 0 : (v.im[p] as number);
      squares.add(k, x * x, y * y);
    }
  }
  return squares.largestRatio(energy, levelEnergies);
}

function secondGuard(out: Outside, levelEnergies: Float64Array, squares: LevelSums): GuardRatio {
  const { v, indices, levelOf, level, energy } = out;
  const space = borrow(v.rows, indices.length);
  const { re, im, list } = space;
  const shift = meanShift(v, indices);
  for (let r = 0; r < indices.length; r++) {
    const tag = space.firstTag + r;
    const i = indices[r] as number;
    const count =
      v.im === undefined ? imageReal(out, i, shift, space, tag) : imageComplex(out, i, v.im, shift, space, tag);
    for (let t = 0; t < count; t++) {
      const to = list[t] as number;
      const k = levelOf[to] as number;
      if (k === level) continue;
      const x = re[to] as number;
      const y = v.im === undefined ? 0 : (im[to] as number);
      squares.add(k, x * x, y * y);
    }
  }
  return squares.largestRatio(energy, levelEnergies);
}

/** Mean of V's diagonal elements over the level's vectors. */
function meanShift(v: Csr, indices: Int32Array): number {
  let sum = 0;
  for (const i of indices) {
    const e = findEntry(v, i, i);
    if (e >= 0) sum += v.re[e] as number;
  }
  return sum / indices.length;
}

/** Row i of V R (V − v) with all columns, V real, left in the scratch; returns the number of vectors that it reaches. */
function imageReal(out: Outside, i: number, shift: number, space: Scratch, tag: number): number {
  const { levelOf, level } = out;
  const { re, mark, list } = space;
  const { ptr, col, re: values } = out.v;
  let count = 0;
  for (let q = ptr[i] as number; q < (ptr[i + 1] as number); q++) {
    const k = col[q] as number;
    if (levelOf[k] === level) continue;
    const a = (values[q] as number) * weight(out, k);
    if (mark[k] !== tag) {
      mark[k] = tag;
      list[count++] = k;
      re[k] = 0;
    }
    re[k] = (re[k] as number) - shift * a;
    const end = ptr[k + 1] as number;
    for (let p = ptr[k] as number; p < end; p++) {
      const to = col[p] as number;
      if (mark[to] !== tag) {
        mark[to] = tag;
        list[count++] = to;
        re[to] = 0;
      }
      re[to] = (re[to] as number) + a * (values[p] as number);
    }
  }
  return count;
}

/** The same for complex V. */
function imageComplex(
  out: Outside,
  i: number,
  imaginary: Float64Array,
  shift: number,
  space: Scratch,
  tag: number,
): number {
  const { levelOf, level } = out;
  const { re, im, mark, list } = space;
  const { ptr, col, re: values } = out.v;
  let count = 0;
  for (let q = ptr[i] as number; q < (ptr[i + 1] as number); q++) {
    const k = col[q] as number;
    if (levelOf[k] === level) continue;
    const w = weight(out, k);
    const a = (values[q] as number) * w;
    const b = (imaginary[q] as number) * w;
    if (mark[k] !== tag) {
      mark[k] = tag;
      list[count++] = k;
      re[k] = 0;
      im[k] = 0;
    }
    re[k] = (re[k] as number) - shift * a;
    im[k] = (im[k] as number) - shift * b;
    const end = ptr[k + 1] as number;
    for (let p = ptr[k] as number; p < end; p++) {
      const to = col[p] as number;
      if (mark[to] !== tag) {
        mark[to] = tag;
        list[count++] = to;
        re[to] = 0;
        im[to] = 0;
      }
      const x = values[p] as number;
      const y = imaginary[p] as number;
      re[to] = (re[to] as number) + a * x - b * y;
      im[to] = (im[to] as number) + a * y + b * x;
    }
  }
  return count;
}

/** Sums of squares by level; only the levels that occur cost anything. */
class LevelSums {
  readonly #sums: Float64Array;
  readonly #mark: Int32Array;
  readonly #list: Int32Array;
  #tag: number;
  #count = 0;

  constructor(levels: number) {
    const { re, mark, list, firstTag } = borrow(levels, 2, true);
    this.#sums = re;
    this.#mark = mark;
    this.#list = list;
    this.#tag = firstTag;
  }

  /** Adds a square and another one to the sum of a level. */
  add(level: number, first: number, second: number): void {
    if (this.#mark[level] !== this.#tag) {
      this.#mark[level] = this.#tag;
      this.#list[this.#count++] = level;
      this.#sums[level] = 0;
    }
    this.#sums[level] = (this.#sums[level] as number) + first + second;
  }

  /** The largest ratio of a root to the distance of its level; clears the sums. */
  largestRatio(energy: number, levelEnergies: Float64Array): GuardRatio {
    let ratio = 0;
    let level = -1;
    for (let t = 0; t < this.#count; t++) {
      const k = this.#list[t] as number;
      const value = Math.sqrt(this.#sums[k] as number) / Math.abs((levelEnergies[k] as number) - energy);
      if (value > ratio) {
        ratio = value;
        level = k;
      }
    }
    this.#tag++;
    this.#count = 0;
    return { ratio, level };
  }
}

/** A dense row with a tag for every place that has been written; tags only ever grow, so that nothing need be cleared. */
interface Scratch {
  readonly re: Float64Array;
  readonly im: Float64Array;
  readonly mark: Int32Array;
  readonly list: Int32Array;
  readonly firstTag: number;
}

interface Kept extends Omit<Scratch, "firstTag"> {
  nextTag: number;
}

const LARGEST_TAG = 2 ** 31 - 1;

/** Kept from call to call, one over a sector's vectors and one over levels; every place is written before it is read. */
const kept: { vectors: Kept; levels: Kept } = { vectors: makeKept(64), levels: makeKept(64) };

function makeKept(size: number): Kept {
  return {
    re: new Float64Array(size),
    im: new Float64Array(size),
    mark: new Int32Array(size).fill(-1),
    list: new Int32Array(size),
    nextTag: 0,
  };
}

/** A scratch of at least the given size, with so many tags that have not been used in it. */
function borrow(size: number, tags: number, levels = false): Scratch {
  const place = levels ? "levels" : "vectors";
  let space = kept[place];
  if (space.mark.length < size || space.nextTag > LARGEST_TAG - tags) {
    space = makeKept(Math.max(size, 2 * space.mark.length));
    kept[place] = space;
  }
  const firstTag = space.nextTag;
  space.nextTag += tags;
  return { re: space.re, im: space.im, mark: space.mark, list: space.list, firstTag };
}
