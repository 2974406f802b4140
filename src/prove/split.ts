import { GoodBasisError } from "../errors.js";
import { characteristicPolynomial } from "../exact/characteristic.js";
import { exactKernel } from "../exact/elimination.js";
import { ExactOperator } from "../exact/operator.js";
import { degree, type Polynomial } from "../exact/polynomial.js";
import { Surd } from "../exact/surd.js";
import { ExactVector } from "../exact/vector.js";
import type { ProofBudget } from "./budget.js";
import { guessEigenvalues } from "./guess.js";
import { type Factor, squareFreeFactors } from "./roots.js";

/** What an operator does in one part of a space. */
export type PartValue =
  | { readonly kind: "value"; readonly value: Surd }
  | { readonly kind: "roots"; readonly factor: Factor }
  | { readonly kind: "unknown" };

/** A part of a space, in coordinates. */
export interface Part {
  readonly value: PartValue;
  /** Independent vectors; those of different parts are orthogonal, those of one part need not be. */
  readonly coordinates: readonly ExactVector[];
}

/** Largest degree of a factor of the characteristic polynomial; a few seconds go into its roots. */
const MOST_DEGREE = 32;

/** Below this size the characteristic polynomial is quicker than a guess. */
const SMALLEST_GUESS = 3;

/**
 * Takes a matrix apart into exact eigenspaces and the rest.
 *
 * Eigenvalues are guessed from the floating ones and proved by their eigenspaces, exact kernels of M − a. Where the
 * dimensions do not add up, a guess has failed or there are eigenvalues of another form: the characteristic polynomial
 * on what is left gives the others, and factors whose roots leave the field. In the end the dimensions add up to the
 * size, which proves that nothing is missing.
 *
 * @param matrix - M = N⁻¹ H with H Hermitian
 * @param norms - the diagonal of N, positive: the squared norms of the vectors that M is written over
 * @throws GoodBasisError `budget` - in a kernel
 */
export function splitMatrix(matrix: ExactOperator, norms: readonly Surd[], budget: ProofBudget): Part[] {
  const { n } = matrix;
  if (n === 1) return [part(matrix.entry(0, 0), [ExactVector.unit(1, 0)])];
  const parts: Part[] = [];
  let left = n;
  for (const guess of n < SMALLEST_GUESS ? [] : guessEigenvalues(matrix, norms)) {
    const coordinates = kernelOf(matrix, guess, budget);
    if (coordinates.length === 0) continue;
    left -= coordinates.length;
    parts.push(part(guess, coordinates));
    if (left === 0) return parts;
  }
  const rest = complement(
    parts.flatMap(({ coordinates }) => coordinates),
    norms,
    budget,
  );
  return [...parts, ...splitRest(matrix, norms, rest, budget)];
}

function part(value: Surd, coordinates: readonly ExactVector[]): Part {
  return { value: { kind: "value", value }, coordinates };
}

function kernelOf(matrix: ExactOperator, value: Surd, budget: ProofBudget): ExactVector[] {
  budget.ledger.spendProducts(matrix.count * matrix.n);
  return exactKernel(matrix.minus(ExactOperator.identity(matrix.n).scale(value)), budget);
}

/** What is orthogonal to some vectors: Σ_i c_i* N_i x_i = 0. */
function complement(vectors: readonly ExactVector[], norms: readonly Surd[], budget: ProofBudget): ExactVector[] {
  const n = norms.length;
  const conditions = vectors.flatMap((vector, row) =>
    vector.values.map((x, k) => {
      const col = vector.index[k] as number;
      return [row, col, x.conjugate().times(norms[col] as Surd)] as const;
    }),
  );
  return exactKernel(ExactOperator.fromTriplets(n, conditions), budget);
}

/** The invariant space of some vectors, by its characteristic polynomial. */
function splitRest(
  matrix: ExactOperator,
  norms: readonly Surd[],
  rest: readonly ExactVector[],
  budget: ProofBudget,
): Part[] {
  const whole = rest.length === matrix.n;
  const basis = whole ? rest : orthogonal(rest, norms);
  const inner = whole ? matrix : over(matrix, norms, basis);
  let factors: Factor[];
  let split: { factor: Factor; roots: readonly Surd[]; left: Polynomial }[];
  try {
    budget.ledger.spendProducts(inner.count * inner.n ** 2);
    factors = squareFreeFactors(characteristicPolynomial(inner, budget));
    split = factors.map((factor) => {
      requireDegree(factor.polynomial);
      const { roots, rest: left } = budget.known.field(factor.polynomial, budget);
      return { factor, roots, left };
    });
  } catch (error) {
    if (!(error instanceof GoodBasisError) || error.code !== "budget") throw error;
    return [{ value: { kind: "unknown" }, coordinates: basis }];
  }
  const back = (list: readonly ExactVector[]): ExactVector[] =>
    whole ? [...list] : list.map((coordinates) => ExactVector.combination(basis, coordinates).primitive());
  return split.flatMap(({ factor: { multiplicity }, roots, left }): Part[] => {
    const parts = roots.map((root) => part(root, back(kernelOf(inner, root, budget))));
    if (degree(left) < 1) return parts;
    const factor = { polynomial: left, multiplicity };
    const coordinates = back(exactKernel(polynomialOf(left, inner, budget), budget));
    return [...parts, { value: { kind: "roots", factor }, coordinates }];
  });
}

/** @throws GoodBasisError `budget` */
function requireDegree(p: Polynomial): void {
  if (degree(p) <= MOST_DEGREE) return;
  const message = `proveExactly: a polynomial of degree ${degree(p)}, where roots are looked for up to ${MOST_DEGREE}`;
  throw new GoodBasisError("budget", message, { degree: degree(p), most: MOST_DEGREE });
}

/** p(M), by Horner's rule. */
export function polynomialOf(p: Polynomial, matrix: ExactOperator, budget: ProofBudget): ExactOperator {
  const one = ExactOperator.identity(matrix.n);
  return p.reduceRight((sum, c) => sum.times(matrix, budget).plus(one.scale(c)), ExactOperator.zero(matrix.n));
}

function weighted(a: ExactVector, b: ExactVector, norms: readonly Surd[]): Surd {
  let sum = Surd.zero;
  for (const [k, x] of a.values.entries()) {
    const at = a.index[k] as number;
    const y = b.component(at);
    if (!y.isZero)
      sum = sum.plus(
        x
          .conjugate()
          .times(y)
          .times(norms[at] as Surd),
      );
  }
  return sum;
}

/** Gram–Schmidt in the scalar product of the norms. */
function orthogonal(vectors: readonly ExactVector[], norms: readonly Surd[]): ExactVector[] {
  const done: ExactVector[] = [];
  for (const vector of vectors) {
    const rest = done.reduce((left, unit) => {
      const overlap = weighted(unit, vector, norms);
      return overlap.isZero ? left : left.plus(unit, overlap.over(weighted(unit, unit, norms)).negate());
    }, vector);
    if (!rest.isZero) done.push(rest.primitive());
  }
  return done;
}

/** The matrix over other vectors, orthogonal in the same scalar product, of a space that it maps into itself. */
function over(matrix: ExactOperator, norms: readonly Surd[], basis: readonly ExactVector[]): ExactOperator {
  const squares = basis.map((vector) => weighted(vector, vector, norms));
  const triplets = basis.flatMap((right, j) => {
    const image = matrix.apply(right);
    return basis.map((left, i) => [i, j, weighted(left, image, norms).over(squares[i] as Surd)] as const);
  });
  return ExactOperator.fromTriplets(basis.length, triplets);
}
