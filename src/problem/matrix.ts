import type { Surd, SurdInput } from "../exact/surd.js";
import { hopping } from "../models/lattice.js";
import { readMatrixMarket } from "../operator/matrix-market.js";
import { Operator } from "../operator/operator.js";
import type { Uncertainty } from "../operator/read.js";
import { type MatrixContext, needSpace, sumOfNames } from "./names.js";
import { isExactText, readExact, readNumber, readNumbers } from "./numbers.js";
import { atPlace, fileError, inside, type Place, showValue } from "./place.js";
import type { MatrixForms } from "./problem-file.js";
import { conform, FORMS, formSchemas } from "./schema.js";
import { sumOfTerms } from "./terms.js";
import { readTriplets } from "./triplets.js";

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
  if (Array.isArray(value)) return atPlace(place, () => readRows(place, value, undefined));
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
      return finish(place, readRows(inside(place, "rows"), rows, shared.uncertainty), shared, context);
    }
    case "triplets": {
      const file = conform(formSchemas.triplets, place, value);
      const n = file.n ?? (file.on === undefined ? context.n : dimensionOf(place, file.on, context));
      return finish(place, readTriplets(place, file, n), file, context);
    }
    case "diagonal": {
      const { diagonal, ...shared } = conform(formSchemas.diagonal, place, value);
      const at = inside(place, "diagonal");
      if (isExactly(diagonal, shared.uncertainty)) {
        return finish(place, Operator.diagonal(exactNumbers(at, diagonal)), shared, context);
      }
      const { re, im } = readNumbers(at, diagonal);
      return finish(place, Operator.from({ diagonal: re, imaginary: im }), shared, context);
    }
    case "permutation": {
      const { permutation, phases, ...shared } = conform(formSchemas.permutation, place, value);
      const map = readNumbers(inside(place, "permutation"), permutation).re;
      const factors = phases && readScalars(inside(place, "phases"), phases, shared.uncertainty);
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

function readRows(place: Place, rows: readonly unknown[], uncertainty: Uncertainty | undefined): Operator {
  const n = rows.length;
  if (n === 0) throw fileError(place, "at least one row", "an empty list");
  const lists = rows.map((row, i): readonly unknown[] => {
    if (!Array.isArray(row)) throw fileError(inside(place, i), "a row of numbers [ … ]", showValue(row));
    if (row.length === n) return row;
    throw fileError(inside(place, i), `${n} numbers, as there are ${n} rows`, `${row.length}`);
  });
  if (lists.some((list) => isExactly(list, uncertainty))) {
    return Operator.from(lists.map((list, i) => exactNumbers(inside(place, i), list)));
  }
  const re: Float64Array[] = [];
  const im: (Float64Array | undefined)[] = [];
  for (const [i, list] of lists.entries()) {
    const numbers = readNumbers(inside(place, i), list);
    re.push(numbers.re);
    im.push(numbers.im);
  }
  if (im.every((part) => part === undefined)) return Operator.from({ re });
  return Operator.from({ re, im: im.map((part) => part ?? new Float64Array(n)) });
}

/** Whether the entries of a matrix are read exactly: where a text is no decimal, and where they are stated to be exact and are text. */
function isExactly(values: readonly unknown[], uncertainty: Uncertainty | undefined): boolean {
  return values.some((value) => isExactText(value) || (uncertainty === "exact" && typeof value === "string"));
}

function exactNumbers(place: Place, values: readonly unknown[]): Surd[] {
  return values.map((value, k) => readExact(inside(place, k), value));
}

/** Numbers as an operator takes them, exact ones as such. */
function readScalars(place: Place, values: readonly unknown[], uncertainty: Uncertainty | undefined): SurdInput[] {
  if (isExactly(values, uncertainty)) return exactNumbers(place, values);
  const { re, im } = readNumbers(place, values);
  return Array.from(re, (x, k) => ({ re: x, im: im?.[k] ?? 0 }));
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
    const each = readScalars(inside(place, "amplitudes"), file.amplitudes, file.uncertainty);
    return hopping(n, file.hopping, each);
  }
  const { amplitude = 1 } = file;
  const at = inside(place, "amplitude");
  const exact = isExactly([amplitude], file.uncertainty);
  return hopping(n, file.hopping, exact ? readExact(at, amplitude) : readNumber(at, amplitude));
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
