import type { Matrix } from "ml-matrix";
import { GoodBasisError } from "../errors.js";
import { didYouMean, isObject, shown } from "../misuse.js";
import { imaginaryPart, isScalar, realPart, type Scalar } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { diagonalCsr, fromDense, fromTriplets } from "../numerics/sparse.js";
import { fitsGrid, gridOf, modulusAbove, type Radius, type Uncertain } from "./radius.js";

/** Rows of a matrix, or all its n² entries row by row. */
export type RealEntries = readonly ArrayLike<number>[] | ArrayLike<number>;

/** One entry of a sparse matrix: row and column, 0-based, real part and, where there is one, imaginary part. */
export type Triplet = readonly [row: number, col: number, re: number, im?: number];

/**
 * Everything but an operator that a matrix can be read from: an ml-matrix `Matrix`, nested arrays, a flat row-major typed array
 * of n² numbers, `{ re, im }` of either form, triplets (0-based; triplets of the same place are summed, so that a matrix can be
 * assembled from contributions), a diagonal, or a permutation (the image of ket j is ket `permutation[j]`, times `phases[j]`).
 * The objects may not have other fields.
 */
export type MatrixData =
  | Matrix
  | readonly ArrayLike<number>[]
  | Float64Array
  | {
      readonly re: RealEntries | Matrix;
      readonly im?: RealEntries | Matrix | undefined;
      readonly n?: number | undefined;
    }
  | { readonly n: number; readonly entries: readonly Triplet[] }
  | { readonly diagonal: ArrayLike<number>; readonly imaginary?: ArrayLike<number> | undefined }
  | { readonly permutation: ArrayLike<number>; readonly phases?: readonly Scalar[] | undefined };

const FORMS =
  "an Operator, an ml-matrix Matrix, nested arrays, a flat Float64Array, { re, im }, { n, entries }, { diagonal } or " +
  "{ permutation }";

/**
 * Reads a matrix; arrays are copied.
 *
 * @param verb - the function on whose behalf it is read, for messages
 * @param input - the matrix
 * @returns the entries with the radius that the form itself gives: `"exact"` for a permutation without phases, else the default
 * @throws GoodBasisError `shape` - not square, ragged, empty, an index out of range
 * @throws GoodBasisError `not-finite` - an entry is NaN or infinite
 */
export function readMatrix(verb: string, input: MatrixData): Uncertain {
  if (!isObject(input)) throw badForm(verb, input);
  if (isList(input) || isMatrix(input)) {
    const { n, values } = flatten(verb, input, undefined);
    return { csr: fromDense(n, n, values), radius: "default" };
  }
  requireForm(verb, input);
  if ("entries" in input) return readTriplets(verb, input.n, input.entries);
  if ("diagonal" in input) return readDiagonal(verb, input.diagonal, input.imaginary);
  if ("permutation" in input) return readPermutation(verb, input.permutation, input.phases);
  const re = flatten(verb, input.re, input.n);
  const im = input.im === undefined ? undefined : flatten(verb, input.im, input.n);
  if (im !== undefined && im.n !== re.n) {
    const message = `${verb}: re is ${re.n} × ${re.n} but im is ${im.n} × ${im.n}`;
    throw new GoodBasisError("shape", message, { re: re.n, im: im.n });
  }
  return { csr: fromDense(re.n, re.n, re.values, im?.values), radius: "default" };
}

/** The fields of every form of a matrix as an object, by the one that tells it from the others. */
const FIELDS: Readonly<Record<"re" | "entries" | "diagonal" | "permutation", readonly string[]>> = {
  re: ["re", "im", "n"],
  entries: ["n", "entries"],
  diagonal: ["diagonal", "imaginary"],
  permutation: ["permutation", "phases"],
};

/** Refuses an object of no form or of two, and fields that would be passed over in silence. */
function requireForm(verb: string, input: object): void {
  const [form, fields] = Object.entries(FIELDS).find(([name]) => name in input) ?? [];
  if (form === undefined || fields === undefined) throw badForm(verb, input);
  const other = Object.keys(input).find((name) => !fields.includes(name));
  if (other === undefined) return;
  const guess = didYouMean(other, fields);
  const message = `${verb}: a matrix given by its ${form} has no field "${other}"${guess === "" ? ";" : guess} there are ${fields.join(", ")}`;
  throw new GoodBasisError("shape", message, { form, field: other });
}

