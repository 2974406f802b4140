import { ExactOperator } from "../exact/operator.js";
import type { ExactTriplet } from "../exact/rows.js";
import type { Csr } from "../numerics/csr.js";
import { conjugate, gather, submatrixOrder, transpose } from "../numerics/sparse.js";
import type { Combine } from "./companion.js";
import { uncertainProduct } from "./products.js";
import type { Uncertain } from "./radius.js";
import { settle } from "./settle.js";

/**
 * The matrix of elements q_i† A q_j between the rows q_i of a frame (conj(F) A Fᵀ), with radii. The frame counts as the very
 * numbers that it holds. A frame of given kets only selects entries.
 *
 * @param matrix - a square matrix of n kets
 * @param frame - one vector a row, n columns
 */
export function restrictTo(matrix: Uncertain, frame: Csr): Uncertain {
  const indices = selectedKets(frame);
  if (indices !== undefined) return selectKets(matrix, indices);
  const left = uncertainProduct({ csr: conjugate(frame), radius: "exact" }, matrix);
  const product = uncertainProduct(left, { csr: transpose(frame), radius: "exact" });
  return settle("restrict", product.csr, product.radius);
}

/** How the exact operator is restricted to a frame: where that selects kets. Undefined for any other, whose rows are rounded. */
export function restrictExactly(frame: Csr): Combine | undefined {
  const kets = selectedKets(frame)?.slice();
  if (kets === undefined) return undefined;
  return (a) => {
    const place = new Map(Array.from(kets, (ket, k) => [ket, k]));
    const triplets: ExactTriplet[] = [];
    for (const { row, col, value } of a.elements()) {
      const [i, j] = [place.get(row), place.get(col)];
      if (i !== undefined && j !== undefined) triplets.push([i, j, value]);
    }
    return ExactOperator.fromTriplets(kets.length, triplets);
  };
}

/** The kets that a frame selects, where each of its rows is one distinct ket with coefficient 1. */
function selectedKets(frame: Csr): Int32Array | undefined {
  if (frame.col.length !== frame.rows || frame.im !== undefined) return undefined;
  const seen = new Uint8Array(frame.cols);
  for (let r = 0; r < frame.rows; r++) {
    const col = frame.col[r] as number;
    if (frame.ptr[r + 1] !== r + 1 || frame.re[r] !== 1 || seen[col] === 1) return undefined;
    seen[col] = 1;
  }
  return frame.col;
}

function selectKets(matrix: Uncertain, indices: Int32Array): Uncertain {
  const { csr, order } = submatrixOrder(matrix.csr, indices);
  return { csr, radius: matrix.radius instanceof Float64Array ? gather(matrix.radius, order) : matrix.radius };
}
