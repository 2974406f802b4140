import { GoodBasisError } from "../errors.js";
import { isFraction } from "../exact/fraction.js";
import { ExactOperator } from "../exact/operator.js";
import type { ExactTriplet } from "../exact/rows.js";
import { Surd, type SurdInput } from "../exact/surd.js";
import { isObject } from "../misuse.js";
import type { Complex } from "../numerics/complex.js";

/**
 * An entry of a matrix of exact numbers: text such as `"sqrt(2/3)"` or `"1/2"`, a `Surd`, a `Fraction`, a big integer, or a
 * number, which counts as the very double that it is.
 */
export type ExactEntry = Exclude<SurdInput, Complex>;

/**
 * A matrix with at least one exact entry that is no plain number, in the forms of {@link MatrixData}; every entry of it counts as
 * exact. `re` and `im` hold real numbers.
 */
export type ExactData =
  | readonly (readonly ExactEntry[])[]
  | {
      readonly re: readonly (readonly ExactEntry[])[];
      readonly im?: readonly (readonly ExactEntry[])[] | undefined;
      readonly n?: number | undefined;
    }
  | {
      readonly n: number;
      readonly entries: readonly (readonly [row: number, col: number, re: ExactEntry, im?: ExactEntry])[];
    }
  | { readonly diagonal: readonly ExactEntry[]; readonly imaginary?: readonly ExactEntry[] | undefined }
  | { readonly permutation: ArrayLike<number>; readonly phases?: readonly SurdInput[] | undefined };

/** Whether a value is an exact number and no plain JavaScript number. */
export function isExactEntry(value: unknown): value is Exclude<ExactEntry, number> {
  return typeof value === "string" || typeof value === "bigint" || value instanceof Surd || isFraction(value);
}

/** Whether a list, or the lists in it, hold exact numbers that are no plain ones. */
function holdsExact(list: unknown, depth: number): boolean {
  if (!Array.isArray(list)) return false;
  for (let k = 0; k < list.length; k++) {
    const item: unknown = list[k];
    if (typeof item === "number") continue;
    if (isExactEntry(item) ? depth === 0 : depth > 0 && holdsExact(item, depth - 1)) return true;
  }
  return false;
}

/** The fields of a matrix that may hold exact numbers, and how many lists deep. */
const EXACT_FIELDS: readonly (readonly [field: string, depth: number])[] = [
  ["re", 1],
  ["im", 1],
  ["entries", 1],
  ["diagonal", 0],
  ["imaginary", 0],
  ["phases", 0],
];

/** The same matrix with 1 for every exact number that is no plain one: of the same shape, with the same faults. */
export interface Shadow {
  readonly input: unknown;
  /** Reads the entries themselves, where the shadow has been found faultless. */
  readonly entries: (verb: string) => ExactOperator;
}

/**
 * Looks for exact numbers in a matrix of any form.
 *
 * @returns undefined where all entries are plain numbers, or nothing at all is right
 */
export function shadowOf(input: unknown): Shadow | undefined {
  if (!isObject(input) || ArrayBuffer.isView(input)) return undefined;
  if (Array.isArray(input)) {
    if (!holdsExact(input, 1)) return undefined;
    return { input: shade(input, 1), entries: (verb) => operatorOf(input.length, rowTriplets(verb, input)) };
  }
  const fields = EXACT_FIELDS.filter(([field, depth]) => holdsExact(Reflect.get(input, field), depth));
  if (fields.length === 0) return undefined;
  const shaded = fields.map(([field, depth]) => [field, shade(Reflect.get(input, field), depth)]);
  return { input: { ...input, ...Object.fromEntries(shaded) }, entries: (verb) => readFields(verb, input) };
}

function shade(list: unknown, depth: number): unknown {
  if (!Array.isArray(list)) return list;
  return list.map((item: unknown) => (depth > 0 ? shade(item, depth - 1) : isExactEntry(item) ? 1 : item));
}

function operatorOf(n: number, triplets: Iterable<ExactTriplet>): ExactOperator {
  return ExactOperator.fromTriplets(n, triplets);
}

