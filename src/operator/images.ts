import type { Csr } from "../numerics/csr.js";
import { conjugate, maxRowEntries, multiply, transpose } from "../numerics/sparse.js";
import type { Operator } from "./operator.js";

/** Rows (A q)ᵀ for vectors q stored as rows: Q Aᵀ. */
export function images(vectors: Csr, operator: Operator): Csr {
  return multiply(vectors, operator.isHermitian ? conjugated(operator) : transposed(operator));
}

/** Rows (A† q)ᵀ: Q conj(A). */
export function adjointImages(vectors: Csr, operator: Operator): Csr {
  return multiply(vectors, conjugated(operator));
}

/** Rearrangements of operators that images were taken of; operators never change. */
const CONJUGATES = new WeakMap<Operator, Csr>();
const TRANSPOSES = new WeakMap<Operator, Csr>();

function conjugated(operator: Operator): Csr {
  return remembered(CONJUGATES, operator, conjugate);
}

function transposed(operator: Operator): Csr {
  return remembered(TRANSPOSES, operator, transpose);
}

function remembered(known: WeakMap<Operator, Csr>, operator: Operator, make: (csr: Csr) => Csr): Csr {
  let csr = known.get(operator);
  if (csr === undefined) {
    csr = make(operator.csr);
    known.set(operator, csr);
  }
  return csr;
}

/** The largest number of entries in a column. */
export function longestColumn(operator: Operator): number {
  return operator.isHermitian ? operator.rowEntries : maxRowEntries(transposed(operator));
}
