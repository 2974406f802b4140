import { orthogonalise } from "../exact/gram-schmidt.js";
import type { ExactOperator } from "../exact/operator.js";
import { fromRoots } from "../exact/polynomial.js";
import { Surd } from "../exact/surd.js";
import { ExactVector } from "../exact/vector.js";
import type { ProofBudget } from "./budget.js";
import { connectedParts } from "./connected.js";
import { Frame } from "./frame.js";
import type { BlockValue } from "./proof.js";
import { groupPieces, type Restricted, type RootPiece } from "./root-pieces.js";
import { type Part, splitMatrix } from "./split.js";
import { ValueGroups } from "./value-groups.js";

/** One child of a block: what the operator does there, and orthogonal vectors that span it. */
export interface Child {
  readonly value: BlockValue;
  readonly frame: Frame;
}

/**
 * Takes a block apart by a Hermitian operator: exact eigenspaces by ascending value, then what leaves the field, in
 * pieces that share no eigenvalue.
 *
 * The matrix falls into connected parts first; equal parts, such as the orbits of a permutation, are solved once.
 *
 * @param restricted - the matrix of the operator over the vectors of a frame, of this block or a part of it
 * @throws GoodBasisError `budget`
 */
export function refineHermitian(frame: Frame, restricted: Restricted, budget: ProofBudget): Child[] {
  const matrix = restricted(frame);
  const exact = new ValueGroups<readonly ExactVector[]>();
  const pieces: RootPiece[] = [];
  const unknown: ExactVector[] = [];
  const solved = new Map<string, Part[]>();
  const norms = frame.norms;
  for (const indices of connectedParts(matrix)) {
    for (const { value, coordinates } of partsOf(matrix, indices, norms, solved, budget)) {
      const lifted = coordinates.map((x) => frame.combine(indices, x));
      const vectors = lifted.length === 1 ? lifted : orthogonalise(lifted, budget).vectors;
      if (value.kind === "value") exact.add(value.value, vectors);
      else if (value.kind === "unknown") unknown.push(...vectors);
      else pieces.push({ ...value.factor, vectors });
    }
  }
  const linear = pieces.length === 0 ? [] : exact.list.map(({ value }) => fromRoots([value]));
  const others: Child[] = [];
  for (const { value, vectors } of groupPieces(restricted, pieces, linear, budget)) {
    if (value.kind === "value") exact.add(value.value, vectors);
    else others.push({ value, frame: new Frame(vectors) });
  }
  if (unknown.length > 0) others.push({ value: { kind: "unknown" }, frame: new Frame(unknown) });
  const children = exact.list
    .map(({ value, items }) => ({ value, vectors: items.flat() }))
    .sort((a, b) => a.value.compare(b.value))
    .map(({ value, vectors }): Child => ({ value: { kind: "value", value }, frame: new Frame(vectors) }));
  return [...children, ...others];
}

function partsOf(
  matrix: ExactOperator,
  indices: readonly number[],
  norms: readonly Surd[],
  solved: Map<string, Part[]>,
  budget: ProofBudget,
): Part[] {
  const [only] = indices;
  if (indices.length === 1 && only !== undefined) {
    const value = matrix.entry(only, only);
    return [{ value: { kind: "value", value }, coordinates: [ExactVector.unit(1, 0)] }];
  }
  const own = indices.map((k) => norms[k] as Surd);
  const inner = indices.length === matrix.n ? matrix : matrix.principal(indices);
  const entries = [...inner.elements()].map(({ row, col, value }) => `${row},${col}:${value.text()}`);
  const key = [...own.map((norm) => norm.text()), ...entries].join(";");
  const parts = solved.get(key) ?? splitMatrix(inner, own, budget);
  solved.set(key, parts);
  return parts;
}

/** The compression P A P of an operator, over any frame. */
export function within(operator: ExactOperator, budget: ProofBudget): Restricted {
  return (frame) => frame.matrix(operator, budget).matrix;
}

const I_TWICE = Surd.i.times(2);

/**
 * Takes a block apart by any normal operator: by its Hermitian part (A + A†)/2, then each eigenspace of that by (A −
 * A†)/2i. Where the first leaves the field, the second is not tried: the block stays one with roots for real parts.
 *
 * @returns undefined where the operator leads out of the block
 * @throws GoodBasisError `budget`
 */
export function refineNormal(frame: Frame, operator: ExactOperator, budget: ProofBudget): Child[] | undefined {
  const { matrix, invariant } = frame.matrix(operator, budget);
  if (!invariant) return undefined;
  if (operator.isHermitian) {
    return refineHermitian(frame, (part) => (part === frame ? matrix : part.matrix(operator, budget).matrix), budget);
  }
  const adjoint = operator.adjoint();
  const real = operator.plus(adjoint).scale(Surd.ratio(1n, 2n));
  const imaginary = operator.minus(adjoint).scale(I_TWICE.inverse());
  return refineHermitian(frame, within(real, budget), budget).flatMap((child): Child[] => {
    const { value } = child;
    if (value.kind === "unknown") return [child];
    if (value.kind === "roots") return [{ ...child, value: { ...value, part: "re" } }];
    return refineHermitian(child.frame, within(imaginary, budget), budget).map((inner): Child => {
      const y = inner.value;
      if (y.kind === "unknown") return inner;
      if (y.kind === "roots") return { ...inner, value: { ...y, part: "im", re: value.value } };
      return { ...inner, value: { kind: "value", value: value.value.plus(y.value.times(Surd.i)) } };
    });
  });
}
