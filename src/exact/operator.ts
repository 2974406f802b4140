import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, shown } from "../misuse.js";
import type { Csr } from "../numerics/csr.js";
import { type SignedProduct, sumOfProducts } from "./accumulate.js";
import { type ExactBudget, Meter } from "./budget.js";
import { Entries } from "./entries.js";
import { exactRowsOf, type FloatingRows, floatingOf } from "./floating.js";
import { requireList, requireSquareRows, requireTriplets } from "./forms.js";
import {
  type ExactRows,
  type ExactTriplet,
  flipRows,
  kronRows,
  principalRows,
  rowsOfTriplets,
  scaleRows,
  sumRows,
} from "./rows.js";
import { isDiagonalRows, isHermitianRows, isMonomialRows } from "./structure.js";
import { Surd, type SurdInput } from "./surd.js";
import { ExactVector } from "./vector.js";

/** An element of an exact operator. */
export interface ExactElement {
  /** Row, 0-based. */
  readonly row: number;
  /** Column, 0-based. */
  readonly col: number;
  /** Not zero. */
  readonly value: Surd;
}

/**
 * A square matrix of exact numbers in sparse rows; immutable. What is not stored is zero, and what is zero is not stored, so
 * that "does it vanish?" is a look at the pattern.
 *
 * Matrices of integers and of fractions over one denominator are multiplied in machine integers, checked for overflow.
 *
 * @example
 * ```ts
 * import { ExactOperator } from "goodbasis";
 *
 * const sx = ExactOperator.from([[0, "1/2"], ["1/2", 0]]);
 * const sz = ExactOperator.diagonal(["1/2", "-1/2"]);
 * const sy = sx.commutator(sz).scale("i");
 * console.log(sy.entry(0, 1).text(), sy.isHermitian); // -i/2 true
 * ```
 */
export class ExactOperator {
  /** The number of kets. */
  readonly n: number;
  /**
   * The entries in sparse rows; read-only.
   *
   * @internal
   */
  readonly rows: ExactRows;
  #columns: ExactRows | undefined;
  #isHermitian: boolean | undefined;

  private constructor(n: number, rows: ExactRows) {
    const made = isObject(rows) && "entries" in rows;
    requireArgument(made, "ExactOperator", "what its makers give", n, "make one with ExactOperator.from");
    this.n = n;
    this.rows = rows;
  }

  /**
   * The operator of nested rows.
   *
   * @throws GoodBasisError `shape` - not square; what {@link Surd.from} throws
   */
  static from(rows: readonly (readonly SurdInput[])[]): ExactOperator {
    const lists = Array.isArray(rows) && rows.every(Array.isArray);
    requireArgument(lists, "ExactOperator.from", "rows of numbers", rows, 'such as [[1, "1/2"], ["1/2", 0]]');
    const n = rows.length;
    for (const [k, row] of rows.entries()) {
      if (row.length === n) continue;
      const message = `ExactOperator.from: row ${k} has ${row.length} entries in a matrix of ${n} rows; it must be square`;
      throw new GoodBasisError("shape", message, { row: k, length: row.length, n });
    }
    const triplets = rows.flatMap((row, j) => row.map((value, k): ExactTriplet => [j, k, value]));
    return ExactOperator.fromTriplets(n, triplets);
  }

  /**
   * The operator of triplets `[row, col, value]`, 0-based, in any order; duplicates are summed.
   *
   * @throws GoodBasisError `shape`; what {@link Surd.from} throws
   */
  static fromTriplets(n: number, triplets: Iterable<ExactTriplet>): ExactOperator {
    const where = "ExactOperator.fromTriplets";
    requireDimension(where, n);
    requireTriplets(where, triplets);
    return new ExactOperator(n, rowsOfTriplets(where, n, triplets));
  }

  /**
   * The exact dyadic values of a floating matrix in sparse rows: nothing is rounded and nothing is guessed.
   *
   * @throws GoodBasisError `shape` - not square; `not-finite`
   */
  static fromFloating(csr: Csr): ExactOperator {
    requireSquareRows("ExactOperator.fromFloating", csr);
    return new ExactOperator(csr.rows, exactRowsOf(csr));
  }