function isList(value: unknown): value is readonly ArrayLike<number>[] | Float64Array {
  return hasLength(value);
}

/** Arrays and typed arrays. */
function hasLength(value: unknown): boolean {
  return Array.isArray(value) || (ArrayBuffer.isView(value) && !(value instanceof DataView));
}

function isNumbers(list: ArrayLike<unknown>): list is ArrayLike<number> {
  return typeof list[0] === "number";
}

function isMatrix(value: object): value is Matrix {
  return "rows" in value && "columns" in value && "get" in value && typeof value.get === "function";
}

function badForm(verb: string, input: unknown, expected = FORMS): GoodBasisError {
  return new GoodBasisError("shape", `${verb}: expected ${expected}, got ${shown(input)}`);
}

function flatten(
  verb: string,
  input: RealEntries | Matrix,
  stated: number | undefined,
): { n: number; values: ArrayLike<number> } {
  if (typeof input !== "object" || input === null) throw badForm(verb, input);
  const found = isMatrix(input) ? flattenMatrix(verb, input) : flattenArray(verb, input);
  if (stated !== undefined && stated !== found.n) {
    throw new GoodBasisError("shape", `${verb}: n is ${stated}, but the matrix has ${found.n} rows`, { n: stated });
  }
  const { n, values } = found;
  for (let k = 0; k < values.length; k++) {
    const x = values[k] as number;
    if (typeof x !== "number" || x - x !== 0) throw notFinite(verb, Math.floor(k / n), k % n, x);
  }
  return found;
}

function flattenMatrix(verb: string, matrix: Matrix): { n: number; values: ArrayLike<number> } {
  const n = matrix.rows;
  if (matrix.columns !== n || n === 0) throw notSquare(verb, n, matrix.columns);
  const values = new Array<number>(n * n);
  for (let i = 0, k = 0; i < n; i++) for (let j = 0; j < n; j++, k++) values[k] = matrix.get(i, j);
  return { n, values };
}

function flattenArray(verb: string, input: RealEntries): { n: number; values: ArrayLike<number> } {
  if (!isList(input)) throw badForm(verb, input);
  if (isNumbers(input)) {
    const n = Math.round(Math.sqrt(input.length));
    if (n * n === input.length) return { n, values: input };
    const message = `${verb}: a flat matrix needs n² numbers, row by row; got ${input.length}`;
    throw new GoodBasisError("shape", message, { length: input.length });
  }
  const n = input.length;
  if (n === 0) throw notSquare(verb, 0, 0);
  const rows: ArrayLike<unknown> = input;
  const values = new Array<number>(n * n);
  for (let i = 0, k = 0; i < n; i++) {
    const row = rows[i];
    if (!isList(row)) throw badForm(verb, row);
    if (row.length !== n) {
      const message = `${verb}: row ${i} has ${row.length} entries, expected ${n}: a square matrix is needed`;
      throw new GoodBasisError("shape", message, { row: i, length: row.length, expected: n });
    }
    for (let j = 0; j < n; j++, k++) values[k] = row[j] as number;
  }
  return { n, values };
}

function notSquare(verb: string, rows: number, columns: number): GoodBasisError {
  const message = `${verb}: expected a square matrix with at least one row, got ${rows} × ${columns}`;
  return new GoodBasisError("shape", message, { rows, columns });
}

function notFinite(verb: string, row: number, col: number, value: unknown): GoodBasisError {
  const message = `${verb}: entry (${row}, ${col}), counted from 0, is ${shown(value)}; every entry must be a finite number`;
  return new GoodBasisError("not-finite", message, { row, col, value });
}

/**
 * Refuses what is not a number of kets.
 *
 * @throws GoodBasisError `shape`
 */
export function requireDimension(verb: string, n: number): void {
  if (Number.isInteger(n) && n >= 1 && n < 2 ** 31) return;
  throw new GoodBasisError(
    "shape",
    `${verb}: the dimension n must be a whole number from 1 to 2^31 − 1, got ${shown(n)}`,
    {
      n,
    },
  );
}

