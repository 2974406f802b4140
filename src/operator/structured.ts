import { requireRows } from "./checks.js";
import type { Uncertain } from "./radius.js";
import { Sizes } from "./sizes.js";
import type { HermitianDefect } from "./structure.js";
import { Traits } from "./traits.js";

/** What there is to know of a matrix with radii without changing it: sizes and structure, each found when first asked for. */
export abstract class Structured {
  readonly #traits: Traits;
  readonly #sizes: Sizes;

  /**
   * @param core - the entries with their radii
   * @throws GoodBasisError `shape`
   */
  protected constructor(core: Uncertain) {
    requireRows(core);
    this.#traits = new Traits(core);
    this.#sizes = new Sizes(core);
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
}
