import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, shown } from "../misuse.js";
import type { Complex } from "../numerics/complex.js";
import { contentOf } from "./content.js";
import { roundRoot } from "./round.js";
import { Surd, type SurdInput } from "./surd.js";

/**
 * An exact vector over n kets, not normalised: its norm may be a nested root such as √(5 + √5), its squared norm never is.
 * Immutable; components that are not stored are zero.
 *
 * @example
 * ```ts
 * import { ExactVector } from "goodbasis";
 *
 * const singlet = ExactVector.from([0, 1, -1, 0]);
 * console.log(singlet.squaredNorm.text(), singlet.normalised()?.component(1).text()); // 2 1/sqrt(2)
 * ```
 */
export class ExactVector {
  /** The number of kets. */
  readonly n: number;
  /** Kets with a component that is not zero, ascending. */
  readonly index: Int32Array;
  /** Their components. */
  readonly values: readonly Surd[];
  #squaredNorm: Surd | undefined;

  private constructor(n: number, index: Int32Array, values: readonly Surd[]) {
    requireArgument(Array.isArray(values), "ExactVector", "what its makers give", n, "make one with ExactVector.from");
    this.n = n;
    this.index = index;
    this.values = values;
  }

  /**
   * The vector of the given components, one for each ket.
   *
   * @throws GoodBasisError what {@link Surd.from} throws
   */
  static from(components: readonly SurdInput[]): ExactVector {
    requireArgument(Array.isArray(components), "ExactVector.from", "a list of numbers", components, "one for each ket");
    return ExactVector.fromEntries(
      components.length,
      components.map((value, k) => [k, value]),
    );
  }

  /**
   * The vector of the given pairs of ket and component; duplicates are summed.
   *
   * @throws GoodBasisError `shape` - an index outside 0 … n − 1; what {@link Surd.from} throws
   */
  static fromEntries(n: number, entries: Iterable<readonly [index: number, value: SurdInput]>): ExactVector {
    requirePairs("ExactVector.fromEntries", n, entries);
    const sums = new Map<number, Surd>();
    for (const [k, value] of entries) {
      if (!Number.isInteger(k) || k < 0 || k >= n) {
        throw new GoodBasisError("shape", `ExactVector: component ${shown(k)} is outside 0 … ${n - 1}`, {
          index: k,
          n,
        });
      }
      const before = sums.get(k);
      const number = Surd.from(value);
      sums.set(k, before === undefined ? number : before.plus(number));
    }
    const index = [...sums.keys()].filter((k) => sums.get(k)?.isZero === false).sort((a, b) => a - b);
    return new ExactVector(
      n,
      Int32Array.from(index),
      index.map((k) => sums.get(k) as Surd),
    );
  }

  /**
   * The ket k alone.
   *
   * @throws GoodBasisError `shape`
   */
  static unit(n: number, k: number): ExactVector {
    return ExactVector.fromEntries(n, [[k, Surd.one]]);
  }

  /**
   * Σ_k c_k v_k.
   *
   * @param vectors - at least one
   * @param coefficients - one component for each vector
   * @throws GoodBasisError `shape`
   */
  static combination(vectors: readonly ExactVector[], coefficients: ExactVector): ExactVector {
    const vectorsOnly = Array.isArray(vectors) && [...vectors, coefficients].every((v) => v instanceof ExactVector);
    requireArgument(vectorsOnly, "ExactVector.combination", "ExactVectors", vectors, "make them with ExactVector.from");
    const [first] = vectors;
    if (first === undefined || coefficients.n !== vectors.length) {
      const message = `ExactVector.combination: ${vectors.length} vectors and ${coefficients.n} coefficients; give one for each`;
      throw new GoodBasisError("shape", message, { vectors: vectors.length, coefficients: coefficients.n });
    }
    return vectors.reduce((sum, vector, k) => sum.plus(vector, coefficients.component(k)), first.scale(0));
  }

  /** Component k; zero where none is stored. @throws GoodBasisError `option` - no number */
  component(k: number): Surd {
    requireArgument(typeof k === "number", "ExactVector.component", "the number of a ket", k, "counted from 0");
    let low = 0;
    let high = this.index.length;
    while (low < high) {
      const middle = (low + high) >> 1;
      if ((this.index[middle] as number) < k) low = middle + 1;
      else high = middle;
    }
    return this.index[low] === k ? (this.values[low] as Surd) : Surd.zero;
  }

  /** Whether every component is zero. */
  get isZero(): boolean {
    return this.values.length === 0;
  }

