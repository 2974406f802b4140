import { hopping } from "../models/lattice.js";
import { EntryList } from "../operator/builder.js";
import { readMatrixMarket } from "../operator/matrix-market.js";
import { Operator } from "../operator/operator.js";
import type { Triplet, Uncertainty } from "../operator/read.js";
import { type MatrixContext, needSpace, sumOfNames } from "./names.js";
import { type NumberList, readNumber, readNumbers } from "./numbers.js";
import { atPlace, fileError, inside, type Place, showValue } from "./place.js";
import type { MatrixForms } from "./problem-file.js";
import { conform, FORMS, formSchemas } from "./schema.js";
import { sumOfTerms } from "./terms.js";

/** Whether a value has the outer form of a matrix rather than of a record of named ones. */
export function looksLikeMatrix(value: unknown): boolean {
  if (typeof value !== "object" || value === null) return typeof value === "string";
  return Array.isArray(value) || FORMS.some((form) => Object.hasOwn(value, form));
}

/**
 * Reads a matrix in any of its forms.
 *
 * @throws GoodBasisError `file`, `name`, `shape`, `not-finite`, `option` - with the place
 */
export function readMatrixAt(place: Place, value: unknown, context: MatrixContext): Operator {
  if (typeof value === "string") return sumOfNames(place, value, context);
  if (Array.isArray(value)) return atPlace(place, () => readRows(place, value));
  const forms = typeof value === "object" && value !== null ? FORMS.filter((form) => Object.hasOwn(value, form)) : [];
  const [form] = forms;
  if (form === undefined || forms.length > 1) {
    throw fileError(place, `a matrix: rows, a name, or an object with one of ${FORMS.join(", ")}`, showValue(value));
  }
  return atPlace(place, () => readForm(form, place, value, context));
}

function readForm(form: keyof MatrixForms, place: Place, value: unknown, context: MatrixContext): Operator {
  switch (form) {
    case "rows": {
      const { rows, ...shared } = conform(formSchemas.rows, place, value);
      return finish(place, readRows(inside(place, "rows"), rows), shared, context);
    }
    case "triplets": {
      const file = conform(formSchemas.triplets, place, value);
      return finish(place, readTriplets(place, file, context), file, context);
    }
    case "diagonal": {
      const { diagonal, ...shared } = conform(formSchemas.diagonal, place, value);
      const { re, im } = readNumbers(inside(place, "diagonal"), diagonal);
      return finish(place, Operator.from({ diagonal: re, imaginary: im }), shared, context);
    }
    case "permutation": {
      const { permutation, phases, ...shared } = conform(formSchemas.permutation, place, value);
      const map = readNumbers(inside(place, "permutation"), permutation).re;
      const factors = phases === undefined ? undefined : scalars(readNumbers(inside(place, "phases"), phases));
      return finish(place, Operator.permutation(map, factors), shared, context);
    }
    case "matrixMarket": {
      const { matrixMarket, ...shared } = conform(formSchemas.matrixMarket, place, value);
      return finish(place, load(inside(place, "matrixMarket"), matrixMarket, context), shared, context);
    }
    case "terms": {
      const { terms, uncertainty } = conform(formSchemas.terms, place, value);
      return widen(sumOfTerms(inside(place, "terms"), terms, context), uncertainty);
    }
    case "hopping": {
      const file = conform(formSchemas.hopping, place, value);
      return finish(place, readHopping(place, file, context), file, context);
    }
    case "translation": {
      const { translation } = conform(formSchemas.translation, place, value);
      return needSpace(place, context).operator(inside(place, form), `${translation}.translation`);
    }
    case "reflection": {
      const { reflection, centre } = conform(formSchemas.reflection, place, value);
      return needSpace(place, context).reflection(inside(place, form), reflection, centre);
    }
    case "sitePermutation": {
      const { sitePermutation, on } = conform(formSchemas.sitePermutation, place, value);
      return needSpace(place, context).sitePermutation(inside(place, "on"), on, sitePermutation);
    }
    case "exchange": {
      const { exchange } = conform(formSchemas.exchange, place, value);
      return needSpace(place, context).exchange(inside(place, form), exchange);
    }
    default:
      return form satisfies never;
  }
}

function readRows(place: Place, rows: readonly unknown[]): Operator {
  const n = rows.length;
  if (n === 0) throw fileError(place, "at least one row", "an empty list");
  const re: Float64Array[] = [];
  const im: (Float64Array | undefined)[] = [];
  for (let i = 0; i < n; i++) {
    const row = rows[i];
    if (!Array.isArray(row)) throw fileError(inside(place, i), "a row of numbers [ … ]", showValue(row));
    if (row.length !== n) {
      throw fileError(inside(place, i), `${n} numbers, as there are ${n} rows`, `${row.length}`);
    }
    const numbers = readNumbers(inside(place, i), row);
    re.push(numbers.re);
    im.push(numbers.im);
  }
  if (im.every((part) => part === undefined)) return Operator.from({ re });
  return Operator.from({ re, im: im.map((part) => part ?? new Float64Array(n)) });
}