  /** The identity. @throws GoodBasisError `shape` */
  static identity(n: number): ExactOperator {
    requireDimension("ExactOperator.identity", n);
    const ptr = Int32Array.from({ length: n + 1 }, (_, k) => k);
    const entries = Entries.ofWhole({ re: new Float64Array(n).fill(1), im: undefined, den: 1 });
    return new ExactOperator(n, { ptr, col: ptr.slice(0, n), entries });
  }

  /** The zero operator. @throws GoodBasisError `shape` */
  static zero(n: number): ExactOperator {
    return ExactOperator.fromTriplets(n, []);
  }

  /**
   * The diagonal operator of the given numbers.
   *
   * @throws GoodBasisError `shape` - no number; what {@link Surd.from} throws
   */
  static diagonal(values: readonly SurdInput[]): ExactOperator {
    requireList("ExactOperator.diagonal", values);
    return ExactOperator.fromTriplets(
      values.length,
      values.map((value, k): ExactTriplet => [k, k, value]),
    );
  }

  /**
   * The operator that sends ket j to `phases[j]` times ket `map[j]`.
   *
   * @param phases - one factor for each ket, 1 when not given
   * @throws GoodBasisError `shape` - `map` is no permutation of 0 … n − 1, or a wrong number of phases
   */
  static permutation(map: readonly number[], phases?: readonly SurdInput[]): ExactOperator {
    requireList("ExactOperator.permutation", map);
    if (phases !== undefined) requireList("ExactOperator.permutation", phases);
    if (new Set(map).size !== map.length || (phases !== undefined && phases.length !== map.length)) {
      const message = "ExactOperator.permutation: expected each of 0 … n − 1 once, and one phase for each ket if any";
      throw new GoodBasisError("shape", message, { n: map.length, phases: phases?.length });
    }
    return ExactOperator.fromTriplets(
      map.length,
      map.map((row, col): ExactTriplet => [row, col, phases?.[col] ?? 1]),
    );
  }

  /**
   * The sum of all given operators.
   *
   * @throws GoodBasisError `shape` - no operator, or different dimensions
   */
  static sum(...terms: readonly ExactOperator[]): ExactOperator {
    const [first, ...others] = terms;
    if (first === undefined) {
      throw new GoodBasisError("shape", "ExactOperator.sum: expected at least one operator, got none");
    }
    requireOperand("sum", first);
    return others.reduce((sum, term) => sum.plus(term), first);
  }

  /** A + B. @throws GoodBasisError `shape` */
  plus(other: ExactOperator): ExactOperator {
    this.#requireSame("plus", other);
    return new ExactOperator(this.n, sumRows(this.rows, other.rows, 1));
  }

  /** A − B. @throws GoodBasisError `shape` */
  minus(other: ExactOperator): ExactOperator {
    this.#requireSame("minus", other);
    return new ExactOperator(this.n, sumRows(this.rows, other.rows, -1));
  }

  /** z A. @throws GoodBasisError what {@link Surd.from} throws */
  scale(factor: SurdInput): ExactOperator {
    return new ExactOperator(this.n, scaleRows(this.rows, Surd.from(factor)));
  }

  /** A B. @throws GoodBasisError `shape`, `budget` */
  times(other: ExactOperator, budget?: ExactBudget): ExactOperator {
    this.#requireSame("times", other);
    return this.#products("times", [{ left: this.rows, right: other.rows, sign: 1 }], budget);
  }

