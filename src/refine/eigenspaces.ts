import { type Complex, modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { hermitianEigen } from "../numerics/eigen.js";
import { type Components, connectedComponents } from "./components.js";
import { orthonormalityDefect } from "./gram.js";
import { type Cycle, cycleThrough, solveCycle } from "./orbits.js";

/** An eigenspace of an operator inside a block. */
export interface Eigenspace {
  /** The eigenvalue: middle of the values found in this space. */
  readonly value: Complex;
  /** Largest distance of a found value from `value`. */
  readonly spread: number;
  /** Orthonormal vectors as rows of coefficients over the block's own basis. */
  readonly rows: Csr;
  /** Where every row is one basis vector of the block with coefficient 1: which; otherwise undefined. */
  readonly indices: Int32Array | undefined;
}

/** A block taken apart by one operator. */
export interface Split {
  /** Hermitian operators: by descending value; others: by ascending angle in [0, 2π). */
  readonly spaces: readonly Eigenspace[];
  /** Rigorous bound on ‖U U† − 1‖₂ for all rows together. */
  readonly defect: number;
}

/** What a caller asks of {@link splitIntoEigenspaces}; both numbers decide only what is attempted. */
export interface SplitOptions {
  /** True for a Hermitian operator: real eigenvalues. */
  readonly hermitian: boolean;
  /** Entries up to this modulus are taken as zero when looking for connected parts. */
  readonly noise: number;
  /** Neighbouring eigenvalues up to this far apart belong to one eigenspace. */
  readonly cluster: number;
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
 * monomial is taken apart by its Hermitian part and then, inside each eigenspace of that, by its anti-Hermitian part.
 *
 * @param matrix - the operator restricted to the block, d × d
 */
export function splitIntoEigenspaces(matrix: Csr, options: SplitOptions): Split {
  const components = connectedComponents(matrix, options.noise);
  const pairs = solveParts(matrix, components, options);
  const order = sortedGroups(pairs, options);
  const spaces = order.map((group) => gather(group, pairs, components, matrix.rows));
  return { spaces, defect: pairs.defect };
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
  return solveNormal(count, dense.re, dense.im ?? new Float64Array(count * count), options);
}

/** A normal matrix by two commuting Hermitian ones, X = (A + A†)/2 and then Y = (A − A†)/2i inside each eigenspace of X. */
function solveNormal(n: number, re: Float64Array, im: Float64Array, options: SplitOptions): SolvedPart {
  const xr = new Float64Array(n * n);
  const xi = new Float64Array(n * n);
  const yr = new Float64Array(n * n);
  const yi = new Float64Array(n * n);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      const a = re[i * n + j] as number;
      const b = im[i * n + j] as number;
      const c = re[j * n + i] as number;
      const d = im[j * n + i] as number;
      xr[i * n + j] = (a + c) / 2;
      xi[i * n + j] = (b - d) / 2;
      yr[i * n + j] = (b + d) / 2;
      yi[i * n + j] = (c - a) / 2;
    }
  }
  const first = hermitianEigen(n, xr, xi, { upper: "ignore" });
  const outRe = new Float64Array(n * n);
  const outIm = new Float64Array(n * n);
  const valuesRe = new Float64Array(n);
  const valuesIm = new Float64Array(n);
  let from = 0;
  while (from < n) {
    let to = from + 1;
    while (to < n && (first.values[to] as number) - (first.values[to - 1] as number) <= options.cluster) to++;
    const d = to - from;
    const inner = sandwich(n, yr, yi, first.re, first.im ?? new Float64Array(n * n), from, d);
    const second = hermitianEigen(d, inner.re, inner.im, { upper: "ignore" });
    for (let k = 0; k < d; k++) {
      valuesIm[from + k] = second.values[k] as number;
      let mean = 0;
      for (let a = 0; a < d; a++) {
        const ur = second.re[k * d + a] as number;
        const ui = second.im === undefined ? 0 : (second.im[k * d + a] as number);
        mean += (ur * ur + ui * ui) * (first.values[from + a] as number);
        for (let c = 0; c < n; c++) {
          const fr = first.re[(from + a) * n + c] as number;
          const fi = first.im === undefined ? 0 : (first.im[(from + a) * n + c] as number);
          const at = (from + k) * n + c;
          outRe[at] = (outRe[at] as number) + ur * fr - ui * fi;
          outIm[at] = (outIm[at] as number) + ur * fi + ui * fr;
        }
      }
      valuesRe[from + k] = mean;
    }
    from = to;
  }
  return { re: outRe, im: outIm, valuesRe, valuesIm, defect: orthonormalityDefect(n, n, outRe, outIm) };
}

