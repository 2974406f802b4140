import { GoodBasisError } from "../errors.js";
import { isObject, requireOptions, shown } from "../misuse.js";
import { type Complex, imaginaryPart, isScalar, realPart } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";

/** What plain JavaScript may hand to the methods of an operator, refused with an error that says what belongs there. */

/**
 * Refuses what is not sparse rows with a radius; the entries are not looked at.
 *
 * @param verb - the function on whose behalf frames of vectors are checked; without it, square matrices are
 * @throws GoodBasisError `shape`
 */
export function requireRows(core: unknown, verb?: string): void {
  if (isObject(core) && "csr" in core && "radius" in core && isRows(core.csr)) {
    const { rows, cols, col } = core.csr;
    if (verb !== undefined || (rows === cols && isRadius(core.radius, col.length))) return;
  }
  const expected = "sparse rows { rows, cols, ptr: Int32Array, col: Int32Array, re: Float64Array, im }";
  const came = isObject(core) && "csr" in core ? core.csr : core;
  const message =
    verb === undefined
      ? `Operator: expected square ${expected} and a radius, got ${shown(came)}; make one with Operator.from, which takes matrices of every form`
      : `${verb}: expected ${expected}, one vector a row, got ${shown(came)}`;
  throw new GoodBasisError("shape", message);
}

function isRows(csr: unknown): csr is { rows: number; cols: number; col: Int32Array } {
  if (!isObject(csr) || !("rows" in csr) || !("cols" in csr) || !("ptr" in csr) || !("col" in csr)) return false;
  const { rows, cols, ptr, col } = csr;
  if (typeof rows !== "number" || typeof cols !== "number") return false;
  if (!(ptr instanceof Int32Array) || !(col instanceof Int32Array) || ptr.length !== rows + 1) return false;
  if (!("re" in csr) || !(csr.re instanceof Float64Array) || csr.re.length !== col.length) return false;
  return !("im" in csr) || csr.im === undefined || (csr.im instanceof Float64Array && csr.im.length === col.length);
}

function isRadius(radius: unknown, count: number): boolean {
  return radius === "default" || radius === "exact" || (radius instanceof Float64Array && radius.length === count);
}

/**
 * Refuses what is no frame of vectors with n components, one a row.
 *
 * @throws GoodBasisError `shape`
 */
export function requireFrame(verb: string, frame: Csr, n: number): void {
  requireRows({ csr: frame, radius: "exact" }, verb);
  if (frame.cols === n && frame.rows !== 0) return;
  const message = `${verb}: expected a frame of vectors with ${n} components, got ${frame.rows} × ${frame.cols}`;
  throw new GoodBasisError("shape", message, { rows: frame.rows, cols: frame.cols, n });
}

/**
 * Refuses an operand that is no operator, or acts on other kets.
 *
 * @param isOperator - whether it is one
 * @throws GoodBasisError `shape`
 */
export function requireSame(verb: string, own: { n: number }, other: { n: number }, isOperator: boolean): void {
  if (!isOperator) throw wrongOperand(verb, other);
  if (other.n === own.n) return;
  const message = `${verb}: the operators act on ${own.n} and ${other.n} kets; both need the same kets`;
  throw new GoodBasisError("shape", message, { left: own.n, right: other.n });
}

/** The error for an operand that is no operator. */
export function wrongOperand(verb: string, came: unknown): GoodBasisError {
  const message = `${verb}: expected an Operator, got ${shown(came)}; make one with Operator.from, which takes matrices of every form`;
  return new GoodBasisError("shape", message);
}

/**
 * Refuses options that are not those of `Operator.from` and its relatives.
 *
 * @throws GoodBasisError `option`
 */
export function requireOperatorOptions(verb: string, options: unknown): void {
  requireOptions(verb, options, ["uncertainty"]);
}

/**
 * The factor as a complex number.
 *
 * @throws GoodBasisError `option` - no number; `not-finite`
 */
export function requireScalar(verb: string, factor: unknown): Complex {
  if (!isScalar(factor)) {
    const message = `${verb}: expected a number or { re, im } as factor, got ${shown(factor)}`;
    throw new GoodBasisError("option", message, { factor });
  }
  const z: Complex = { re: realPart(factor), im: imaginaryPart(factor) };
  if (Number.isFinite(z.re) && Number.isFinite(z.im)) return z;
  throw new GoodBasisError("not-finite", `${verb}: the factor must be finite, got ${z.re} + ${z.im}i`, { factor });
}

/**
 * Refuses a place outside the matrix.
 *
 * @throws GoodBasisError `shape`
 */
export function requireIndex(verb: string, row: unknown, col: unknown, n: number): void {
  for (const index of [row, col]) {
    if (typeof index === "number" && Number.isInteger(index) && index >= 0 && index < n) continue;
    const message = `${verb}: (${shown(row)}, ${shown(col)}) is outside 0 … ${n - 1}`;
    throw new GoodBasisError("shape", message, { row, col, n });
  }
}
