import type { ExactOperator } from "../exact/operator.js";

/** How an exact operator comes from those of the operands. */
export type Combine = (a: ExactOperator, b: ExactOperator) => ExactOperator;

/**
 * What an operator is exactly: found when first asked for, and remembered. What it is made from is let go then.
 *
 * Operands are worked off by a list of their own and not by recursion, so that a sum of many thousand terms does not outgrow
 * the stack.
 */
export class Companion {
  #value: ExactOperator | undefined;
  #operands: readonly Companion[];
  #make: (operands: readonly ExactOperator[]) => ExactOperator;

  private constructor(operands: readonly Companion[], make: (operands: readonly ExactOperator[]) => ExactOperator) {
    this.#operands = operands;
    this.#make = make;
  }

  /** An operator that `make` computes. */
  static of(make: () => ExactOperator): Companion {
    return new Companion([], make);
  }

  /** The combination of two others, which may be the same. */
  static combined(a: Companion, b: Companion, combine: Combine): Companion {
    return new Companion([a, b], ([x, y]) => combine(x as ExactOperator, y as ExactOperator));
  }

  /**
   * The exact operator.
   *
   * @throws GoodBasisError `budget` - a product of exact operators outgrows the default budget
   */
  get value(): ExactOperator {
    const open: Companion[] = [this];
    for (let top = open.at(-1); top !== undefined; top = open.at(-1)) {
      const before = top.#value === undefined ? top.#operands.filter((operand) => operand.#value === undefined) : [];
      if (before.length > 0) open.push(...before);
      else {
        top.#settle();
        open.pop();
      }
    }
    return this.#settle();
  }

  /** The value, where those of the operands are known. */
  #settle(): ExactOperator {
    if (this.#value === undefined) {
      const value = this.#make(this.#operands.map((operand) => operand.#settle()));
      this.#value = value;
      this.#operands = [];
      this.#make = () => value;
    }
    return this.#value;
  }
}

export const plus: Combine = (a, b) => a.plus(b);
export const minus: Combine = (a, b) => a.minus(b);
export const times: Combine = (a, b) => a.times(b);
export const kron: Combine = (a, b) => a.kron(b);
export const commutator: Combine = (a, b) => a.commutator(b);
export const adjoint: Combine = (a) => a.adjoint();
export const hermitianPart: Combine = (a) => a.plus(a.adjoint()).scale("1/2");
