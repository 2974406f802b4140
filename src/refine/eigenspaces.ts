import { type Complex, modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { hermitianEigen } from "../numerics/eigen.js";
import { type Components, connectedComponents } from "./components.js";
import { orthonormalityDefect } from "./gram.js";
import { type Group, type GroupOptions, sortedGroups } from "./groups.js";
import { normalEigen } from "./normal.js";
import { type Cycle, cycleThrough, solveCycle } from "./orbits.js";
import { rowRange } from "./rotate.js";

/** An eigenspace of an operator inside a block. */
export interface Eigenspace {
  /** The eigenvalue: middle of the values found in this space. */
  readonly value: Complex;
  /** Largest distance of a found value from `value`. */
  readonly spread: number;
  /** Number of vectors. */
  readonly size: number;
  /** Orthonormal vectors as rows of coefficients over the block's own basis. */
  readonly rows: Csr;
  /** Where every row is one basis vector of the block with coefficient 1: which; otherwise undefined. */
  readonly indices: Int32Array | undefined;
}

/** A block taken apart by one operator. */
export interface Split {
  /** Hermitian operators: by descending value, or ascending where asked; others: by ascending angle in [0, 2π). */
  readonly spaces: readonly Eigenspace[];
  /** The vectors of all spaces, space after space. */
  readonly rows: Csr;
  /** Where every row is one basis vector of the block with coefficient 1: which; otherwise undefined. */
  readonly indices: Int32Array | undefined;
  /** Rigorous bound on ‖U U† − 1‖₂ for all rows together. */
  readonly defect: number;
}

/** What a caller asks of {@link splitIntoEigenspaces}; the numbers decide only what is attempted. */
export interface SplitOptions extends GroupOptions {
  /** Entries up to this modulus are taken as zero when looking for connected parts. */
  readonly noise: number;
}

/** Eigenpairs found in the connected parts, before they are gathered into eigenspaces. */
interface Pairs {
  readonly re: Float64Array;
  readonly im: Float64Array;
  /** Connected part of each pair. */
  readonly part: Int32Array;
  /** Row of each pair within its part's vectors. */
  readonly row: Int32Array;
  /** Dense vectors of each part over its members; undefined for a part of one index. */
  readonly vectors: readonly (PartVectors | undefined)[];
  readonly defect: number;
}

interface PartVectors {
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/**
 * The one operation of the library: eigenspaces of a normal operator inside a block.
 *
 * Where the restricted operator is diagonal, indices are grouped; a cycle of a monomial unitary one is solved in closed
 * form; the eigensolver sees only the connected parts that remain. A normal operator that is neither Hermitian nor
 * monomial is taken apart by its Hermitian and its anti-Hermitian part in turn, see {@link normalEigen}.
 *
 * @param matrix - the operator restricted to the block, d × d
 */
export function splitIntoEigenspaces(matrix: Csr, options: SplitOptions): Split {
  if (matrix.rows === 1) return single(diagonalEntry(matrix, 0), options);
  const components = connectedComponents(matrix, options.noise);
  const pairs = solveParts(matrix, components, options);
  const groups = sortedGroups(pairs.re, pairs.im, options);
  const rows = gather(groups, pairs, components);
  let from = 0;
  const spaces = groups.map(({ value, spread, pairs: { length } }) => {
    from += length;
    return new RowRange(value, spread, rows, from - length, length);
  });
  return { spaces, rows, indices: selection(rows, 0, rows.rows), defect: pairs.defect };
}

const ONE: Csr = {
  rows: 1,
  cols: 1,
  ptr: Int32Array.of(0, 1),
  col: Int32Array.of(0),
  re: Float64Array.of(1),
  im: undefined,
};

/** A block of one vector. */
function single(entry: Complex, { hermitian }: SplitOptions): Split {
  const value = hermitian ? { re: entry.re, im: 0 } : entry;
  return {
    spaces: [{ value, spread: 0, size: 1, rows: ONE, indices: ONE.col }],
    rows: ONE,
    indices: ONE.col,
    defect: 0,
  };
}

/** An eigenspace whose vectors are some rows of a whole split; they are only written out where they are asked for. */
class RowRange implements Eigenspace {
  readonly value: Complex;
  readonly spread: number;
  readonly size: number;
  readonly #all: Csr;
  readonly #from: number;
  #rows: Csr | undefined;

  constructor(value: Complex, spread: number, all: Csr, from: number, size: number) {
    this.value = value;
    this.spread = spread;
    this.size = size;
    this.#all = all;
    this.#from = from;
  }

  get rows(): Csr {
    this.#rows ??= rowRange(this.#all, this.#from, this.size);
    return this.#rows;
  }

  get indices(): Int32Array | undefined {
    return selection(this.#all, this.#from, this.size);
  }
}

/** Which basis vectors some rows are, where each is one with coefficient 1: a connected part of one index. */
function selection({ ptr, col }: Csr, from: number, size: number): Int32Array | undefined {
  const start = ptr[from] as number;
  return (ptr[from + size] as number) - start === size ? col.slice(start, start + size) : undefined;
}

/** Value at (i, i). */
function diagonalEntry(matrix: Csr, i: number): Complex {
  for (let p = matrix.ptr[i] as number; p < (matrix.ptr[i + 1] as number); p++) {
    if (matrix.col[p] === i) {
      return { re: matrix.re[p] as number, im: matrix.im === undefined ? 0 : (matrix.im[p] as number) };
    }
  }
  return { re: 0, im: 0 };
}

function solveParts(matrix: Csr, components: Components, options: SplitOptions): Pairs {
  const size = matrix.rows;
  const re = new Float64Array(size);
  const im = new Float64Array(size);
  const part = new Int32Array(size);
  const row = new Int32Array(size);
  const vectors: (PartVectors | undefined)[] = new Array(components.count);
  const monomial = components.count === size ? undefined : monomialImage(matrix, options.noise);
  const cycleDefects = new Map<number, number>();
  let defect = 0;
  let filled = 0;
  for (let c = 0; c < components.count; c++) {
    const start = components.starts[c] as number;
    const count = (components.starts[c + 1] as number) - start;
    const first = components.members[start] as number;
    if (count === 1) {
      const value = diagonalEntry(matrix, first);
      re[filled] = value.re;
      im[filled] = options.hermitian ? 0 : value.im;
      part[filled] = c;
      filled++;
      continue;
    }
    const cycle =
      monomial === undefined
        ? undefined
        : cycleThrough(matrix, monomial.image, monomial.position, first, count, options.noise);
    const solved =
      cycle === undefined
        ? solveDense(matrix, components, c, options)
        : layCycle(cycle, components, c, cycleDefects, options.hermitian);
    if (solved.defect > defect) defect = solved.defect;
    vectors[c] = solved;
    for (let k = 0; k < count; k++) {
      re[filled] = solved.valuesRe[k] as number;
      im[filled] = solved.valuesIm === undefined ? 0 : (solved.valuesIm[k] as number);
      part[filled] = c;
      row[filled] = k;
      filled++;
    }
  }
  return { re, im, part, row, vectors, defect };
}

interface SolvedPart extends PartVectors {
  readonly valuesRe: Float64Array;
  readonly valuesIm: Float64Array | undefined;
  readonly defect: number;
}

/** Image and storage position of each column if the matrix has at most one entry per row and column; else undefined. */
function monomialImage(matrix: Csr, noise: number): { image: Int32Array; position: Int32Array } | undefined {
  const image = new Int32Array(matrix.rows);
  const position = new Int32Array(matrix.rows).fill(-1);
  for (let i = 0; i < matrix.rows; i++) {
    let found = 0;
    for (let p = matrix.ptr[i] as number; p < (matrix.ptr[i + 1] as number); p++) {
      if (modulus(matrix.re[p] as number, matrix.im === undefined ? 0 : (matrix.im[p] as number)) <= noise) continue;
      const j = matrix.col[p] as number;
      if (++found > 1 || (position[j] as number) >= 0) return undefined;
      image[j] = i;
      position[j] = p;
    }
  }
  return { image, position };
}

function layCycle(
  cycle: Cycle,
  components: Components,
  part: number,
  defects: Map<number, number>,
  hermitian: boolean,
): SolvedPart {
  const start = components.starts[part] as number;
  const count = cycle.indices.length;
  const { vectors: found, turns } = solveCycle(cycle);
  const place = new Map<number, number>();
  for (let k = 0; k < count; k++) place.set(components.members[start + k] as number, k);
  const re = new Float64Array(count * count);
  const real = found.every((vector) => vector.im === undefined);
  const im = real ? undefined : new Float64Array(count * count);
  const valuesRe = new Float64Array(count);
  const valuesIm = new Float64Array(count);
  for (let k = 0; k < count; k++) {
    const vector = found[k] as (typeof found)[number];
    valuesRe[k] = vector.value.re;
    valuesIm[k] = hermitian ? 0 : vector.value.im;
    for (let t = 0; t < count; t++) {
      const at = k * count + (place.get(cycle.indices[t] as number) as number);
      re[at] = vector.re[t] as number;
      if (im !== undefined && vector.im !== undefined) im[at] = vector.im[t] as number;
    }
  }
  // Phases ±1, ±i multiply exactly, so cycles of one length and phase product have one Gram matrix.
  const key = turns === undefined ? -1 : 4 * count + turns;
  const known = key < 0 ? undefined : defects.get(key);
  const defect = known ?? orthonormalityDefect(count, count, re, im);
  if (key >= 0) defects.set(key, defect);
  return { re, im, valuesRe, valuesIm, defect };
}

function solveDense(matrix: Csr, components: Components, part: number, options: SplitOptions): SolvedPart {
  const start = components.starts[part] as number;
  const count = (components.starts[part + 1] as number) - start;
  const members = components.members.subarray(start, start + count);
  const dense = denseSubmatrix(matrix, members);
  if (options.hermitian) {
    const eigen = hermitianEigen(count, dense.re, dense.im, { upper: "ignore" });
    const defect = orthonormalityDefect(count, count, eigen.re, eigen.im);
    return { re: eigen.re, im: eigen.im, valuesRe: eigen.values, valuesIm: undefined, defect };
  }
  const normal = normalEigen(count, dense, options.noise);
  return { ...normal, defect: orthonormalityDefect(count, count, normal.re, normal.im) };
}

function denseSubmatrix(matrix: Csr, members: Int32Array): { re: Float64Array; im: Float64Array | undefined } {
  const count = members.length;
  const whole = count === matrix.rows;
  const place = whole ? undefined : new Map<number, number>();
  if (place !== undefined) for (let k = 0; k < count; k++) place.set(members[k] as number, k);
  const re = new Float64Array(count * count);
  const im = matrix.im === undefined ? undefined : new Float64Array(count * count);
  let complex = false;
  for (let a = 0; a < count; a++) {
    const i = members[a] as number;
    for (let p = matrix.ptr[i] as number; p < (matrix.ptr[i + 1] as number); p++) {
      const j = matrix.col[p] as number;
      const b = place === undefined ? j : place.get(j);
      if (b === undefined) continue;
      re[a * count + b] = matrix.re[p] as number;
      if (im !== undefined && matrix.im !== undefined) {
        const y = matrix.im[p] as number;
        im[a * count + b] = y;
        if (y !== 0) complex = true;
      }
    }
  }
  return { re, im: complex ? im : undefined };
}

/** The vectors of all groups over the block's basis, group after group. */
function gather(groups: readonly Group[], pairs: Pairs, { starts, members }: Components): Csr {
  const size = pairs.re.length;
  const ptr = new Int32Array(size + 1);
  let row = 0;
  let complex = false;
  for (const group of groups) {
    for (const pair of group.pairs) {
      const c = pairs.part[pair] as number;
      if (pairs.vectors[c]?.im !== undefined) complex = true;
      ptr[row + 1] = (ptr[row] as number) + (starts[c + 1] as number) - (starts[c] as number);
      row++;
    }
  }
  const total = ptr[size] as number;
  const col = new Int32Array(total);
  const re = new Float64Array(total);
  const im = complex ? new Float64Array(total) : undefined;
  let at = 0;
  for (const group of groups) {
    for (const pair of group.pairs) {
      const c = pairs.part[pair] as number;
      const start = starts[c] as number;
      const count = (starts[c + 1] as number) - start;
      const vectors = pairs.vectors[c];
      const base = (pairs.row[pair] as number) * count;
      for (let k = 0; k < count; k++, at++) {
        col[at] = members[start + k] as number;
        re[at] = vectors === undefined ? 1 : (vectors.re[base + k] as number);
        if (im !== undefined && vectors?.im !== undefined) im[at] = vectors.im[base + k] as number;
      }
    }
  }
  return { rows: size, cols: size, ptr, col, re, im };
}
