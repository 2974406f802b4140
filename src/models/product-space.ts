import { GoodBasisError } from "../errors.js";
import { ExactOperator } from "../exact/operator.js";
import { shown } from "../misuse.js";
import type { Csr } from "../numerics/csr.js";
import { Operator } from "../operator/operator.js";

/** A product of spaces; the first factor is the slowest index. */
export interface ProductSpace {
  /** Dimensions of the factors. */
  readonly dimensions: readonly number[];
  /** Their product. */
  readonly n: number;
  /**
   * 1 ⊗ … ⊗ A ⊗ … ⊗ 1 with A at the given place, counted from 0.
   *
   * @throws GoodBasisError `shape` - A does not have the dimension of that factor, or there is no such factor
   */
  embed(operator: Operator, position: number): Operator;
  /**
   * Names of the product kets, the names of their factors joined.
   *
   * @param names - for every factor the names of its kets
   * @param separator - what stands between them, `","` when not given
   * @throws GoodBasisError `shape` - a list of the wrong length
   */
  kets(names: readonly (readonly string[])[], separator?: string): string[];
}

/**
 * The product of spaces of the given dimensions. Ket (k_1, k_2, …) has number ((k_1 n_2 + k_2) n_3 + k_3) …: the first factor is
 * the slowest, as in the Kronecker product.
 *
 * @param dimensions - dimension of each factor, at least one factor
 * @throws GoodBasisError `option` - a dimension is not a positive whole number, or their product is too large to index
 *
 * @example
 * ```ts
 * import { angularMomentum, Operator, productSpace } from "goodbasis";
 *
 * const l = angularMomentum(1);
 * const s = angularMomentum(1 / 2);
 * const space = productSpace([l.n, s.n]);
 * const jz = space.embed(l.z, 0).plus(space.embed(s.z, 1));
 * console.log(space.kets([l.kets, s.kets])[0], jz.entry(0, 0).re); // 1,1/2 1.5
 * ```
 */
export function productSpace(dimensions: readonly number[]): ProductSpace {
  if (!Array.isArray(dimensions)) {
    const message = `productSpace: expected a list of dimensions such as [3, 2], got ${shown(dimensions)}`;
    throw new GoodBasisError("option", message, { dimensions });
  }
  const sizes: readonly number[] = [...dimensions];
  let n = 1;
  for (const size of sizes) {
    if (!Number.isInteger(size) || size < 1) {
      throw new GoodBasisError("option", `productSpace: a dimension must be 1, 2, 3, …, got ${shown(size)}`, {
        dimensions: sizes,
      });
    }
    n *= size;
  }
  if (sizes.length === 0 || n >= 2 ** 31) {
    const message = `productSpace: expected factors with a product of dimensions below 2^31, got [${sizes.join(", ")}]`;
    throw new GoodBasisError("option", message, { dimensions: sizes });
  }
  return {
    dimensions: sizes,
    n,
    embed: (operator, position) => embed(sizes, operator, position),
    kets: (names, separator = ",") => productKets(sizes, names, separator),
  };
}

function embed(sizes: readonly number[], operator: Operator, position: number): Operator {
  const size = Number.isInteger(position) ? sizes[position] : undefined;
  if (!(operator instanceof Operator)) {
    const message = `embed: expected an Operator, got ${shown(operator)}; make one with Operator.from`;
    throw new GoodBasisError("shape", message, { position, dimensions: sizes });
  }
  if (size === undefined || operator.n !== size) {
    const expected = size === undefined ? `a factor 0 … ${sizes.length - 1}` : `an operator on ${size} kets`;
    const message = `embed: expected ${expected}, got an operator on ${operator.n} kets for factor ${shown(position)}`;
    throw new GoodBasisError("shape", message, { position, dimensions: sizes, n: operator.n });
  }
  const left = sizes.slice(0, position).reduce((product, d) => product * d, 1);
  const right = sizes.slice(position + 1).reduce((product, d) => product * d, 1);
  const { csr, order } = repeat(operator.csr, left, right);
  const own = operator.radius;
  if (operator.isExact) return Operator.fromCsr(csr, "exact");
  const radius = own === undefined ? "default" : Float64Array.from(order, (e) => own[e] as number);
  const embedded = Operator.fromCsr(csr, radius);
  if (!operator.isKnownExactly) return embedded;
  return Operator.withExact(embedded, () => {
    const exact = operator.exact ?? ExactOperator.zero(size);
    return ExactOperator.identity(left).kron(exact).kron(ExactOperator.identity(right));
  });
}

/** 1 ⊗ A ⊗ 1 with identities of the given dimensions, and where each entry came from. */
function repeat(a: Csr, left: number, right: number): { csr: Csr; order: Int32Array } {
  const n = left * a.rows * right;
  const count = left * a.col.length * right;
  const ptr = new Int32Array(n + 1);
  const col = new Int32Array(count);
  const re = new Float64Array(count);
  const im = a.im === undefined ? undefined : new Float64Array(count);
  const order = new Int32Array(count);
  let row = 0;
  let f = 0;
  for (let l = 0; l < left; l++) {
    for (let r = 0; r < a.rows; r++) {
      const start = a.ptr[r] as number;
      const end = a.ptr[r + 1] as number;
      for (let s = 0; s < right; s++) {
        for (let e = start; e < end; e++, f++) {
          col[f] = (l * a.rows + (a.col[e] as number)) * right + s;
          re[f] = a.re[e] as number;
          if (im !== undefined && a.im !== undefined) im[f] = a.im[e] as number;
          order[f] = e;
        }
        ptr[++row] = f;
      }
    }
  }
  return { csr: { rows: n, cols: n, ptr, col, re, im }, order };
}

function productKets(sizes: readonly number[], names: readonly (readonly string[])[], separator: string): string[] {
  const expected = `lists of [${sizes.join(", ")}] names`;
  if (!Array.isArray(names) || !names.every((list) => Array.isArray(list))) {
    const message = `kets: expected ${expected}, one list a factor, got ${shown(names)}`;
    throw new GoodBasisError("shape", message, { dimensions: sizes });
  }
  if (typeof separator !== "string") {
    throw new GoodBasisError("option", `kets: expected a separator such as ",", got ${shown(separator)}`, {
      separator,
    });
  }
  if (names.length !== sizes.length || names.some((list, k) => list.length !== sizes[k])) {
    const came = names.map((list) => list.length).join(", ");
    const message = `kets: expected ${expected}, got lists of [${came}]`;
    throw new GoodBasisError("shape", message, { dimensions: sizes });
  }
  return names
    .slice(1)
    .reduce<string[]>(
      (kets, list) => kets.flatMap((ket) => list.map((name) => `${ket}${separator}${name}`)),
      [...(names[0] ?? [])],
    );
}