/** The parts of a matrix whose shadow is faultless. */
function readFields(verb: string, input: object): ExactOperator {
  const list = (field: string): readonly unknown[] | undefined => {
    const value: unknown = Reflect.get(input, field);
    return isObject(value) && "length" in value ? Array.from(value as ArrayLike<unknown>) : undefined;
  };
  const entries = list("entries");
  if (entries !== undefined) return operatorOf(Number(Reflect.get(input, "n")), givenTriplets(verb, entries));
  const diagonal = list("diagonal");
  if (diagonal !== undefined) {
    const imaginary = list("imaginary");
    const values = diagonal.map((x, k) => together(verb, k, k, x, imaginary?.[k]));
    return ExactOperator.diagonal(values);
  }
  const map = list("permutation");
  if (map !== undefined) return permutation(verb, map.map(Number), list("phases") ?? []);
  const [re, im] = [rowsOf(Reflect.get(input, "re")), rowsOf(Reflect.get(input, "im"))];
  const n = re.length;
  const triplets = Array.from(re, (row, j) =>
    Array.from(row, (x, k): ExactTriplet => [j, k, together(verb, j, k, x, im[j]?.[k] ?? 0)]),
  ).flat();
  return operatorOf(n, triplets);
}

function permutation(verb: string, map: readonly number[], phases: readonly unknown[]): ExactOperator {
  const factors = phases.map((phase, j) => {
    const factor = read(verb, map[j] as number, j, phase);
    if (!factor.isZero) return factor;
    const message = `${verb}: phase ${j} is zero; a permutation needs phases that differ from zero`;
    throw new GoodBasisError("shape", message, { index: j });
  });
  return ExactOperator.permutation(map, factors);
}

/** Rows of numbers in any of the forms of real entries: nested, flat, or an ml-matrix `Matrix`. */
function rowsOf(value: unknown): readonly ArrayLike<unknown>[] {
  if (!isObject(value)) return [];
  if ("to2DArray" in value && typeof value.to2DArray === "function") return value.to2DArray();
  const list: readonly unknown[] = Array.from(value as ArrayLike<unknown>);
  if (list.every((item) => isObject(item) && "length" in item)) return list as readonly ArrayLike<unknown>[];
  const n = Math.round(Math.sqrt(list.length));
  return Array.from({ length: n }, (_, j) => list.slice(j * n, (j + 1) * n));
}

function* rowTriplets(verb: string, rows: readonly unknown[]): Generator<ExactTriplet> {
  for (const [j, row] of rows.entries()) {
    const list = row as ArrayLike<unknown>;
    for (let k = 0; k < list.length; k++) if (list[k] !== 0) yield [j, k, read(verb, j, k, list[k])];
  }
}

function* givenTriplets(verb: string, entries: readonly unknown[]): Generator<ExactTriplet> {
  for (const entry of entries) {
    const [row, col, re, im] = entry as readonly [number, number, unknown, unknown];
    yield [row, col, im === undefined ? read(verb, row, col, re) : together(verb, row, col, re, im)];
  }
}

/** re + i im of two numbers that must be real where both are given. */
function together(verb: string, row: number, col: number, re: unknown, im: unknown): Surd {
  const x = read(verb, row, col, re);
  if (im === undefined) return x;
  const y = read(verb, row, col, im);
  if (x.isReal && y.isReal) return x.plus(y.times(Surd.i));
  const message = `${verb}: entry (${row}, ${col}), counted from 0, has complex numbers for its real and imaginary part; give real ones`;
  throw new GoodBasisError("not-real", message, { row, col });
}

/** An entry; what is wrong with it is said with its place. */
function read(verb: string, row: number, col: number, value: unknown): Surd {
  return exactNumber(`${verb}: entry (${row}, ${col}), counted from 0`, { row, col }, value as SurdInput);
}

/**
 * The exact number that a value stands for.
 *
 * @param where - the beginning of the message
 * @throws GoodBasisError what {@link Surd.from} throws
 */
export function exactNumber(where: string, details: Readonly<Record<string, unknown>>, value: SurdInput): Surd {
  try {
    return Surd.from(value);
  } catch (error) {
    if (!(error instanceof GoodBasisError)) throw error;
    throw new GoodBasisError(error.code, `${where}: ${error.message}`, { ...error.details, ...details });
  }
}
