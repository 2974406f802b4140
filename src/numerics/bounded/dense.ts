import { GoodBasisError } from "../../errors.js";
import { type Dense, multiplyDense } from "../dense.js";
import { gamma, roundUp, UNDERFLOW, UNIT_ROUNDOFF } from "../rounding.js";
import { wasmMultiplyDense } from "../wasm/dense.js";
import type { Bounded, Square } from "./types.js";

/** One of the implementations of the dense product; `undefined` where the platform lacks it. */
export type DenseEngine = (n: number, a: Dense, b: Dense) => Dense | undefined;

/**
 * The product AB of two dense square matrices with a bound on its rounding.
 *
 * The bound, for any order of summation and both implementations (Higham, Accuracy and Stability of Numerical
 * Algorithms, ch. 3 and 23; γ_k = k u / (1 − k u), every statement entry by entry):
 *
 * - Real, or one factor real: each real and each imaginary part is a sum of n products. A product is rounded once and
 *   takes part in at most n − 1 additions that round (adding to zero is exact), so a part is off by at most γ_n times
 *   the sum of the moduli of its products, and the entry by γ_n Σ |a_ik| |b_kj| (Minkowski's inequality for the pair of
 *   parts).
 * - Both complex, four multiplications: 2 n products a part, at most n + 1 roundings a product; |re re'| + |im im'| and
 *   |re im'| + |im re'| are each at most |a| |b|. The entry is off by at most √2 γ_{n + 1} Σ |a_ik| |b_kj|.
 * - Both complex, three multiplications: P₁ = Re A Re B and P₂ = Im A Im B are off by γ_n times the sum of their moduli,
 *   P₃ = (Re A + Im A)(Re B + Im B) by γ_{n + 2}, for the two sums are rounded as well. Re = P₁ − P₂ rounds once more: off
 *   by γ_{n + 1} Σ |a| |b|. Im = P₃ − P₁ − P₂ rounds twice more, and (|Re a| + |Im a|)(|Re b| + |Im b|) ≤ 2 |a| |b|: off by
 *   γ_{n + 4} (2 + 1) Σ |a| |b|. Together √10 γ_{n + 4} Σ |a_ik| |b_kj|: small beside the moduli of both factors, not beside
 *   an imaginary part that happens to be small.
 *
 * Hence C = √10 γ_{n + 4} serves both complex methods. Underflow: a product is off by half the smallest positive number
 * η besides; an entry sums at most 5 n of them (2 n in the real part, 3 n in the imaginary one), and what additions do to
 * these errors at most doubles them: 4 n η covers the entry, √(2² + 3²) < 4. The Euclidean norm over j of Σ_k |a_ik| |b_kj|
 * is at most Σ_k |a_ik| ρ_k with ρ_k the norm of row k of B; rows combine to the Frobenius norm.
 *
 * @param a - left factor
 * @param b - right factor, of the same order
 * @throws GoodBasisError `shape` when orders or lengths disagree
 */
export function productDense(a: Square, b: Square): Bounded<Square> {
  return productDenseBy(defaultEngine, a, b);
}

/**
 * {@link productDense} by a given engine.
 *
 * @throws as there
 * @internal
 */
export function productDenseBy(engine: DenseEngine, a: Square, b: Square): Bounded<Square> {
  requirePair("product", a, b);
  const { n } = a;
  return { value: { n, ...multiplyBy(engine, n, a, b) }, error: productError(a, b) };
}

/**
 * The commutator AB − BA of two dense square matrices with a bound on its rounding. Where both are exactly Hermitian it
 * is AB − (AB)†, one product instead of two, and the result exactly anti-Hermitian.
 *
 * The bound: those of the two products (twice that of AB for Hermitian factors, since an adjoint has the norm of the
 * matrix), plus one rounding for each part of the difference: fl(x − y) is off by at most u |fl(x − y)|, in all by u
 * times the Frobenius norm of the result. A difference that underflows is exact.
 *
 * @param a - first matrix
 * @param b - second matrix, of the same order
 * @throws GoodBasisError `shape` when orders or lengths disagree
 */
export function commutatorDense(a: Square, b: Square): Bounded<Square> {
  return commutatorDenseBy(defaultEngine, a, b);
}

/**
 * {@link commutatorDense} by a given engine.
 *
 * @throws as there
 * @internal
 */
export function commutatorDenseBy(engine: DenseEngine, a: Square, b: Square): Bounded<Square> {
  requirePair("commutator", a, b);
  const { n } = a;
  const ab = multiplyBy(engine, n, a, b);
  if (isHermitian(a) && isHermitian(b)) {
    subtractAdjoint(n, ab);
    return { value: { n, ...ab }, error: differenceError(ab, productError(a, b), productError(a, b)) };
  }
  const ba = multiplyBy(engine, n, b, a);
  subtract(ab, ba);
  return { value: { n, ...ab }, error: differenceError(ab, productError(a, b), productError(b, a)) };
}

