import { Matrix } from "ml-matrix";
import { GoodBasisError } from "../errors.js";
import { ExactOperator } from "../exact/operator.js";
import type { SurdInput } from "../exact/surd.js";
import type { Complex } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import type { Dense } from "../numerics/dense.js";
import { toDense, valueAt } from "../numerics/sparse.js";
import { pairwise, uncertainAdjoint, uncertainKron, uncertainSum } from "./arithmetic.js";
import { requireFrame, requireIndex, requireOperatorOptions, requireSame, wrongOperand } from "./checks.js";
import * as exactly from "./companion.js";
import { Companion } from "./companion.js";
import type { ExactData, ExactEntry } from "./exact-input.js";
import { hashOf } from "./hash.js";
import { readKnown, scaleKnown } from "./known.js";
import { powerOf } from "./power.js";
import { isDenselyFilled, uncertainCommutator, uncertainProduct } from "./products.js";
import { type Radius, radiiOf, type Uncertain } from "./radius.js";
import { type MatrixData, requireDimension, type Triplet, type Uncertainty, withUncertainty } from "./read.js";
import { restrictExactly, restrictTo } from "./restrict.js";
import { hermitianPart } from "./structure.js";
import { Structured } from "./structured.js";

/** Options of {@link Operator.from} and its relatives. */
export interface OperatorOptions {
  /**
   * How well the entries are known; half a unit in the last place of each when not given. `"exact"` leaves an operator that is known
   * exactly as it is; any other uncertainty ends that.
   */
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
export class Operator extends Structured {
  readonly #core: Uncertain;
  #companion: Companion | undefined;
  #radii: Float64Array | undefined;
  #dense: Dense | undefined;
  #hash: string | undefined;

  private constructor(core: Uncertain, companion?: Companion) {
    super(core);
    this.#core = core;
    this.#companion = companion;
  }

