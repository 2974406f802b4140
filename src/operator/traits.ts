import { UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { frobenius } from "../numerics/sparse.js";
import type { Uncertain } from "./radius.js";
import {
  connectedParts,
  type Defect,
  HERMITIAN_TOLERANCE,
  type HermitianDefect,
  hermitianCheck,
  isDiagonal,
  isMonomial,
  isReal,
  lengths,
  normalCheck,
  unitaryCheck,
} from "./structure.js";

/** The structure of a matrix, each part of it found when first asked for. */
export class Traits {
  readonly #matrix: Uncertain;
  #diagonal: boolean | undefined;
  #monomial: boolean | undefined;
  #real: boolean | undefined;
  #hermitian: { defect: HermitianDefect; within: boolean } | undefined;
  #unitary: Defect | undefined;
  #isUnitary: boolean | undefined;
  #normal: Defect | undefined;
  #isNormal: boolean | undefined;
  #parts: { components: Int32Array; count: number } | undefined;

  /** @param matrix - the matrix */
  constructor(matrix: Uncertain) {
    this.#matrix = matrix;
  }

  /** See {@link isDiagonal}. */
  get isDiagonal(): boolean {
    this.#diagonal ??= isDiagonal(this.#matrix);
    return this.#diagonal;
  }

  /** See {@link isMonomial}. */
  get isMonomial(): boolean {
    this.#monomial ??= isMonomial(this.#matrix);
    return this.#monomial;
  }

  /** See {@link isReal}. */
  get isReal(): boolean {
    this.#real ??= isReal(this.#matrix);
    return this.#real;
  }

  /** See {@link hermitianCheck}. */
  get hermitian(): { defect: HermitianDefect; within: boolean } {
    this.#hermitian ??= hermitianCheck(this.#matrix);
    return this.#hermitian;
  }

  /** Hermitian within the radii or to {@link HERMITIAN_TOLERANCE}. */
  get isHermitian(): boolean {
    const { defect, within } = this.hermitian;
    return within || defect.size <= HERMITIAN_TOLERANCE * frobenius(this.#matrix.csr);
  }

  /** See {@link unitaryCheck}. */
  get unitary(): Defect {
    this.#unitary ??= unitaryCheck(this.#matrix);
    return this.#unitary;
  }

  /** Unitary within the radii or to {@link HERMITIAN_TOLERANCE} √n. */
  get isUnitary(): boolean {
    this.#isUnitary ??= this.#mayBeUnitary() && accept(this.unitary, Math.sqrt(this.#matrix.csr.rows));
    return this.#isUnitary;
  }

  /** See {@link normalCheck}. */
  get normal(): Defect {
    this.#normal ??= normalCheck(this.#matrix);
    return this.#normal;
  }

  /** Normal within the radii or to {@link HERMITIAN_TOLERANCE} of the squared Frobenius norm. */
  get isNormal(): boolean {
    this.#isNormal ??= this.#mayBeNormal() && accept(this.normal, frobenius(this.#matrix.csr) ** 2);
    return this.#isNormal;
  }

  /** See {@link connectedParts}. */
  get parts(): { components: Int32Array; count: number } {
    this.#parts ??= connectedParts(this.#matrix);
    return this.#parts;
  }

  /** Looks at the lengths of the rows only. */
  #mayBeUnitary(): boolean {
    const { rows, error } = lengths(this.#matrix);
    const ones = new Float64Array(rows.length).fill(1);
    return !differ(rows, ones, error, 2 * HERMITIAN_TOLERANCE * Math.sqrt(rows.length));
  }

  /** Looks at the lengths of rows and columns only. */
  #mayBeNormal(): boolean {
    const { rows, cols, error } = lengths(this.#matrix);
    return !differ(rows, cols, error, 2 * HERMITIAN_TOLERANCE * frobenius(this.#matrix.csr) ** 2);
  }
}

function accept(defect: Defect, scale: number): boolean {
  return defect.within || defect.size <= HERMITIAN_TOLERANCE * scale;
}

/** Whether two lists surely differ: some element by more than its error, and all together by more than `tolerance`. */
function differ(a: Float64Array, b: Float64Array, error: Float64Array, tolerance: number): boolean {
  let sum = 0;
  let beyond = false;
  for (let k = 0; k < a.length; k++) {
    const difference = Math.abs((a[k] as number) - (b[k] as number));
    sum += difference ** 2;
    if (difference > 2 * (error[k] as number) + 8 * UNIT_ROUNDOFF * (a[k] as number)) beyond = true;
  }
  return beyond && Math.sqrt(sum) > tolerance;
}
