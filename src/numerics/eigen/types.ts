/** Eigenpairs of a Hermitian matrix. Neither signs, phases nor bases of degenerate levels are normalised. */
export interface HermitianEigen {
  /** Dimension. */
  readonly n: number;
  /**
   * Index of `values[0]` among all n eigenvalues in ascending order; 0 unless a window was asked for. Where none lies inside,
   * the number of eigenvalues below the window, but within `from` and `to`.
   */
  readonly first: number;
  /** The eigenvalues, ascending: all n, or those inside the window. */
  readonly values: Float64Array;
  /** Row k (n numbers from k n on) is the eigenvector of `values[k]`, A v = values[k] v; real parts. */
  readonly re: Float64Array;
  /** Imaginary parts in the same order; absent for a real matrix. */
  readonly im: Float64Array | undefined;
}

/**
 * Which eigenpairs are wanted: those with an index `from` ≤ k < `to` in ascending order and an eigenvalue from `low` to
 * `high`, both included. What is absent does not restrict.
 */
export interface EigenWindow {
  /** First index wanted, 0 unless given. */
  readonly from?: number;
  /** Index after the last one wanted, n unless given. */
  readonly to?: number;
  /** Smallest eigenvalue wanted. */
  readonly low?: number;
  /** Largest eigenvalue wanted. */
  readonly high?: number;
}

/**
 * What becomes of the upper triangle: `"check"` refuses a matrix in which it is not the conjugate of the lower one to within
 * 8 n units roundoff of the largest row, in the Frobenius norm; `"ignore"` lets the lower triangle stand for the matrix.
 */
export type UpperTriangle = "check" | "ignore";

/** What `hermitianEigen` may be told besides the matrix. */
export interface EigenOptions {
  /** Which eigenpairs are wanted; all of them where absent. Vectors outside are not transformed back. */
  readonly window?: EigenWindow;
  /** `"check"` unless told: a matrix that is not Hermitian is refused. The solver itself reads the lower triangle alone. */
  readonly upper?: UpperTriangle;
}

/** Sizes at which the algorithm changes; they alter speed, not what is promised. */
export interface EigenTuning {
  /** Tridiagonal blocks up to this order go to implicit QL, larger ones are divided. At least 1. */
  readonly leaf: number;
  /** From this order on, reflectors are applied in blocks. */
  readonly blockedFrom: number;
  /** Reflectors in a block. At least 1. */
  readonly blockWidth: number;
}

/** Matrices of one order, one after the other, none of which falls into components. */
export interface EigenJob {
  readonly count: number;
  readonly n: number;
  /** `count` row-major matrices; only the lower triangles are read. */
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
  /** At most one matrix where the window restricts anything. */
  readonly window: EigenWindow;
}

/**
 * What an engine found: the layout of {@link HermitianEigen}, one matrix after the other. The arrays may lie in memory
 * that the next call overwrites: copy what is to be kept.
 */
export interface EigenSolved {
  readonly first: number;
  readonly values: Float64Array;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/** One of the implementations that {@link EigenJob} can be handed to; `undefined` where this platform lacks it. */
export type EigenEngine = (job: EigenJob, tuning?: EigenTuning) => EigenSolved | undefined;
