import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Csr } from "../numerics/csr.js";
import { fromDense, transpose } from "../numerics/sparse.js";
import { Operator } from "../operator/operator.js";

/** A matrix with methods, such as an ml-matrix `Matrix`. */
export interface MatrixLike {
  /** Number of rows. */
  readonly rows: number;
  /** Number of columns. */
  readonly columns: number;
  /** The element in a row and column, from 0. */
  get(row: number, column: number): number;
}

/** Real numbers, n rows of m. */
export type RealColumns = readonly (readonly number[])[] | MatrixLike;

/**
 * A basis as columns over the kets: n rows, one column a state. Nested arrays, an ml-matrix `Matrix`, `{ re, im }` of either,
 * or an {@link Operator} for a complete basis.
 */
export type BasisColumns = RealColumns | { readonly re: RealColumns; readonly im?: RealColumns } | Operator;

/**
 * Reads a basis; row k of the result is column k.
 *
 * @throws GoodBasisError `shape`, `not-finite` with the place
 */
export function readColumns(input: BasisColumns, n: number): Csr {
  if (input instanceof Operator) {
    if (input.n !== n) throw wrongRows(input.n, n);
    return transpose(input.csr);
  }
  const complex = isComplex(input);
  const re = readReal(complex ? input.re : input, n, "re");
  const im = complex && input.im !== undefined ? readReal(input.im, n, "im") : undefined;
  if (im !== undefined && im.count !== re.count) {
    throw new GoodBasisError(
      "shape",
      `the basis has ${re.count} columns in re but ${im.count} in im; give both alike`,
      {
        re: re.count,
        im: im.count,
      },
    );
  }
  return transpose(fromDense(n, re.count, re.values, im?.values));
}

function isComplex(input: BasisColumns): input is { readonly re: RealColumns; readonly im?: RealColumns } {
  return typeof input === "object" && input !== null && "re" in input;
}

function readReal(input: RealColumns, n: number, part: string): { values: Float64Array; count: number } {
  const list = Array.isArray(input);
  if (!list && !isMatrixLike(input)) {
    throw new GoodBasisError("shape", "a basis is given as n rows of numbers, { re, im }, a Matrix or an Operator", {});
  }
  const rows = list ? input.length : input.rows;
  if (rows !== n) throw wrongRows(rows, n);
  const count = list ? ((input[0] as readonly number[] | undefined)?.length ?? 0) : input.columns;
  if (count === 0 || count > n) {
    throw new GoodBasisError("shape", `a basis of ${n} kets has 1 to ${n} columns; got ${count}`, { columns: count });
  }
  const values = new Float64Array(n * count);
  for (let i = 0; i < n; i++) {
    const row = list ? (input[i] as readonly number[]) : undefined;
    if (list && !Array.isArray(row) && !ArrayBuffer.isView(row)) {
      throw new GoodBasisError("shape", `row ${i} of the basis is ${shown(row)}; give a list of ${count} numbers`, {
        row: i,
      });
    }
    if (row !== undefined && row.length !== count) {
      throw new GoodBasisError("shape", `row ${i} of the basis has ${row.length} numbers, row 0 has ${count}`, {
        row: i,
      });
    }
    for (let k = 0; k < count; k++) {
      const x = row === undefined ? (input as MatrixLike).get(i, k) : row[k];
      if (typeof x !== "number" || !Number.isFinite(x)) {
        throw new GoodBasisError("not-finite", `the basis has ${shown(x)} in ${part} at row ${i}, column ${k}`, {
          row: i,
          column: k,
        });
      }
      values[i * count + k] = x;
    }
  }
  return { values, count };
}

function isMatrixLike(input: unknown): input is MatrixLike {
  return typeof input === "object" && input !== null && "rows" in input && "columns" in input && "get" in input;
}

function wrongRows(rows: number, n: number): GoodBasisError {
  return new GoodBasisError("shape", `the basis has ${rows} rows but there are ${n} kets; give one row a ket`, {
    expected: n,
    received: rows,
  });
}
