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
  const out = outgoing(energies, v, indices, levelOf, level, energy);
  const squares = new LevelSums(levelEnergies.length);
  return {
    w: out.bare.rows === 1 ? scalarProduct(out) : multiply(out.scaled, adjoint(out.bare)),
    scale: out.scale,
    first: firstGuard(out, levelOf, energy, levelEnergies, squares),
    second: secondGuard(out, v, meanShift(v, indices), levelOf, level, energy, levelEnergies, squares),
  };
}

/** The product of scaled and bare† for a single vector. */
function scalarProduct({ bare, scaled }: Outgoing): Csr {
  const count = bare.re.length;
  let re = 0;
  let im = 0;
  for (let q = 0; q < count; q++) {
    const x = scaled.re[q] as number;
    const u = bare.re[q] as number;
    if (bare.im === undefined || scaled.im === undefined) {
      re += x * u;
    } else {
      const y = scaled.im[q] as number;
      const v = 0 - (bare.im[q] as number);
      re += x * u - y * v;
      im += x * v + y * u;
    }
  }
  const filled = Math.min(1, count);
  return {
    rows: 1,
    cols: 1,
    ptr: Int32Array.of(0, filled),
    col: new Int32Array(filled),
    re: filled === 1 ? Float64Array.of(re) : new Float64Array(0),
    im: im === 0 ? undefined : Float64Array.of(im),
  };
}

interface Outgoing {
  /** V_ik, k outside the level, columns renumbered to those that occur. */
  readonly bare: Csr;
  /** V_ik / (E0 − E_k). */
  readonly scaled: Csr;
  /** The sector's vector behind each column. */
  readonly columns: Int32Array;
  readonly scale: number;
}

function outgoing(
  energies: Float64Array,
  v: Csr,
  indices: Int32Array,
  levelOf: Int32Array,
  level: number,
  energy: number,
): Outgoing {
  const rows = indices.length;
  const ptr = new Int32Array(rows + 1);
  let total = 0;
  for (let r = 0; r < rows; r++) {
    const i = indices[r] as number;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      if (levelOf[v.col[p] as number] !== level) total++;
    }
    ptr[r + 1] = total;
  }
  const space = borrow(v.rows, 1);
  const { mark: place, list } = space;
  const tag = space.firstTag;
  const source = new Int32Array(total);
  let at = 0;
  let distinct = 0;
  for (let r = 0; r < rows; r++) {
    const i = indices[r] as number;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      const k = v.col[p] as number;
      if (levelOf[k] === level) continue;
      source[at++] = p;
      if (place[k] === tag) continue;
      place[k] = tag;
      list[distinct++] = k;
    }
  }
  // A single row of V is in order already.
  const columns = list.slice(0, distinct);
  if (rows > 1) columns.sort();
  for (let c = 0; c < distinct; c++) list[columns[c] as number] = c;
  const col = new Int32Array(total);
  const re = new Float64Array(total);
  const im = v.im === undefined ? undefined : new Float64Array(total);
  const scaledRe = new Float64Array(total);
  const scaledIm = v.im === undefined ? undefined : new Float64Array(total);
  let scale = 0;
  for (let r = 0; r < rows; r++) {
    let bare = 0;
    let weighted = 0;
    for (let q = ptr[r] as number; q < (ptr[r + 1] as number); q++) {
      const p = source[q] as number;
      const k = v.col[p] as number;
      const weight = 1 / (energy - (energies[k] as number));
      const x = v.re[p] as number;
      const y = v.im === undefined ? 0 : (v.im[p] as number);
      col[q] = list[k] as number;
      re[q] = x;
      scaledRe[q] = x * weight;
      if (im !== undefined && scaledIm !== undefined) {
        im[q] = y;
        scaledIm[q] = y * weight;
      }
      const square = x * x + y * y;
      bare += square;
      weighted += square * weight * weight;
    }
    scale = Math.max(scale, Math.sqrt(bare) * Math.sqrt(weighted));
  }
  const shape = { rows, cols: columns.length, ptr, col };
  return { bare: { ...shape, re, im }, scaled: { ...shape, re: scaledRe, im: scaledIm }, columns, scale };
}

function firstGuard(
  out: Outgoing,
  levelOf: Int32Array,
  energy: number,
  levelEnergies: Float64Array,
  squares: LevelSums,
): GuardRatio {
  const { bare, columns } = out;
  for (let q = 0; q < bare.re.length; q++) {
    const x = bare.re[q] as number;
    const y = bare.im === undefined ? 0 : (bare.im[q] as number);
    squares.add(levelOf[columns[bare.col[q] as number] as number] as number, x * x, y * y);
  }
  return squares.largestRatio(energy, levelEnergies);
}

function secondGuard(
  out: Outgoing,
  v: Csr,
  shift: number,
  levelOf: Int32Array,
  level: number,
  energy: number,
  levelEnergies: Float64Array,
  squares: LevelSums,
): GuardRatio {
  const rows = out.scaled.rows;
  const space = borrow(v.rows, rows);
  const { re, im, list } = space;
  for (let r = 0; r < rows; r++) {
    const tag = space.firstTag + r;
    const reached = v.im === undefined ? imageReal(out, r, v, space, tag) : imageComplex(out, r, v, v.im, space, tag);
    const count = shift === 0 ? reached : subtractShift(out, r, shift, space, tag, reached);
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

/** Mean of V's diagonal elements over the level's vectors of the sector. */
function meanShift(v: Csr, indices: Int32Array): number {
  let sum = 0;
  for (const i of indices) {
    const e = findEntry(v, i, i);
    if (e >= 0) sum += v.re[e] as number;
  }
  return sum / indices.length;
}

/** Takes v R V off the row in the scratch; returns the number of vectors that it reaches then. */
function subtractShift(
  { scaled, columns }: Outgoing,
  r: number,
  shift: number,
  { re, im, mark, list }: Scratch,
  tag: number,
  reached: number,
): number {
  let count = reached;
  for (let q = scaled.ptr[r] as number; q < (scaled.ptr[r + 1] as number); q++) {
    const k = columns[scaled.col[q] as number] as number;
    if (mark[k] !== tag) {
      mark[k] = tag;
      list[count++] = k;
      re[k] = 0;
      im[k] = 0;
    }
    re[k] = (re[k] as number) - shift * (scaled.re[q] as number);
    if (scaled.im !== undefined) im[k] = (im[k] as number) - shift * (scaled.im[q] as number);
  }
  return count;
}

/** Row r of V R V with all columns, V real, left in the scratch; returns the number of vectors that it reaches. */
function imageReal({ scaled, columns }: Outgoing, r: number, v: Csr, space: Scratch, tag: number): number {
  const { re, mark, list } = space;
  const { ptr, col, re: values } = v;
  let count = 0;
  for (let q = scaled.ptr[r] as number; q < (scaled.ptr[r + 1] as number); q++) {
    const k = columns[scaled.col[q] as number] as number;
    const a = scaled.re[q] as number;
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
  { scaled, columns }: Outgoing,
  r: number,
  v: Csr,
  imaginary: Float64Array,
  space: Scratch,
  tag: number,
): number {
  const { re, im, mark, list } = space;
  const { ptr, col, re: values } = v;
  let count = 0;
  for (let q = scaled.ptr[r] as number; q < (scaled.ptr[r + 1] as number); q++) {
    const k = columns[scaled.col[q] as number] as number;
    const a = scaled.re[q] as number;
    const b = scaled.im === undefined ? 0 : (scaled.im[q] as number);
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