  /** ⟨v|v⟩, exact. */
  get squaredNorm(): Surd {
    this.#squaredNorm ??= this.values.reduce((sum, x) => sum.plus(x.squaredModulus()), Surd.zero);
    return this.#squaredNorm;
  }

  /**
   * ⟨v|w⟩, linear in w.
   *
   * @throws GoodBasisError `shape`
   */
  inner(other: ExactVector): Surd {
    this.#requireSame("inner", other);
    let sum = Surd.zero;
    let [j, k] = [0, 0];
    while (j < this.index.length && k < other.index.length) {
      const [a, b] = [this.index[j] as number, other.index[k] as number];
      if (a === b) sum = sum.plus((this.values[j] as Surd).conjugate().times(other.values[k] as Surd));
      if (a <= b) j++;
      if (b <= a) k++;
    }
    return sum;
  }

  /**
   * v + z w, z = 1 unless stated.
   *
   * @throws GoodBasisError `shape`
   */
  plus(other: ExactVector, factor: SurdInput = Surd.one): ExactVector {
    this.#requireSame("plus", other);
    const z = Surd.from(factor);
    if (z.isZero) return this;
    const index: number[] = [];
    const values: Surd[] = [];
    let [j, k] = [0, 0];
    while (j < this.index.length || k < other.index.length) {
      const a = this.index[j] ?? this.n;
      const b = other.index[k] ?? this.n;
      let value = a <= b ? (this.values[j++] as Surd) : Surd.zero;
      if (b <= a) value = value.plus((other.values[k++] as Surd).times(z));
      if (value.isZero) continue;
      index.push(Math.min(a, b));
      values.push(value);
    }
    return new ExactVector(this.n, Int32Array.from(index), values);
  }

  /**
   * v − w.
   *
   * @throws GoodBasisError `shape`
   */
  minus(other: ExactVector): ExactVector {
    return this.plus(other, -1);
  }

  /** z v. */
  scale(factor: SurdInput): ExactVector {
    const z = Surd.from(factor);
    if (z.isZero) return new ExactVector(this.n, new Int32Array(0), []);
    return new ExactVector(
      this.n,
      this.index,
      this.values.map((x) => x.times(z)),
    );
  }

  /** The same direction with whole coefficients that have no divisor in common; divided by a positive fraction alone. */
  primitive(): ExactVector {
    const content = contentOf(this.values);
    return content.equals(1) ? this : this.scale(content.inverse());
  }

  /** The vector of length one where the field holds it, that is, where the squared norm is rational; undefined elsewhere. */
  normalised(): ExactVector | undefined {
    const norm = Surd.sqrt(this.squaredNorm);
    return norm === undefined || norm.isZero ? undefined : this.scale(norm.inverse());
  }

  /**
   * The components of the vector of length one, as doubles: each part correctly rounded, also where the norm is a nested root.
   *
   * @throws GoodBasisError `option` - the vector is zero
   */
  toFloating(): Complex[] {
    if (this.isZero) throw new GoodBasisError("option", "ExactVector.toFloating: the zero vector has no direction");
    const out: Complex[] = Array.from({ length: this.n }, () => ({ re: 0, im: 0 }));
    const inverse = this.squaredNorm.inverse();
    for (const [k, x] of this.values.entries()) {
      const part = (y: Surd): number => y.sign() * roundRoot(y.times(y).times(inverse).terms) + 0;
      out[this.index[k] as number] = { re: part(x.re), im: part(x.im) };
    }
    return out;
  }

  /** Whether both are the same vector, scale included. */
  equals(other: ExactVector): boolean {
    return other instanceof ExactVector && this.n === other.n && this.minus(other).isZero;
  }

  #requireSame(where: string, other: ExactVector): void {
    const next = "make one with ExactVector.from";
    requireArgument(other instanceof ExactVector, `ExactVector.${where}`, "an ExactVector", other, next);
    if (this.n === other.n) return;
    const message = `ExactVector.${where}: vectors over ${this.n} and ${other.n} kets; both must have the same number`;
    throw new GoodBasisError("shape", message, { n: this.n, other: other.n });
  }
}

/** Refuses what is no number of kets with a list of pairs, before anything in it is looked at. */
function requirePairs(verb: string, n: unknown, entries: unknown): void {
  requireArgument(typeof n === "number" && n >= 0, verb, "a number of kets", n, "the length of the vector");
  const pairs = isObject(entries) && Symbol.iterator in entries;
  requireArgument(pairs, verb, "pairs [ket, number]", entries, "in any order");
  if (Array.isArray(entries))
    requireArgument(entries.every(Array.isArray), verb, "pairs [ket, number]", entries, "in any order");
}