/**
 * Reads triplets; duplicates are summed, with the rounding of that sum in the radius.
 *
 * @throws GoodBasisError `shape`, `not-finite`
 */
export function readTriplets(verb: string, n: number, entries: readonly Triplet[]): Uncertain {
  requireDimension(verb, n);
  if (!Array.isArray(entries)) throw badForm(verb, entries, "a list of triplets [row, col, re, im?]");
  const rows: number[] = [];
  const cols: number[] = [];
  const re: number[] = [];
  const im: number[] = [];
  for (const [k, entry] of entries.entries()) {
    if (!isTriplet(entry)) {
      const message = `${verb}: triplet ${k} is ${shown(entry)}; give [row, col, re] or [row, col, re, im]`;
      throw new GoodBasisError("shape", message, { triplet: k });
    }
    const [row, col, x, y = 0]: Triplet = entry;
    for (const index of [row, col]) {
      if (Number.isInteger(index) && index >= 0 && index < n) continue;
      const message = `${verb}: triplet ${k} has index ${shown(index)}; indices are counted from 0 and lie below ${n}`;
      throw new GoodBasisError("shape", message, { triplet: k, row, col, n });
    }
    if (typeof x !== "number" || typeof y !== "number" || x - x !== 0 || y - y !== 0) {
      throw notFinite(verb, row, col, Number.isFinite(x) ? y : x);
    }
    if (x === 0 && y === 0) continue;
    rows.push(row);
    cols.push(col);
    re.push(x);
    im.push(y);
  }
  const csr = fromTriplets(n, n, rows, cols, re, im);
  if (csr.col.length === re.length) return { csr, radius: "default" };
  return { csr, radius: duplicateRadius(csr, n, rows, cols, re, im) };
}

function isTriplet(entry: unknown): boolean {
  return Array.isArray(entry) && entry.length >= 3 && entry.length <= 4;
}

function duplicateRadius(csr: Csr, n: number, rows: number[], cols: number[], re: number[], im: number[]): Radius {
  const sizes = re.map((x, k) => Math.abs(x) + Math.abs(im[k] as number));
  const ones = re.map(() => 1);
  const sums = fromTriplets(n, n, rows, cols, sizes).re;
  const counts = fromTriplets(n, n, rows, cols, ones).re;
  const terms = fromTriplets(1, re.length, new Int32Array(re.length), Array.from(re.keys()), re, im);
  const grid = gridOf(terms);
  const exact = grid !== undefined && fitsGrid(grid.bits, grid.max * re.length);
  const radius = new Float64Array(csr.col.length);
  for (let e = 0; e < radius.length; e++) {
    const rounding = exact ? 0 : gamma((counts[e] as number) - 1);
    radius[e] = roundUp((UNIT_ROUNDOFF + rounding) * (sums[e] as number), 2 * (counts[e] as number) + 8);
  }
  return radius;
}

/**
 * Reads a diagonal.
 *
 * @throws GoodBasisError `shape`, `not-finite`
 */
function readDiagonal(verb: string, diagonal: ArrayLike<number>, imaginary?: ArrayLike<number>): Uncertain {
  for (const list of imaginary === undefined ? [diagonal] : [diagonal, imaginary]) {
    if (!hasLength(list)) throw badForm(verb, list, "a list of numbers, the diagonal");
  }
  const n = diagonal.length;
  if (n === 0) throw notSquare(verb, 0, 0);
  if (imaginary !== undefined && imaginary.length !== n) {
    const message = `${verb}: the diagonal has ${n} real but ${imaginary.length} imaginary parts`;
    throw new GoodBasisError("shape", message, { real: n, imaginary: imaginary.length });
  }
  for (const list of imaginary === undefined ? [diagonal] : [diagonal, imaginary]) {
    for (let k = 0; k < n; k++) if (!Number.isFinite(list[k])) throw notFinite(verb, k, k, list[k]);
  }
  return { csr: diagonalCsr(diagonal, imaginary), radius: "default" };
}

/**
 * Reads a permutation with phases.
 *
 * @throws GoodBasisError `shape` - not a permutation of 0 … n − 1; `not-finite`
 */
