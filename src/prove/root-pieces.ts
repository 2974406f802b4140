import { exactKernel } from "../exact/elimination.js";
import { orthogonalise } from "../exact/gram-schmidt.js";
import type { ExactOperator } from "../exact/operator.js";
import { degree, divide, type Polynomial } from "../exact/polynomial.js";
import { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { ProofBudget } from "./budget.js";
import { Frame } from "./frame.js";
import type { BlockValue } from "./proof.js";
import { coprimePolynomials, type Factor, samePolynomial } from "./roots.js";
import { polynomialOf } from "./split.js";

/** Orthogonal vectors on which an operator has the roots of a polynomial, each equally often. */
export interface RootPiece extends Factor {
  readonly vectors: readonly ExactVector[];
}

/** The matrix of an operator over the vectors of a frame: of an invariant block, or the compression P A P. */
export type Restricted = (frame: Frame) => ExactOperator;

/** Pieces with one polynomial. */
export interface RootGroup {
  /** The roots, or the number where there is only one. */
  readonly value: BlockValue;
  readonly vectors: readonly ExactVector[];
}

/**
 * Puts pieces together that share their eigenvalues and takes apart those that share some of them, so that groups have
 * no eigenvalue in common.
 *
 * @param restricted - the operator, which maps each piece into itself, at least inside the block that it is a piece of
 * @param others - polynomials that the groups shall not share single roots with either
 * @throws GoodBasisError `budget`
 */
export function groupPieces(
  restricted: Restricted,
  pieces: readonly RootPiece[],
  others: readonly Polynomial[],
  budget: ProofBudget,
): RootGroup[] {
  if (pieces.length === 0) return [];
  const base = coprimePolynomials([...pieces.map((piece) => piece.polynomial), ...others]);
  return base.flatMap((polynomial): RootGroup[] => {
    const holders = pieces.filter((piece) => degree(divide(piece.polynomial, polynomial).rest) < 0);
    if (holders.length === 0) return [];
    const multiplicity = holders.reduce((sum, piece) => sum + piece.multiplicity, 0);
    const vectors = holders.flatMap((piece) => partOf(restricted, piece, polynomial, budget));
    return [{ value: valueOfFactor({ polynomial, multiplicity }, budget), vectors }];
  });
}

function valueOfFactor({ polynomial, multiplicity }: Factor, budget: ProofBudget): BlockValue {
  if (degree(polynomial) === 1) return { kind: "value", value: (polynomial[0] ?? Surd.zero).negate() };
  const roots = { polynomial, multiplicity, intervals: budget.known.bounds(polynomial) };
  return { kind: "roots", roots, part: "whole", re: undefined };
}

/** The vectors of a piece that p(A) annihilates. */
function partOf(restricted: Restricted, piece: RootPiece, p: Polynomial, budget: ProofBudget): readonly ExactVector[] {
  if (samePolynomial(piece.polynomial, p)) return piece.vectors;
  const frame = new Frame(piece.vectors);
  const matrix = restricted(frame);
  const all = piece.vectors.map((_, k) => k);
  const kernel = exactKernel(polynomialOf(p, matrix, budget), budget);
  return orthogonalise(
    kernel.map((x) => frame.combine(all, x)),
    budget,
  ).vectors;
}
