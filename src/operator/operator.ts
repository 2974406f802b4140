import { Matrix } from "ml-matrix";
import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Complex, Scalar } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import type { Dense } from "../numerics/dense.js";
import { toDense, valueAt } from "../numerics/sparse.js";
import { pairwise, uncertainAdjoint, uncertainKron, uncertainScale, uncertainSum } from "./arithmetic.js";
import { requireIndex, requireOperatorOptions, requireRows, requireScalar, wrongOperand } from "./checks.js";
import { hashOf } from "./hash.js";
import { isDenselyFilled, uncertainCommutator, uncertainProduct } from "./products.js";
import { type Radius, radiiOf, type Uncertain } from "./radius.js";
import {
  type MatrixData,
  readDiagonal,
  readMatrix,
  readPermutation,
  readTriplets,
  requireDimension,
  type Triplet,
  type Uncertainty,
  withUncertainty,
} from "./read.js";
import { restrictTo } from "./restrict.js";
import { Sizes } from "./sizes.js";
import { type HermitianDefect, hermitianPart } from "./structure.js";
import { Traits } from "./traits.js";

/** Options of {@link Operator.from} and its relatives. */
export interface OperatorOptions {
  /** How well the entries are known; half a unit in the last place of each when not given. */
  readonly uncertainty?: Uncertainty | undefined;
}

/**
 * A square complex matrix with a bound on the error of every entry; immutable.
 *
 * Entries live in sparse rows; what is not stored is exactly zero. Radii pass rigorously through every operation, its own
 * rounding included (Higham, Accuracy and Stability of Numerical Algorithms, ch. 3). Structure is found when first asked for,
 * and remembered.
 *
 * @example
 * ```ts
 * import { Operator } from "goodbasis";
 *
 * const x = Operator.from([[0, 1], [1, 0]], { uncertainty: "exact" });
 * const z = Operator.diagonal([1, -1], { uncertainty: "exact" });
 * const y = x.commutator(z).scale({ re: 0, im: 0.5 });
 * console.log(y.entry(0, 1).im, y.isHermitian, y.error); // -1 true 0
 * ```
 */
export class Operator {
  readonly #core: Uncertain;
  readonly #traits: Traits;
  readonly #sizes: Sizes;
  #radii: Float64Array | undefined;
  #dense: Dense | undefined;
  #hash: string | undefined;

  private constructor(core: Uncertain) {
    requireRows(core);
    this.#core = core;
    this.#traits = new Traits(core);
    this.#sizes = new Sizes(core);
  }

  /**
   * Reads a matrix of any accepted form; an operator is returned as it is, unless an uncertainty is stated.
   *
   * @param input - the matrix; arrays are copied
   * @param options - how well its entries are known
   * @throws GoodBasisError `shape`, `not-finite`, `option`
   */
  static from(input: Operator | MatrixData, options: OperatorOptions = {}): Operator {
    requireOperatorOptions("Operator.from", options);
    if (input instanceof Operator && options.uncertainty === undefined) return input;
    const core = input instanceof Operator ? input.#core : readMatrix("Operator.from", input);
    return new Operator(withUncertainty("Operator.from", core, options.uncertainty));
  }

  /**
   * Wraps sparse rows without copying them, and without looking at every entry: columns must ascend within each row.
   *
   * @param csr - square sparse rows
   * @param radius - `"default"`, `"exact"` or one bound for each stored entry
   * @throws GoodBasisError `shape` - no square sparse rows, or arrays of lengths that do not belong together
   */
  static fromCsr(csr: Csr, radius: Radius = "default"): Operator {
    return new Operator({ csr, radius });
  }

  /**
   * The operator of the given triplets `[row, col, re, im?]`, 0-based; those of the same place are summed.
   *
   * @throws GoodBasisError `shape`, `not-finite`, `option`
   */
  static fromTriplets(n: number, entries: readonly Triplet[], options: OperatorOptions = {}): Operator {
    const verb = "Operator.fromTriplets";
    requireOperatorOptions(verb, options);
    return new Operator(withUncertainty(verb, readTriplets(verb, n, entries), options.uncertainty));
  }

  /**
   * The identity on n kets; exact.
   *
   * @throws GoodBasisError `shape`
   */
  static identity(n: number): Operator {
    requireDimension("Operator.identity", n);
    return Operator.diagonal(new Float64Array(n).fill(1), { uncertainty: "exact" });
  }

  /**
   * The zero operator on n kets; exact.
   *
   * @throws GoodBasisError `shape`
   */
  static zero(n: number): Operator {
    requireDimension("Operator.zero", n);
    return Operator.diagonal(new Float64Array(n), { uncertainty: "exact" });
  }

  /**
   * The diagonal operator of the given real numbers.
   *
   * @throws GoodBasisError `shape`, `not-finite`, `option`
   */
  static diagonal(values: ArrayLike<number>, options: OperatorOptions = {}): Operator {
    const verb = "Operator.diagonal";
    requireOperatorOptions(verb, options);
    return new Operator(withUncertainty(verb, readDiagonal(verb, values), options.uncertainty));
  }

