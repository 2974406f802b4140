import type { PreparedProblem } from "../audit/problem.js";
import { LABEL_WIDTH, NOISE } from "../audit/resolution.js";
import type { Csr } from "../numerics/csr.js";
import { adjoint, conjugate, diagonalCsr, multiply, toDense, transpose } from "../numerics/sparse.js";
import { stackRows } from "../numerics/stack.js";
import { images } from "../operator/images.js";
import { splitIntoEigenspaces } from "../refine/eigenspaces.js";
import { inSpace } from "../refine/sectors.js";

/** The rotation inside a level that diagonalises V there. */
export interface Repair {
  /** Unitary d × d: the new column k is Σ_j (old column j) · rotation[j][k]; real part. */
  readonly re: readonly (readonly number[])[];
  /** Imaginary part; absent for a real rotation. */
  readonly im?: readonly (readonly number[])[];
  /** First-order shifts of the new columns, one list a perturbation. */
  readonly shifts: readonly (readonly number[])[];
  /** Largest off-diagonal element left, over all perturbations; not small where no basis is good for all of them. */
  readonly left: number;
}

/**
 * The rotation that diagonalises every perturbation in turn inside a level: the first as it stands, the next inside what is
 * still together. Columns that V does not couple are left alone.
 *
 * @param vectors - the level's columns, as rows
 */
export function repairLevel(problem: PreparedProblem, vectors: Csr): Repair {
  const size = vectors.rows;
  const identity = diagonalCsr(new Float64Array(size).fill(1));
  const matrices = problem.perturbations.map(({ operator }) =>
    multiply(conjugate(vectors), transpose(images(vectors, operator))),
  );
  let blocks: { rows: Csr; indices: Int32Array | undefined }[] = [{ rows: identity, indices: identity.col }];
  matrices.forEach((matrix, p) => {
    const norm = problem.perturbations[p]?.operator.norm ?? 0;
    blocks = blocks.flatMap((block) =>
      splitIntoEigenspaces(inSpace(block, matrix), {
        hermitian: true,
        noise: NOISE * norm,
        cluster: LABEL_WIDTH * norm,
      }).spaces.map((space) => ({ rows: multiply(space.rows, block.rows), indices: undefined })),
    );
  });
  const rows = stackRows(
    blocks.map((block) => block.rows),
    size,
  );
  let left = 0;
  const shifts = matrices.map((matrix) => {
    const rotated = multiply(conjugate(rows), multiply(matrix, transpose(rows)));
    const diagonal = new Array<number>(size).fill(0);
    for (let r = 0; r < size; r++) {
      for (let q = rotated.ptr[r] as number; q < (rotated.ptr[r + 1] as number); q++) {
        const x = rotated.re[q] as number;
        const y = rotated.im === undefined ? 0 : (rotated.im[q] as number);
        if (rotated.col[q] === r) diagonal[r] = x;
        else left = Math.max(left, Math.sqrt(x * x + y * y));
      }
    }
    return diagonal;
  });
  // rows of U are coefficient vectors, so the rotation's columns are its transpose
  const dense = toDense(adjoint(conjugate(rows)));
  const nested = (values: Float64Array): number[][] =>
    Array.from({ length: size }, (_, j) => [...values.subarray(j * size, (j + 1) * size)]);
  return { re: nested(dense.re), ...(dense.im === undefined ? {} : { im: nested(dense.im) }), shifts, left };
}
