import { ExactOperator } from "../exact/operator.js";
import type { ExactTriplet } from "../exact/rows.js";
import { Surd } from "../exact/surd.js";
import { ExactVector } from "../exact/vector.js";
import type { Ledger, ProofBudget } from "./budget.js";

/** An operator over the vectors of a frame: M_ij = ⟨q_i|A|q_j⟩ / ⟨q_i|q_i⟩. */
export interface FrameMatrix {
  readonly matrix: ExactOperator;
  /** Whether A maps the space into itself. */
  readonly invariant: boolean;
}

/**
 * Mutually orthogonal exact vectors, not normalised, as the basis of a block.
 *
 * Which vectors meet at a ket is looked up, so that a sparse operator on sparse vectors costs what it touches.
 */
export class Frame {
  /** The vectors; trusted to be mutually orthogonal and not zero. */
  readonly vectors: readonly ExactVector[];
  readonly #byKet = new Map<number, number[]>();

  constructor(vectors: readonly ExactVector[]) {
    this.vectors = vectors;
    for (const [j, vector] of vectors.entries()) {
      for (const ket of vector.index) {
        const list = this.#byKet.get(ket);
        if (list === undefined) this.#byKet.set(ket, [j]);
        else list.push(j);
      }
    }
  }

  /** The whole space: every ket. */
  static kets(n: number): Frame {
    return new Frame(Array.from({ length: n }, (_, k) => ExactVector.unit(n, k)));
  }

  /** Dimension of the block. */
  get size(): number {
    return this.vectors.length;
  }

  /** ⟨q_i|q_i⟩ of every vector. */
  get norms(): Surd[] {
    return this.vectors.map((vector) => vector.squaredNorm);
  }

  /** The places of the vectors that share a ket with a vector, ascending. */
  meeting(vector: ExactVector): number[] {
    const found = new Set<number>();
    for (const ket of vector.index) for (const i of this.#byKet.get(ket) ?? []) found.add(i);
    return [...found].sort((a, b) => a - b);
  }

  /** ⟨q_i|v⟩ / ⟨q_i|q_i⟩ where it is not zero. */
  coefficients(vector: ExactVector, ledger?: Ledger): Map<number, Surd> {
    const found = new Map<number, Surd>();
    for (const i of this.meeting(vector)) {
      const own = this.vectors[i] as ExactVector;
      ledger?.spendProducts(Math.min(own.values.length, vector.values.length));
      const overlap = own.inner(vector);
      if (!overlap.isZero) found.set(i, overlap.over(own.squaredNorm));
    }
    return found;
  }

  /**
   * The matrix of an operator, restricted to the space. Whether it leads out is seen from lengths: the image is longer
   * than its part inside (Pythagoras).
   *
   * @throws GoodBasisError `budget`
   */
  matrix(operator: ExactOperator, budget: ProofBudget): FrameMatrix {
    const { ledger } = budget;
    const triplets: ExactTriplet[] = [];
    let invariant = true;
    for (const [j, vector] of this.vectors.entries()) {
      const image = operator.apply(vector);
      ledger.spendProducts((vector.values.length * operator.count) / operator.n);
      let inside = Surd.zero;
      for (const [i, value] of this.coefficients(image, ledger)) {
        ledger.weigh(value.largeTerms);
        triplets.push([i, j, value]);
        inside = inside.plus(value.squaredModulus().times((this.vectors[i] as ExactVector).squaredNorm));
      }
      if (invariant && !inside.equals(image.squaredNorm)) invariant = false;
    }
    return { matrix: ExactOperator.fromTriplets(this.size, triplets), invariant };
  }

  /** Σ_k c_k q_k over chosen vectors, without a common divisor. */
  combine(chosen: readonly number[], coordinates: ExactVector): ExactVector {
    const list = chosen.map((k) => this.vectors[k] as ExactVector);
    return ExactVector.combination(list, coordinates).primitive();
  }
}
