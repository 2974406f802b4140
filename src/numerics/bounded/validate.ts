import { GoodBasisError } from "../../errors.js";
import type { Csr } from "../csr.js";
import { requireCsr } from "../sparse/validate.js";
import type { Square } from "./types.js";

/**
 * Refuses a pair that is not two dense square matrices or two sparse ones with finite entries. Whether their sizes fit is for
 * the kernels to say.
 *
 * @param where - the function that was called
 * @param a - its first argument
 * @param b - its second one
 * @returns the pair, told apart
 * @throws GoodBasisError `shape` or `not-finite`
 */
export function requireFactors(where: string, a: Square | Csr, b: Square | Csr): Factors {
  const [left, right] = [kindOf(a), kindOf(b)];
  if (left !== right || left === "neither" || right === "neither") {
    throw new GoodBasisError(
      "shape",
      `${where}: expected two dense matrices { n, re, im } or two sparse ones { rows, cols, ptr, col, re, im }, got ` +
        `${SAID[left]} and ${SAID[right]}; of an operator pass operator.csr, or { n, ...operator.dense() }`,
    );
  }
  const dense = left === "dense";
  for (const m of [a, b]) {
    if (dense) requireSquare(where, m as Square);
    else requireCsr(where, m as Csr);
  }
  return dense ? { dense: [a as Square, b as Square] } : { dense: undefined, sparse: [a as Csr, b as Csr] };
}

/** Two matrices of one kind. */
export type Factors =
  | { readonly dense: readonly [Square, Square] }
  | { readonly dense: undefined; readonly sparse: readonly [Csr, Csr] };

const SAID = { dense: "a dense one", sparse: "a sparse one", neither: "another kind of value" } as const;

function kindOf(m: unknown): keyof typeof SAID {
  if (typeof m !== "object" || m === null || !("re" in m)) return "neither";
  if ("ptr" in m) return "sparse";
  return "n" in m ? "dense" : "neither";
}

function requireSquare(where: string, { n, re, im }: Square): void {
  const lists = re instanceof Float64Array && (im === undefined || im instanceof Float64Array);
  const order = typeof n === "number" && Number.isInteger(n) && n >= 0;
  if (!lists || !order || re.length !== n * n || (im !== undefined && im.length !== n * n)) {
    const got = lists
      ? `n ${describeOrder(n)} with ${re.length}${im === undefined ? "" : ` and ${im.length}`}`
      : "no such array";
    throw new GoodBasisError(
      "shape",
      `${where}: expected a dense matrix of order n ≥ 0 as Float64Arrays of n² numbers (im undefined for a real one), got ${got}; ` +
        "pass the full square, row by row",
    );
  }
  for (const part of im === undefined ? [re] : [re, im]) {
    const bad = part.findIndex((x) => !Number.isFinite(x));
    if (bad < 0) continue;
    const [row, col] = [Math.floor(bad / n), bad % n];
    throw new GoodBasisError("not-finite", `${where}: entry (${row}, ${col}) is not finite; pass finite entries`, {
      row,
      col,
    });
  }
}

const describeOrder = (n: unknown): string => (typeof n === "number" ? String(n) : typeof n);