  /**
   * The operator that sends ket j to `phases[j]` times ket `map[j]`; exact where the phases are ±1 and ±i.
   *
   * @param map - a permutation of 0 … n − 1
   * @param phases - one factor for each ket, 1 when not given
   * @throws GoodBasisError `shape`, `not-finite`, `option`
   */
  static permutation(map: ArrayLike<number>, phases?: readonly Scalar[], options: OperatorOptions = {}): Operator {
    const verb = "Operator.permutation";
    requireOperatorOptions(verb, options);
    return new Operator(withUncertainty(verb, readPermutation(verb, map, phases), options.uncertainty));
  }

  /**
   * The sum of all given operators, added pairwise.
   *
   * @throws GoodBasisError `shape` - no operator, or different dimensions
   */
  static sum(...terms: readonly Operator[]): Operator {
    for (const term of terms) if (!(term instanceof Operator)) throw wrongOperand("Operator.sum", term);
    const total = pairwise(terms, (left, right) => left.plus(right));
    if (total === undefined)
      throw new GoodBasisError("shape", "Operator.sum: expected at least one operator, got none");
    return total;
  }

  /** The number of kets. */
  get n(): number {
    return this.#core.csr.rows;
  }

  /** The stored entries as sparse rows; read-only. */
  get csr(): Csr {
    return this.#core.csr;
  }