  /** A B − B A, in one pass, so that what cancels is never stored. @throws GoodBasisError `shape`, `budget` */
  commutator(other: ExactOperator, budget?: ExactBudget): ExactOperator {
    this.#requireSame("commutator", other);
    const [left, right] = [this.rows, other.rows];
    return this.#products(
      "commutator",
      [
        { left, right, sign: 1 },
        { left: right, right: left, sign: -1 },
      ],
      budget,
    );
  }

  /** A B + B A. @throws GoodBasisError `shape`, `budget` */
  anticommutator(other: ExactOperator, budget?: ExactBudget): ExactOperator {
    this.#requireSame("anticommutator", other);
    const [left, right] = [this.rows, other.rows];
    return this.#products(
      "anticommutator",
      [
        { left, right, sign: 1 },
        { left: right, right: left, sign: 1 },
      ],
      budget,
    );
  }

  /** The adjoint A†. */
  adjoint(): ExactOperator {
    return new ExactOperator(this.n, flipRows(this.rows, true));
  }

  /** A ⊗ B; the kets of A are the slow index. */
  kron(other: ExactOperator): ExactOperator {
    requireOperand("kron", other);
    return new ExactOperator(this.n * other.n, kronRows(this.rows, other.rows));
  }

  /**
   * A to a whole power, by repeated squaring.
   *
   * @throws GoodBasisError `option` - not a whole number from 0 on; `budget`
   */
  power(exponent: number, budget?: ExactBudget): ExactOperator {
    if (!Number.isInteger(exponent) || exponent < 0) {
      const message = `ExactOperator.power: the exponent must be 0, 1, 2, …, got ${shown(exponent)}`;
      throw new GoodBasisError("option", message, { exponent });
    }
    if (exponent === 0) return ExactOperator.identity(this.n);
    if (exponent === 1) return this;
    const half = this.power(Math.floor(exponent / 2), budget);
    const square = half.times(half, budget);
    return exponent % 2 === 0 ? square : square.times(this, budget);
  }

  /** A v. @throws GoodBasisError `shape` */
  apply(vector: ExactVector): ExactVector {
    this.#requireKets("apply", vector);
    const { ptr, col: row, entries } = this.columns;
    const values = entries.surds;
    const sums = new Map<number, Surd>();
    for (const [k, x] of vector.values.entries()) {
      const ket = vector.index[k] as number;
      for (let e = ptr[ket] as number; e < (ptr[ket + 1] as number); e++) {
        const place = row[e] as number;
        const product = (values[e] as Surd).times(x);
        const before = sums.get(place);
        sums.set(place, before === undefined ? product : before.plus(product));
      }
    }
    return ExactVector.fromEntries(this.n, sums);
  }

  /**
   * The matrix of elements q_i† A q_j between given vectors, as they are: they are not normalised first.
   *
   * @throws GoodBasisError `shape` - a vector over another number of kets, or none
   */
  restrict(vectors: readonly ExactVector[]): ExactOperator {
    requireList("ExactOperator.restrict", vectors);
    const triplets: ExactTriplet[] = [];
    for (const [j, right] of vectors.entries()) {
      const image = this.apply(right);
      if (image.isZero) continue;
      for (const [i, left] of vectors.entries()) triplets.push([i, j, left.inner(image)]);
    }
    return ExactOperator.fromTriplets(vectors.length, triplets);
  }

  /**
   * The rows and columns of some kets.
   *
   * @param kets - ascending, without repetition
   * @throws GoodBasisError `shape`
   */
  principal(kets: readonly number[]): ExactOperator {
    requireList("ExactOperator.principal", kets);
    requireDimension("ExactOperator.principal", kets.length);
    kets.forEach((ket, k) => {
      const before = k === 0 ? -1 : (kets[k - 1] as number);
      if (Number.isInteger(ket) && ket > before && ket < this.n) return;
      const message = `ExactOperator.principal: kets must ascend within 0 … ${this.n - 1}, got ${shown(ket)} after ${shown(before)}`;
      throw new GoodBasisError("shape", message, { ket, n: this.n });
    });
    return new ExactOperator(kets.length, principalRows(this.rows, kets));
  }

  /** The trace. */
  trace(): Surd {
    let sum = Surd.zero;
    for (const { row, col, value } of this.elements()) if (row === col) sum = sum.plus(value);
    return sum;
  }

  /** Entry (row, col), 0-based. @throws GoodBasisError `shape` */
  entry(row: number, col: number): Surd {
    for (const index of [row, col]) {
      if (Number.isInteger(index) && index >= 0 && index < this.n) continue;
      const message = `ExactOperator.entry: (${shown(row)}, ${shown(col)}) is outside 0 … ${this.n - 1}`;
      throw new GoodBasisError("shape", message, { row, col, n: this.n });
    }
    for (let e = this.rows.ptr[row] as number; e < (this.rows.ptr[row + 1] as number); e++) {
      if (this.rows.col[e] === col) return this.rows.entries.at(e);
    }
    return Surd.zero;
  }

  /** The elements that are not zero, row by row: the exact list of offenders where the operator should vanish. */
  *elements(): Generator<ExactElement> {
    const { ptr, col, entries } = this.rows;
    for (let row = 0; row < this.n; row++) {
      for (let e = ptr[row] as number; e < (ptr[row + 1] as number); e++) {
        yield { row, col: col[e] as number, value: entries.at(e) };
      }
    }
  }

  /** The number of elements that are not zero. */
  get count(): number {
    return this.rows.col.length;
  }

  /** Whether it vanishes, exactly. */
  get isZero(): boolean {
    return this.count === 0;
  }

  /** Whether both are the same matrix, exactly. */
  equals(other: ExactOperator): boolean {
    return other instanceof ExactOperator && this.n === other.n && this.minus(other).isZero;
  }

  /**
   * The transpose in sparse rows, made once: row k holds column k.
   *
   * @internal
   */
  get columns(): ExactRows {
    this.#columns ??= flipRows(this.rows, false);
    return this.#columns;
  }

  /** Whether A = A†, exactly. */
  get isHermitian(): boolean {
    this.#isHermitian ??= isHermitianRows(this.rows, this.columns);
    return this.#isHermitian;
  }

  /** Whether every entry is real. */
  get isReal(): boolean {
    return this.rows.entries.surds.every((x) => x.isReal);
  }

  /** Whether every entry is a real fraction. */
  get isRational(): boolean {
    return this.rows.entries.surds.every((x) => x.isRational);
  }

  /** Whether nothing stands off the diagonal. */
  get isDiagonal(): boolean {
    return isDiagonalRows(this.rows);
  }

  /** Whether no row and no column holds two entries. */
  get isMonomial(): boolean {
    return isMonomialRows(this.rows);
  }

  /** Whether A A† = 1, exactly. @throws GoodBasisError `budget` */
  get isUnitary(): boolean {
    return this.times(this.adjoint()).equals(ExactOperator.identity(this.n));
  }

  /** Whether A commutes with A†, exactly. @throws GoodBasisError `budget` */
  get isNormal(): boolean {
    return this.isHermitian || this.commutator(this.adjoint()).isZero;
  }

  /**
   * The matrix in doubles, each part of each entry correctly rounded, with the radius that this leaves.
   *
   * @throws GoodBasisError `not-finite` - an entry beyond the range of doubles
   */
  toFloating(): FloatingRows {
    return floatingOf("ExactOperator.toFloating", this.n, this.rows);
  }

  #products(where: string, products: readonly SignedProduct[], budget: ExactBudget | undefined): ExactOperator {
    const meter = new Meter(`ExactOperator.${where}`, budget);
    return new ExactOperator(this.n, sumOfProducts(this.n, products, meter));
  }

  #requireSame(where: string, other: ExactOperator): void {
    requireOperand(where, other);
    if (this.n === other.n) return;
    const message = `ExactOperator.${where}: operators on ${this.n} and ${other.n} kets; both must act on the same space`;
    throw new GoodBasisError("shape", message, { n: this.n, other: other.n });
  }

  #requireKets(where: string, vector: ExactVector): void {
    requireArgument(
      vector instanceof ExactVector,
      `ExactOperator.${where}`,
      "an ExactVector",
      vector,
      "see ExactVector.from",
    );
    if (this.n === vector.n) return;
    const message = `ExactOperator.${where}: the operator acts on ${this.n} kets, the vector has ${vector.n} components`;
    throw new GoodBasisError("shape", message, { n: this.n, components: vector.n });
  }
}

function requireDimension(where: string, n: number): void {
  if (Number.isInteger(n) && n >= 1) return;
  throw new GoodBasisError("shape", `${where}: the number of kets must be 1, 2, …, got ${shown(n)}`, { n });
}

function requireOperand(where: string, other: unknown): void {
  const next = "make one with ExactOperator.from";
  requireArgument(other instanceof ExactOperator, `ExactOperator.${where}`, "an ExactOperator", other, next);
}
