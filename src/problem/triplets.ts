import { ExactOperator } from "../exact/operator.js";
import { Surd } from "../exact/surd.js";
import { EntryList } from "../operator/builder.js";
import { Operator } from "../operator/operator.js";
import { type Radius, radiusAt } from "../operator/radius.js";
import type { Triplet } from "../operator/read.js";
import { readExact } from "./numbers.js";
import { fileError, inside, type Place, showValue } from "./place.js";
import type { MatrixForms } from "./problem-file.js";

type TripletFile = MatrixForms["triplets"];

/** A triplet of the file whose place has been checked. */
interface Placed {
  readonly at: Place;
  readonly row: number;
  readonly col: number;
  readonly re: unknown;
  readonly im: unknown;
}

/**
 * The operator of the triplets of a file: exact where one of them is text, or where they come with what they are exactly.
 *
 * @param n - number of kets, where something tells it
 * @throws GoodBasisError `file`, `shape`
 */
export function readTriplets(place: Place, file: TripletFile, n: number | undefined): Operator {
  if (n === undefined) {
    throw fileError(place, 'the number of kets, from "n" here, or "n", "space" or "kets" of the file', "none of these");
  }
  const placed = placedTriplets(place, file, n);
  if (placed.some(({ re, im }) => typeof re === "string" || typeof im === "string")) {
    return exactTriplets(place, file, n, placed);
  }
  const entries = placed.map(({ at, row, col, re, im }): Triplet => {
    if (!isFiniteNumber(re) || !isFiniteNumber(im)) {
      throw fileError(at, "finite numbers", showValue(im === 0 ? [row, col, re] : [row, col, re, im]));
    }
    return [row, col, re, im];
  });
  const operator =
    file.radii === undefined ? Operator.fromTriplets(n, entries) : withRadii(place, n, entries, file.radii);
  return file.exact === undefined ? operator : withExact(place, operator, entries, file.exact);
}

function placedTriplets(place: Place, file: TripletFile, n: number): Placed[] {
  const seen = new Set<number>();
  return file.triplets.map((triplet, k) => {
    const at = inside(place, "triplets", k);
    if (!Array.isArray(triplet) || triplet.length < 3 || triplet.length > 4) {
      throw fileError(at, "[row, column, re] or [row, column, re, im]", showValue(triplet));
    }
    const [row, col, re, im = 0]: unknown[] = triplet;
    if (!isPlace(row, n) || !isPlace(col, n))
      throw fileError(at, `row and column from 0 to ${n - 1}`, showValue(triplet));
    if (seen.has(row * n + col)) {
      throw fileError(at, "every place once", `(${row}, ${col}) again`, "write the sum of the two as one triplet");
    }
    seen.add(row * n + col);
    return { at, row, col, re, im };
  });
}

function exactTriplets(place: Place, file: TripletFile, n: number, placed: readonly Placed[]): Operator {
  for (const field of ["radii", "exact"] as const) {
    if (file[field] === undefined) continue;
    throw fileError(inside(place, field), "triplets of numbers beside it", "exact ones, which need it not");
  }
  const triplets = placed.map(({ at, row, col, re, im }) => {
    const y = readExact(inside(at, 3), im);
    return [row, col, readExact(inside(at, 2), re).plus(y.times(Surd.i))] as const;
  });
  return Operator.from(ExactOperator.fromTriplets(n, triplets));
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

/** The operator with what its entries are exactly; each must be within its radius. */
function withExact(place: Place, operator: Operator, entries: readonly Triplet[], exact: readonly unknown[]): Operator {
  const at = inside(place, "exact");
  if (exact.length !== entries.length) {
    throw fileError(at, `one exact number for each of the ${entries.length} triplets`, `${exact.length}`);
  }
  const values = exact.map((value, k) => readExact(inside(at, k), value));
  const radii = radiiByPlace(operator);
  const triplets = entries.map(([row, col, re, im = 0], k) => {
    const value = values[k] ?? Surd.zero;
    const off = value.minus(Surd.from({ re, im })).squaredModulus();
    const radius = radii.get(row * operator.n + col) ?? 0;
    if (off.compare(Surd.from(radius).power(2)) <= 0) return [row, col, value] as const;
    throw fileError(
      inside(at, k),
      `a number within ${radius} of the triplet ${showValue(entries[k])}`,
      showValue(exact[k]),
    );
  });
  return Operator.withExact(operator, () => ExactOperator.fromTriplets(operator.n, triplets));
}

function radiiByPlace(operator: Operator): ReadonlyMap<number, number> {
  const { csr, n } = operator;
  const radius: Radius = operator.isExact ? "exact" : (operator.radius ?? "default");
  const radii = new Map<number, number>();
  for (let row = 0; row < n; row++) {
    for (let e = csr.ptr[row] as number; e < (csr.ptr[row + 1] as number); e++) {
      radii.set(row * n + (csr.col[e] as number), radiusAt({ csr, radius }, e));
    }
  }
  return radii;
}