  /** `"dense"` where more than a quarter of all entries are stored: products of two such operators use the dense kernel. */
  get storage(): "sparse" | "dense" {
    return isDenselyFilled(this.#core.csr) ? "dense" : "sparse";
  }

  /**
   * One bound for each stored entry on the modulus of its error; `undefined` means half a unit in the last place of each,
   * 2^−53 |entry|.
   */
  get radius(): Float64Array | undefined {
    if (this.#core.radius === "default") return undefined;
    this.#radii ??= radiiOf(this.#core);
    return this.#radii;
  }

  /** Whether every radius is zero. */
  get isExact(): boolean {
    return this.#core.radius === "exact";
  }

  /** The entries as dense row-major arrays (`im` undefined for a real operator), made once; read-only. */
  dense(): Dense {
    this.#dense ??= toDense(this.#core.csr);
    return this.#dense;
  }

  /** A rigorous upper bound on the 2-norm of the matrix of moduli, hence on the 2-norm; the radii are not included. */
  get norm(): number {
    return this.#sizes.norm;
  }

  /** A rigorous lower bound on the 2-norm of every matrix within the radii. */
  get normAtLeast(): number {
    return this.#sizes.normAtLeast;
  }

  /**
   * A rigorous lower bound on ‖A − tr A/n‖₂ for every matrix within the radii: how much of the operator can tell states apart, since
   * a multiple of 1 couples nothing and commutes with everything.
   */
  get variation(): number {
    return this.#sizes.variation;
  }

  /** A rigorous upper bound on the 2-norm of the matrix of radii. */
  get error(): number {
    return this.#sizes.error;
  }

  /** The Frobenius norm, not rounded up. */
  get frobenius(): number {
    return this.#sizes.frobenius;
  }

  /** The largest number of stored entries in a row. */
  get rowEntries(): number {
    return this.#sizes.rowEntries;
  }

  /** SHA-256, in hexadecimal, over dimension, pattern, values and radii. */
  get hash(): string {
    this.#hash ??= hashOf(this.#core);
    return this.#hash;
  }

  /**
   * A + B.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  plus(other: Operator): Operator {
    this.#requireSame("plus", other);
    return new Operator(uncertainSum(this.#core, other.#core, 1));
  }

  /**
   * A − B. An operator minus itself is exactly zero.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  minus(other: Operator): Operator {
    this.#requireSame("minus", other);
    return other === this ? Operator.zero(this.n) : new Operator(uncertainSum(this.#core, other.#core, -1));
  }

  /**
   * z A for a real or complex number, which counts as the very number that it is.
   *
   * @throws GoodBasisError `not-finite` - the factor is not finite, or overflow
   */
  scale(factor: Scalar): Operator {
    return new Operator(uncertainScale(this.#core, requireScalar("scale", factor)));
  }

  /**
   * The product A B.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  times(other: Operator): Operator {
    this.#requireSame("times", other);
    return new Operator(uncertainProduct(this.#core, other.#core));
  }

  /** The adjoint A†. */
  adjoint(): Operator {
    return new Operator(uncertainAdjoint(this.#core));
  }

  /**
   * The Kronecker product A ⊗ B; the kets of A are the slow index.
   *
   * @throws GoodBasisError `not-finite` - overflow
   */
  kron(other: Operator): Operator {
    if (!(other instanceof Operator)) throw wrongOperand("kron", other);
    return new Operator(uncertainKron(this.#core, other.#core));
  }

  /**
   * A to a whole power, by repeated squaring.
   *
   * @param exponent - 0, 1, 2, …
   * @throws GoodBasisError `option` - not a whole number from 0 on; `not-finite` - overflow
   */
  power(exponent: number): Operator {
    if (!Number.isInteger(exponent) || exponent < 0) {
      throw new GoodBasisError("option", `power: the exponent must be 0, 1, 2, …, got ${shown(exponent)}`, {
        exponent,
      });
    }
    if (exponent === 0) return Operator.identity(this.n);
    if (exponent === 1) return this;
    const half = this.power(Math.floor(exponent / 2));
    const square = half.times(half);
    return exponent % 2 === 0 ? square : square.times(this);
  }

  /**
   * A B − B A; element by element (a_i − a_j) b_ij where one of the two is diagonal. With itself exactly zero.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  commutator(other: Operator): Operator {
    this.#requireSame("commutator", other);
    return other === this ? Operator.zero(this.n) : new Operator(uncertainCommutator(this.#core, other.#core));
  }

  /**
   * A B + B A.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  anticommutator(other: Operator): Operator {
    this.#requireSame("anticommutator", other);
    return this.times(other).plus(other.times(this));
  }

  /**
   * The matrix of elements q_i† A q_j between given vectors.
   *
   * @param frame - one vector a row, as coefficients of the kets (n columns); counts as the very numbers that it holds
   * @throws GoodBasisError `shape` - another number of columns, or no row
   */
  restrict(frame: Csr): Operator {
    requireRows({ csr: frame, radius: "exact" }, "restrict");
    if (frame.cols !== this.n || frame.rows === 0) {
      const message = `restrict: expected a frame of vectors with ${this.n} components, got ${frame.rows} × ${frame.cols}`;
      throw new GoodBasisError("shape", message, { rows: frame.rows, cols: frame.cols, n: this.n });
    }
    return new Operator(restrictTo(this.#core, frame));
  }

  /** (A + A†)/2; half of every asymmetry is added to the radius of its element. */
  hermitianPart(): Operator {
    if (this.hermitianDefect.value === 0) return this;
    return new Operator(hermitianPart(this.#core));
  }

  /**
   * Entry (row, col), 0-based.
   *
   * @throws GoodBasisError `shape` - an index out of range
   */
  entry(row: number, col: number): Complex {
    requireIndex("entry", row, col, this.n);
    return valueAt(this.#core.csr, row, col);
  }

  /**
   * The entries as an ml-matrix `Matrix`; real operators only.
   *
   * @throws GoodBasisError `option` - the operator has imaginary parts
   */
  toMatrix(): Matrix {
    const { re, im } = this.dense();
    if (im !== undefined) {
      const message = "toMatrix: the operator has imaginary parts, which an ml-matrix Matrix cannot hold; use dense()";
      throw new GoodBasisError("option", message);
    }
    return Matrix.from1DArray(this.n, this.n, re);
  }

  /** Whether every entry off the diagonal is zero within its radius. */
  get isDiagonal(): boolean {
    return this.#traits.isDiagonal;
  }

  /** Whether each row and each column holds at most one entry that is not zero within its radius. */
  get isMonomial(): boolean {
    return this.#traits.isMonomial;
  }

  /** Whether every imaginary part is zero within the radius. */
  get isReal(): boolean {
    return this.#traits.isReal;
  }

  /** The Frobenius norm of A − A†, and its largest element. */
  get hermitianDefect(): HermitianDefect {
    return this.#traits.hermitian.defect;
  }

  /** Whether A = A† within the radii, or to 1e-13 of the Frobenius norm. */
  get isHermitian(): boolean {
    return this.#traits.isHermitian;
  }

  /** The Frobenius norm of A A† − 1. */
  get unitaryDefect(): number {
    return this.#traits.unitary.size;
  }

  /** Whether A A† = 1 within the radii, or to 1e-13 √n in the Frobenius norm. */
  get isUnitary(): boolean {
    return this.#traits.isUnitary;
  }

  /** The Frobenius norm of A A† − A† A. */
  get normalDefect(): number {
    return this.#traits.normal.size;
  }

  /** Whether A A† = A† A within the radii, or to 1e-13 of the squared Frobenius norm. */
  get isNormal(): boolean {
    return this.#traits.isNormal;
  }

  /** The first of these that holds. */
  get kind(): "hermitian" | "unitary" | "normal" | "general" {
    if (this.isHermitian) return "hermitian";
    if (this.isUnitary) return "unitary";
    return this.isNormal ? "normal" : "general";
  }

  /** The connected part of each ket, parts numbered from 0 by their first ket; entries zero within their radius do not connect. */
  get components(): Int32Array {
    return this.#traits.parts.components;
  }

  /** The number of connected parts. */
  get componentCount(): number {
    return this.#traits.parts.count;
  }

  #requireSame(verb: string, other: Operator): void {
    if (!(other instanceof Operator)) throw wrongOperand(verb, other);
    if (other.n === this.n) return;
    const message = `${verb}: the operators act on ${this.n} and ${other.n} kets; both need the same kets`;
    throw new GoodBasisError("shape", message, { left: this.n, right: other.n });
  }
}
