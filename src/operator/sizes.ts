import { roundDown } from "../numerics/rounding.js";
import { frobenius, maxRowEntries } from "../numerics/sparse.js";
import { diagonalMean, errorBound, normBound, normFloor } from "./norms.js";
import type { Uncertain } from "./radius.js";

/** The sizes of one operator, each found when first asked for. */
export class Sizes {
  readonly #core: Uncertain;
  #norm: number | undefined;
  #normAtLeast: number | undefined;
  #variation: number | undefined;
  #error: number | undefined;
  #frobenius: number | undefined;
  #rowEntries: number | undefined;

  constructor(core: Uncertain) {
    this.#core = core;
  }

  get norm(): number {
    this.#norm ??= normBound(this.#core.csr);
    return this.#norm;
  }

  get normAtLeast(): number {
    this.#normAtLeast ??= this.#known(normFloor(this.#core.csr, this.norm));
    return this.#normAtLeast;
  }

  get variation(): number {
    if (this.#variation === undefined) {
      const { csr } = this.#core;
      const mean = diagonalMean(csr);
      const centred = mean.re === 0 && mean.im === 0;
      this.#variation = centred ? this.normAtLeast : this.#known(normFloor(csr, this.norm, mean));
    }
    return this.#variation;
  }

  get error(): number {
    this.#error ??= errorBound(this.#core, this.norm);
    return this.#error;
  }

  get frobenius(): number {
    this.#frobenius ??= frobenius(this.#core.csr);
    return this.#frobenius;
  }

  get rowEntries(): number {
    this.#rowEntries ??= maxRowEntries(this.#core.csr);
    return this.#rowEntries;
  }

  /** What is left of a lower bound when the entries are anywhere within their radii. */
  #known(floor: number): number {
    return roundDown(Math.max(0, floor - this.error));
  }
}