function scalars({ re, im }: NumberList): { re: number; im: number }[] {
  return Array.from(re, (x, k) => ({ re: x, im: im?.[k] ?? 0 }));
}

function readTriplets(place: Place, file: MatrixForms["triplets"], context: MatrixContext): Operator {
  const n = file.n ?? (file.on === undefined ? context.n : dimensionOf(place, file.on, context));
  if (n === undefined) {
    throw fileError(place, 'the number of kets, from "n" here, or "n", "space" or "kets" of the file', "none of these");
  }
  const entries: Triplet[] = [];
  const seen = new Set<number>();
  for (let k = 0; k < file.triplets.length; k++) {
    const triplet = file.triplets[k];
    const at = inside(place, "triplets", k);
    if (!Array.isArray(triplet) || triplet.length < 3 || triplet.length > 4) {
      throw fileError(at, "[row, column, re] or [row, column, re, im]", showValue(triplet));
    }
    const [row, col, re, im = 0]: unknown[] = triplet;
    if (!isPlace(row, n) || !isPlace(col, n))
      throw fileError(at, `row and column from 0 to ${n - 1}`, showValue(triplet));
    if (!isFiniteNumber(re) || !isFiniteNumber(im)) throw fileError(at, "finite numbers", showValue(triplet));
    if (seen.has(row * n + col)) {
      throw fileError(at, "every place once", `(${row}, ${col}) again`, "write the sum of the two as one triplet");
    }
    seen.add(row * n + col);
    entries.push([row, col, re, im]);
  }
  return file.radii === undefined ? Operator.fromTriplets(n, entries) : withRadii(place, n, entries, file.radii);
}

function isPlace(value: unknown, n: number): value is number {
  return typeof value === "number" && Number.isInteger(value) && value >= 0 && value < n;
}

function isFiniteNumber(value: unknown): value is number {
  return typeof value === "number" && Number.isFinite(value);
}

function withRadii(place: Place, n: number, entries: readonly Triplet[], radii: readonly unknown[]): Operator {
  const at = inside(place, "radii");
  if (radii.length !== entries.length) {
    throw fileError(at, `one radius for each of the ${entries.length} triplets`, `${radii.length}`);
  }
  const list = new EntryList(n);
  for (const [k, [row, col, re, im = 0]] of entries.entries()) {
    const radius = radii[k];
    if (!isFiniteNumber(radius) || radius < 0) throw fileError(inside(at, k), "a number from 0 on", showValue(radius));
    list.add(row, col, re, im, radius);
  }
  return list.finish("readProblem");
}

function dimensionOf(place: Place, name: string, context: MatrixContext): number {
  const space = needSpace(inside(place, "on"), context);
  return space.dimension(space.target(inside(place, "on"), name));
}

function load(place: Place, path: string, context: MatrixContext): Operator {
  if (context.loadMatrix === undefined) {
    throw fileError(place, "a way to read the matrix file", "none", "pass loadMatrix: (path) => string to readProblem");
  }
  const read = context.loadMatrix;
  return atPlace(place, () => readMatrixMarket(read(path), { name: path }));
}

function readHopping(place: Place, file: MatrixForms["hopping"], context: MatrixContext): Operator {
  const n = file.on === undefined ? context.n : dimensionOf(place, file.on, context);
  if (n === undefined) throw fileError(place, 'the number of kets, from "n", "space" or "kets" of the file', "none");
  if (file.amplitudes !== undefined) {
    if (file.amplitude !== undefined) throw fileError(place, 'either "amplitude" or "amplitudes"', "both");
    const each = scalars(readNumbers(inside(place, "amplitudes"), file.amplitudes));
    return hopping(n, file.hopping, each);
  }
  return hopping(n, file.hopping, readNumber(inside(place, "amplitude"), file.amplitude ?? 1));
}

/** Embeds a matrix that was given on a factor, and adds the stated uncertainty. */
function finish(
  place: Place,
  operator: Operator,
  { on, uncertainty }: { readonly on?: string; readonly uncertainty?: Uncertainty },
  context: MatrixContext,
): Operator {
  const stated = Operator.from(operator, { uncertainty });
  if (on === undefined) return stated;
  const at = inside(place, "on");
  const space = needSpace(at, context);
  const target = space.target(at, on);
  const n = space.dimension(target);
  if (operator.n !== n) throw fileError(at, `a matrix of ${operator.n} kets, as is given here`, `"${on}" of ${n} kets`);
  return space.embed(target, stated);
}

/** A computed operator with a stated uncertainty on top of its rounding. */
function widen(operator: Operator, uncertainty: Uncertainty | undefined): Operator {
  if (uncertainty === undefined || uncertainty === "exact") return operator;
  const { csr } = operator;
  const radius = Operator.from(operator, { uncertainty }).radius;
  const nothing = { ...csr, re: new Float64Array(csr.col.length), im: undefined };
  return radius === undefined ? operator : operator.plus(Operator.fromCsr(nothing, radius));
}