/** The WebAssembly kernels where the platform runs them, else their plain twin. */
const defaultEngine: DenseEngine = (n, a, b) => wasmMultiplyDense(n, a, b) ?? multiplyDense(n, a, b);

function multiplyBy(engine: DenseEngine, n: number, a: Dense, b: Dense): Dense {
  const found = engine(n, a, b);
  if (found === undefined) throw new GoodBasisError("option", "product: this platform lacks the engine asked for");
  return found;
}

function requirePair(where: string, a: Square, b: Square): void {
  for (const m of [a, b]) {
    const size = a.n * a.n;
    if (m.n === a.n && m.re.length === size && (m.im === undefined || m.im.length === size)) continue;
    throw new GoodBasisError(
      "shape",
      `${where}: expected two square matrices of order ${a.n}, got order ${m.n} with ${m.re.length} numbers` +
        `${m.im === undefined ? "" : ` and ${m.im.length} imaginary parts`}; pass full squares of one order`,
      { n: a.n, other: m.n, re: m.re.length, im: m.im?.length },
    );
  }
}

/** The bound of {@link productDense}. */
function productError(a: Square, b: Square): number {
  const { n } = a;
  const norms = new Float64Array(n);
  for (let k = 0; k < n; k++) norms[k] = rowNorm(n, b, k);
  let squares = 0;
  let rows = 0;
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let k = 0; k < n; k++) sum += modulusAbove(a, i * n + k) * (norms[k] as number);
    // NaN, from zero times an infinite norm, goes on and makes the bound infinite.
    if (sum === 0) continue;
    squares += sum * sum;
    rows++;
  }
  // A square that underflows is off by half the smallest positive number at most.
  squares += rows * UNDERFLOW;
  const bothComplex = a.im !== undefined && b.im !== undefined;
  const constant = bothComplex ? Math.sqrt(10) * gamma(n + 4) : gamma(n);
  // 2 n + n roundings in the sums on the longest path, and a handful.
  return Number.isNaN(squares)
    ? Number.POSITIVE_INFINITY
    : roundUp(constant * Math.sqrt(squares), 4 * n + 16) + 5 * n * n * UNDERFLOW;
}

/** The modulus of entry `e`, an upper bound but for rounding; where the squares underflow, |re| + |im|. */
function modulusAbove({ re, im }: Dense, e: number): number {
  const x = re[e] as number;
  if (im === undefined) return Math.abs(x);
  const y = im[e] as number;
  const square = x * x + y * y;
  return square > SAFE_SQUARE ? Math.sqrt(square) : Math.abs(x) + Math.abs(y);
}

/** Above this a sum of two squares has lost nothing to underflow that its rounding does not cover. */
const SAFE_SQUARE = 2 ** -900;

/** Euclidean norm of row k; squares that underflow are made up for, so that only rounding is left to account for. */
function rowNorm(n: number, { re, im }: Dense, k: number): number {
  let sum = 0;
  for (let e = k * n; e < k * n + n; e++) sum += (re[e] as number) * (re[e] as number);
  if (im !== undefined) for (let e = k * n; e < k * n + n; e++) sum += (im[e] as number) * (im[e] as number);
  return Math.sqrt(sum + 2 * n * UNDERFLOW);
}

/** Bound on a computed difference of two matrices with the given bounds. */
function differenceError(value: Dense, first: number, second: number): number {
  let squares = 0;
  for (const part of value.im === undefined ? [value.re] : [value.re, value.im]) {
    for (let e = 0; e < part.length; e++) squares += (part[e] as number) * (part[e] as number);
  }
  const size = roundUp(Math.sqrt(squares + 2 * value.re.length * UNDERFLOW), 2 * value.re.length + 8);
  const error = roundUp(first + second + UNIT_ROUNDOFF * size, 4);
  return Number.isNaN(error) ? Number.POSITIVE_INFINITY : error;
}

/** Whether a matrix equals its adjoint, exactly. */
function isHermitian({ n, re, im }: Square): boolean {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      if (re[i * n + j] !== re[j * n + i]) return false;
      if (im !== undefined && im[i * n + j] !== -(im[j * n + i] as number)) return false;
    }
  }
  return true;
}

/** P ← P − P†. */
function subtractAdjoint(n: number, { re, im }: Dense): void {
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const k = i * n + j;
      const l = j * n + i;
      const x = (re[k] as number) - (re[l] as number);
      re[k] = x;
      re[l] = 0 - x;
      if (im === undefined) continue;
      const y = (im[k] as number) + (im[l] as number);
      im[k] = y;
      im[l] = y;
    }
  }
}

/** P ← P − Q; an imaginary part that only one has is impossible, both are products of the same two matrices. */
function subtract(p: Dense, q: Dense): void {
  for (let e = 0; e < p.re.length; e++) p.re[e] = (p.re[e] as number) - (q.re[e] as number);
  if (p.im === undefined || q.im === undefined) return;
  for (let e = 0; e < p.im.length; e++) p.im[e] = (p.im[e] as number) - (q.im[e] as number);
}