export function readPermutation(verb: string, map: ArrayLike<number>, phases?: readonly Scalar[]): Uncertain {
  if (!hasLength(map) || map.length === 0) throw badForm(verb, map, "a list, the images of kets 0 … n − 1");
  const n = map.length;
  const source = new Int32Array(n).fill(-1);
  for (let j = 0; j < n; j++) {
    const image = map[j] as number;
    const inRange = Number.isInteger(image) && image >= 0 && image < n;
    if (inRange && source[image] === -1) {
      source[image] = j;
      continue;
    }
    const problem = inRange
      ? `${image} occurs twice, at ${source[image]} and ${j}`
      : `place ${j} holds ${shown(image)}`;
    throw new GoodBasisError("shape", `${verb}: expected a permutation of 0 … ${n - 1}, but ${problem}`, {
      index: j,
      image,
    });
  }
  if (phases !== undefined && !hasLength(phases)) throw badForm(verb, phases, "a list of phases, one a ket");
  if (phases !== undefined && phases.length !== n) {
    const message = `${verb}: the permutation has ${n} kets but ${phases.length} phases`;
    throw new GoodBasisError("shape", message, { kets: n, phases: phases.length });
  }
  const ptr = new Int32Array(n + 1);
  const re = new Float64Array(n).fill(1);
  const im = new Float64Array(phases === undefined ? 0 : n);
  for (let i = 0; i < n; i++) {
    ptr[i + 1] = i + 1;
    const j = source[i] as number;
    if (phases === undefined) continue;
    const phase = phases[j];
    if (!isScalar(phase)) throw badForm(verb, phase, `a number or { re, im } as phase ${j}`);
    re[i] = realPart(phase);
    im[i] = imaginaryPart(phase);
    if (!Number.isFinite(re[i]) || !Number.isFinite(im[i])) throw notFinite(verb, i, j, `${re[i]} + ${im[i]}i`);
    if (re[i] === 0 && im[i] === 0) {
      throw new GoodBasisError(
        "shape",
        `${verb}: phase ${j} is zero; a permutation needs phases that differ from zero`,
        { index: j },
      );
    }
  }
  const real = im.every((y) => y === 0);
  const csr: Csr = { rows: n, cols: n, ptr, col: source, re, im: real ? undefined : im };
  const whole = re.every((x) => Number.isInteger(x)) && im.every((y) => Number.isInteger(y));
  return { csr, radius: whole ? "exact" : "default" };
}

/**
 * How well given entries are known: `"exact"`, or every stored entry to within relative · |entry| + absolute. Entries that are
 * zero count as exact.
 */
export type Uncertainty = "exact" | { readonly relative?: number; readonly absolute?: number };

/**
 * The matrix with the uncertainty that its giver states, if any.
 *
 * @throws GoodBasisError `option` - a negative or infinite uncertainty
 */
export function withUncertainty(verb: string, matrix: Uncertain, uncertainty: Uncertainty | undefined): Uncertain {
  if (uncertainty === undefined) return matrix;
  const { csr } = matrix;
  if (uncertainty === "exact") return { csr, radius: "exact" };
  requireUncertainty(verb, uncertainty);
  const { relative = 0, absolute = 0 } = uncertainty;
  for (const [name, value] of Object.entries({ relative, absolute })) {
    if (typeof value === "number" && Number.isFinite(value) && value >= 0) continue;
    const message = `${verb}: uncertainty.${name} must be a finite number from 0 on, got ${shown(value)}`;
    throw new GoodBasisError("option", message, { [name]: value });
  }
  if (relative === 0 && absolute === 0) return { csr, radius: "exact" };
  const radius = new Float64Array(csr.col.length);
  for (let e = 0; e < radius.length; e++) radius[e] = roundUp(relative * modulusAbove(csr, e) + absolute);
  return { csr, radius };
}

function requireUncertainty(verb: string, given: unknown): void {
  const known = ["relative", "absolute"];
  if (isObject(given) && Object.keys(given).every((name) => known.includes(name))) return;
  const message = `${verb}: uncertainty is ${shown(given)}; give "exact", or { relative, absolute } with one of the two or both`;
  throw new GoodBasisError("option", message, { uncertainty: given });
}
