import type { BasisColumns } from "../certify/columns.js";
import type { ClaimedLabel } from "../certify/validate.js";
import { requireArgument, requireOptions } from "../misuse.js";
import { readMatrixMarket } from "../operator/matrix-market.js";
import { parseDocument } from "./document.js";
import { complexOf, readNumbers } from "./numbers.js";
import { fileError, inside, type Place, showValue } from "./place.js";

/** Options of {@link readBasis}. */
export interface ReadBasisOptions {
  /** Name of the file, for messages. */
  readonly name?: string;
  /** Names of the kets, for states that are given by them. */
  readonly kets?: readonly string[] | undefined;
  /** Number of kets; that of `kets` when not given. */
  readonly n?: number;
}

/** A basis file that has been read, as {@link validateBasis} takes it. */
export interface ReadBasis {
  /** One row a ket, one column a state. */
  readonly columns: BasisColumns;
  /** Claimed labels by candidate, one a state. */
  readonly labels: Readonly<Record<string, readonly ClaimedLabel[]>>;
}

/**
 * Reads a basis that somebody brings: a Matrix Market file with one state a column, or JSON.
 *
 * JSON is a list of states, or `{ "states": […], "labels": { "Jz": ["3/2", …] } }`. A state is a list of n numbers (complex ones
 * as `[re, im]` or `"1+2i"`, exact ones as `"sqrt(2/3)"`, which are rounded), or an object of coefficients by ket name.
 *
 * @param source - the text of the file, or what `JSON.parse` made of it
 * @param options - names and number of the kets
 * @throws GoodBasisError `file` - malformed, with line and field; `name` and `shape` come from {@link validateBasis}
 *
 * @example
 * ```ts
 * import { readBasis, validateBasis } from "goodbasis";
 *
 * const kets = ["up", "down"];
 * const problem = { h0: { diagonal: [0, 0] }, v: [[0, 1], [1, 0]], kets };
 * const { columns, labels } = readBasis('[{ "up": 1, "down": 1 }, { "up": 1, "down": -1 }]', { kets });
 * console.log(validateBasis(problem, columns, labels).verdict); // not good: the states are not normalised
 * ```
 */
export function readBasis(source: unknown, options: ReadBasisOptions = {}): ReadBasis {
  checkOptions(options);
  const name = options.name ?? "basis";
  if (typeof source === "string" && /^\uFEFF?%%MatrixMarket/i.test(source)) {
    return { columns: readMatrixMarket(source, { name }), labels: {} };
  }
  const document = { name, text: typeof source === "string" ? source : undefined };
  const value = typeof source === "string" ? parseDocument(document, source) : source;
  const place: Place = { document, path: [] };
  if (Array.isArray(value)) return { columns: readStates(place, value, options), labels: {} };
  if (typeof value !== "object" || value === null || !("states" in value) || !Array.isArray(value.states)) {
    throw fileError(place, 'a list of states, or an object with the fields "states" and "labels"', showValue(value));
  }
  const unknown = Object.keys(value).find((key) => key !== "states" && key !== "labels");
  if (unknown !== undefined)
    throw fileError(inside(place, unknown), "no other fields than states, labels", showValue(unknown));
  const labels = "labels" in value ? value.labels : {};
  return {
    columns: readStates(inside(place, "states"), value.states, options),
    labels: readLabels(inside(place, "labels"), labels, value.states.length),
  };
}

function checkOptions(options: ReadBasisOptions): void {
  requireOptions("readBasis", options, ["name", "kets", "n"]);
  const { name, kets, n } = options;
  const next = "or leave it out";
  requireArgument(name === undefined || typeof name === "string", "readBasis", "as name a text", name, next);
  requireArgument(kets === undefined || Array.isArray(kets), "readBasis", "as kets a list of names", kets, next);
  const whole = n === undefined || (Number.isInteger(n) && n >= 1);
  requireArgument(whole, "readBasis", "as n the number of kets, 1, 2, …", n, next);
}

function readStates(place: Place, states: readonly unknown[], { kets, n }: ReadBasisOptions): BasisColumns {
  const first: unknown = states[0];
  const rows = n ?? kets?.length ?? (Array.isArray(first) ? first.length : 0);
  if (states.length === 0) throw fileError(place, "at least one state", "an empty list");
  const index = new Map(kets?.map((ket, k) => [ket, k]));
  const re = Array.from({ length: rows }, () => new Array<number>(states.length).fill(0));
  const im = Array.from({ length: rows }, () => new Array<number>(states.length).fill(0));
  let complex = false;
  const put = (row: number, column: number, x: number, y: number): void => {
    (re[row] as number[])[column] = x;
    (im[row] as number[])[column] = y;
    if (y !== 0) complex = true;
  };
  for (const [column, state] of states.entries()) {
    const at = inside(place, column);
    if (Array.isArray(state)) {
      if (state.length !== rows) throw fileError(at, `${rows} numbers, one a ket`, `${state.length}`);
      const numbers = readNumbers(at, state);
      for (let row = 0; row < rows; row++) put(row, column, numbers.re[row] as number, numbers.im?.[row] ?? 0);
      continue;
    }
    if (typeof state !== "object" || state === null) {
      throw fileError(at, "a list of numbers, or an object of coefficients by ket name", showValue(state));
    }
    for (const [ket, coefficient] of Object.entries(state)) {
      const row = index.get(ket);
      const z = complexOf(coefficient);
      if (row === undefined) throw fileError(inside(at, ket), "the name of a ket of the problem", showValue(ket));
      if (z === undefined) throw fileError(inside(at, ket), "a finite number", showValue(coefficient));
      put(row, column, z.re, z.im);
    }
  }
  return complex ? { re, im } : re;
}

function readLabels(place: Place, value: unknown, count: number): Record<string, ClaimedLabel[]> {
  if (typeof value !== "object" || value === null || Array.isArray(value)) {
    throw fileError(place, "an object with one list of labels for each candidate", showValue(value));
  }
  return Object.fromEntries(
    Object.entries(value).map(([name, list]: [string, unknown]) => {
      const at = inside(place, name);
      if (!Array.isArray(list) || list.length !== count) {
        throw fileError(at, `a list of ${count} labels, one a state`, showValue(list));
      }
      return [name, list.map((label, k) => readLabel(inside(at, k), label))];
    }),
  );
}

/** A quantum number as text stays text; "1+2i" is an eigenvalue. */
function readLabel(place: Place, value: unknown): ClaimedLabel {
  if (typeof value === "string" && !value.endsWith("i")) return value;
  const z = complexOf(value);
  if (z === undefined) throw fileError(place, 'an eigenvalue, or a quantum number such as "3/2"', showValue(value));
  return z.im === 0 ? z.re : z;
}