  /**
   * Reads a matrix of any accepted form; an operator is returned as it is, unless an uncertainty is stated.
   *
   * A matrix that holds text such as `"sqrt(2/3)"` or `"1/2"`, a `Surd`, `Fraction` or big integer is exact, every entry of it: its
   * doubles are correctly rounded, and {@link exact} has the numbers themselves. Plain numbers count as the doubles that they are there.
   *
   * @param input - the matrix; arrays are copied
   * @param options - how well its entries are known
   * @throws GoodBasisError `shape`, `not-finite`, `option`; `text`, `zero-division` - an exact entry, with its place
   */
  static from(input: Operator | ExactOperator | MatrixData | ExactData, options: OperatorOptions = {}): Operator {
    const verb = "Operator.from";
    requireOperatorOptions(verb, options);
    if (!(input instanceof Operator)) return Operator.#read(verb, input, options);
    if (options.uncertainty === undefined) return input;
    const stated = withUncertainty(verb, input.#core, options.uncertainty);
    return stated.radius === "exact" && input.isKnownExactly ? input : new Operator(stated);
  }

  static #read(verb: string, input: unknown, { uncertainty }: OperatorOptions): Operator {
    const { core, companion } = readKnown(verb, input, uncertainty);
    return new Operator(core, companion);
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
   * The same operator, known to be the rounded form of an exact one; the builders know theirs.
   *
   * @internal
   */
  static withExact(operator: Operator, make: () => ExactOperator): Operator {
    if (!(operator instanceof Operator)) throw wrongOperand("Operator.withExact", operator);
    return operator.isExact ? operator : new Operator(operator.#core, Companion.of(make));
  }

  /**
   * The operator of the given triplets `[row, col, re, im?]`, 0-based; those of the same place are summed.
   *
   * @throws GoodBasisError what {@link Operator.from} throws
   */
  static fromTriplets(
    n: number,
    entries: readonly (Triplet | readonly [row: number, col: number, value: ExactEntry])[],
    options: OperatorOptions = {},
  ): Operator {
    requireOperatorOptions("Operator.fromTriplets", options);
    return Operator.#read("Operator.fromTriplets", { n, entries }, options);
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
   * The diagonal operator of the given numbers: real ones, or exact ones.
   *
   * @throws GoodBasisError what {@link Operator.from} throws
   */
  static diagonal(values: ArrayLike<number> | readonly ExactEntry[], options: OperatorOptions = {}): Operator {
    requireOperatorOptions("Operator.diagonal", options);
    return Operator.#read("Operator.diagonal", { diagonal: values }, options);
  }

  /**
   * The operator that sends ket j to `phases[j]` times ket `map[j]`; exact where the phases are ±1 and ±i, or exact numbers.
   *
   * @param map - a permutation of 0 … n − 1
   * @param phases - one factor for each ket, 1 when not given
   * @throws GoodBasisError what {@link Operator.from} throws
   */
  static permutation(map: ArrayLike<number>, phases?: readonly SurdInput[], options: OperatorOptions = {}): Operator {
    requireOperatorOptions("Operator.permutation", options);
    return Operator.#read("Operator.permutation", { permutation: map, phases }, options);
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

  /** Whether every radius is zero: the doubles are the numbers themselves. */
  get isExact(): boolean {
    return this.#core.radius === "exact";
  }

  /** Whether the operator is known exactly, so that {@link exact} has it; asking costs nothing. */
  get isKnownExactly(): boolean {
    return this.isExact || this.#companion !== undefined;
  }

  /**
   * The same operator in exact arithmetic, where it is known exactly: given so, built so, or made of such operators by the algebra of
   * this class. Computed when first asked for. Undefined as soon as one operand was not exact.
   *
   * @throws GoodBasisError `budget` - a product outgrows the default budget of exact arithmetic
   *
   * @example
   * ```ts
   * import { Operator } from "goodbasis";
   *
   * const x = Operator.from([[0, "sqrt(2/3)"], ["sqrt(2/3)", 0]]);
   * console.log(x.entry(0, 1).re, x.power(2).exact?.entry(0, 0).text()); // 0.816496580927726 2/3
   * ```
   */
  get exact(): ExactOperator | undefined {
    return this.#known?.value;
  }

  /** The entries as dense row-major arrays (`im` undefined for a real operator), made once; read-only. */
  dense(): Dense {
    this.#dense ??= toDense(this.#core.csr);
    return this.#dense;
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
    requireSame("plus", this, other, other instanceof Operator);
    return this.#made(uncertainSum(this.#core, other.#core, 1), exactly.plus, other);
  }

  /**
   * A − B. An operator minus itself is exactly zero.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  minus(other: Operator): Operator {
    requireSame("minus", this, other, other instanceof Operator);
    if (other === this) return Operator.zero(this.n);
    return this.#made(uncertainSum(this.#core, other.#core, -1), exactly.minus, other);
  }

  /**
   * z A for a real or complex number, which counts as the very number that it is, or for an exact one such as `"1/3"`.
   *
   * @throws GoodBasisError `option` - no number; `not-finite` - the factor is not finite, or overflow; `text`, `zero-division`
   */
  scale(factor: SurdInput): Operator {
    const { core, companion } = scaleKnown(this.#core, this.#known, factor);
    return new Operator(core, core.radius === "exact" ? undefined : companion);
  }

  /**
   * The product A B.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  times(other: Operator): Operator {
    requireSame("times", this, other, other instanceof Operator);
    return this.#made(uncertainProduct(this.#core, other.#core), exactly.times, other);
  }

  /** The adjoint A†. */
  adjoint(): Operator {
    return this.#made(uncertainAdjoint(this.#core), exactly.adjoint);
  }

  /**
   * The Kronecker product A ⊗ B; the kets of A are the slow index.
   *
   * @throws GoodBasisError `not-finite` - overflow
   */
  kron(other: Operator): Operator {
    if (!(other instanceof Operator)) throw wrongOperand("kron", other);
    return this.#made(uncertainKron(this.#core, other.#core), exactly.kron, other);
  }

  /**
   * A to a whole power, by repeated squaring.
   *
   * @param exponent - 0, 1, 2, …
   * @throws GoodBasisError `option` - not a whole number from 0 on; `not-finite` - overflow
   */
  power(exponent: number): Operator {
    return exponent === 0 ? Operator.identity(this.n) : powerOf<Operator>(this, exponent);
  }

  /**
   * A B − B A; element by element (a_i − a_j) b_ij where one of the two is diagonal. With itself exactly zero.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  commutator(other: Operator): Operator {
    requireSame("commutator", this, other, other instanceof Operator);
    if (other === this) return Operator.zero(this.n);
    return this.#made(uncertainCommutator(this.#core, other.#core), exactly.commutator, other);
  }

  /**
   * A B + B A.
   *
   * @throws GoodBasisError `shape` - different dimensions; `not-finite` - overflow
   */
  anticommutator(other: Operator): Operator {
    requireSame("anticommutator", this, other, other instanceof Operator);
    return this.times(other).plus(other.times(this));
  }

  /**
   * The matrix of elements q_i† A q_j between given vectors.
   *
   * @param frame - one vector a row, as coefficients of the kets (n columns); counts as the very numbers that it holds
   * @throws GoodBasisError `shape` - another number of columns, or no row
   */
  restrict(frame: Csr): Operator {
    requireFrame("restrict", frame, this.n);
    const core = restrictTo(this.#core, frame);
    const exact = core.radius === "exact" || !this.isKnownExactly ? undefined : restrictExactly(frame);
    return exact === undefined ? new Operator(core) : this.#made(core, exact);
  }

  /** (A + A†)/2; half of every asymmetry is added to the radius of its element. */
  hermitianPart(): Operator {
    if (this.hermitianDefect.value === 0) return this;
    return this.#made(hermitianPart(this.#core), exactly.hermitianPart);
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

  get #known(): Companion | undefined {
    const { csr, radius } = this.#core;
    if (radius === "exact") this.#companion ??= Companion.of(() => ExactOperator.fromFloating(csr));
    return this.#companion;
  }

  /** A result, and what it is exactly where that is known of both operands and its doubles do not say it already. */
  #made(core: Uncertain, combine: exactly.Combine, other: Operator = this): Operator {
    if (core.radius === "exact" || !this.isKnownExactly || !other.isKnownExactly) return new Operator(core);
    const [a, b] = [this.#known, other.#known];
    return new Operator(core, a && b && Companion.combined(a, b, combine));
  }
}