/** conj(Q) Y Qᵀ for the rows from .. from + d − 1 of Q: the matrix of Y in that subspace. */
function sandwich(
  n: number,
  yr: Float64Array,
  yi: Float64Array,
  qr: Float64Array,
  qi: Float64Array,
  from: number,
  d: number,
): { re: Float64Array; im: Float64Array } {
  const re = new Float64Array(d * d);
  const im = new Float64Array(d * d);
  const wr = new Float64Array(n);
  const wi = new Float64Array(n);
  for (let b = 0; b < d; b++) {
    const q = (from + b) * n;
    for (let i = 0; i < n; i++) {
      let sr = 0;
      let si = 0;
      for (let j = 0; j < n; j++) {
        const a = yr[i * n + j] as number;
        const c = yi[i * n + j] as number;
        const x = qr[q + j] as number;
        const y = qi[q + j] as number;
        sr += a * x - c * y;
        si += a * y + c * x;
      }
      wr[i] = sr;
      wi[i] = si;
    }
    for (let a = 0; a < d; a++) {
      const p = (from + a) * n;
      let sr = 0;
      let si = 0;
      for (let i = 0; i < n; i++) {
        const x = qr[p + i] as number;
        const y = qi[p + i] as number;
        sr += x * (wr[i] as number) + y * (wi[i] as number);
        si += x * (wi[i] as number) - y * (wr[i] as number);
      }
      re[a * d + b] = sr;
      im[a * d + b] = si;
    }
  }
  return { re, im };
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

/** A group of pairs that share an eigenvalue. */
interface Group {
  readonly value: Complex;
  readonly spread: number;
  readonly pairs: number[];
}

function sortedGroups(pairs: Pairs, options: SplitOptions): Group[] {
  const all = pairs.re.length;
  const distinct = new Map<number, number[]>();
  for (let k = 0; k < all; k++) {
    const x = pairs.re[k] as number;
    const list = distinct.get(x);
    if (list === undefined) distinct.set(x, [k]);
    else list.push(k);
  }
  const chains = chain(distinct, options.cluster);
  if (options.hermitian) {
    return chains
      .map((c) => ({ value: { re: c.middle, im: 0 }, spread: c.spread, pairs: c.members }))
      .sort((a, b) => b.value.re - a.value.re);
  }
  const groups: Group[] = [];
  for (const c of chains) {
    const inner = new Map<number, number[]>();
    for (const k of c.members) {
      const y = pairs.im[k] as number;
      const list = inner.get(y);
      if (list === undefined) inner.set(y, [k]);
      else list.push(k);
    }
    for (const d of chain(inner, options.cluster)) {
      groups.push({ value: { re: c.middle, im: d.middle }, spread: c.spread + d.spread, pairs: d.members });
    }
  }
  const angle = (z: Complex): number => {
    if (Math.abs(z.im) <= options.cluster) return z.re < 0 ? Math.PI : 0;
    const a = Math.atan2(z.im, z.re);
    return a < 0 ? a + 2 * Math.PI : a;
  };
  return groups.sort((a, b) => angle(a.value) - angle(b.value) || b.value.re - a.value.re);
}

/** Clusters the keys of a map by gaps; members ascending. */
function chain(
  distinct: Map<number, number[]>,
  tolerance: number,
): { middle: number; spread: number; members: number[] }[] {
  const keys = Float64Array.from(distinct.keys()).sort();
  const chains: { middle: number; spread: number; members: number[] }[] = [];
  let from = 0;
  while (from < keys.length) {
    let to = from + 1;
    while (to < keys.length && (keys[to] as number) - (keys[to - 1] as number) <= tolerance) to++;
    const low = keys[from] as number;
    const high = keys[to - 1] as number;
    const middle = to === from + 1 ? low : low + (high - low) / 2;
    let members = distinct.get(low) as number[];
    if (to > from + 1) {
      members = members.slice();
      for (let k = from + 1; k < to; k++) {
        const more = distinct.get(keys[k] as number);
        if (more !== undefined) for (const index of more) members.push(index);
      }
      members.sort((a, b) => a - b);
    }
    chains.push({ middle, spread: Math.max(middle - low, high - middle), members });
    from = to;
  }
  return chains;
}

function gather(group: Group, pairs: Pairs, components: Components, size: number): Eigenspace {
  const rows = group.pairs.length;
  const ptr = new Int32Array(rows + 1);
  let complex = false;
  for (let r = 0; r < rows; r++) {
    const c = pairs.part[group.pairs[r] as number] as number;
    const vectors = pairs.vectors[c];
    if (vectors?.im !== undefined) complex = true;
    const count = (components.starts[c + 1] as number) - (components.starts[c] as number);
    ptr[r + 1] = (ptr[r] as number) + count;
  }
  const total = ptr[rows] as number;
  const col = new Int32Array(total);
  const re = new Float64Array(total);
  const im = complex ? new Float64Array(total) : undefined;
  for (let r = 0; r < rows; r++) {
    const pair = group.pairs[r] as number;
    const c = pairs.part[pair] as number;
    const start = components.starts[c] as number;
    const count = (components.starts[c + 1] as number) - start;
    const vectors = pairs.vectors[c];
    const base = (pairs.row[pair] as number) * count;
    const at = ptr[r] as number;
    for (let k = 0; k < count; k++) {
      col[at + k] = components.members[start + k] as number;
      re[at + k] = vectors === undefined ? 1 : (vectors.re[base + k] as number);
      if (im !== undefined && vectors?.im !== undefined) im[at + k] = vectors.im[base + k] as number;
    }
  }
  return {
    value: group.value,
    spread: group.spread,
    rows: { rows, cols: size, ptr, col, re, im },
    indices: total === rows ? col : undefined,
  };
}
