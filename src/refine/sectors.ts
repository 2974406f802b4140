import type { PreparedCandidate, PreparedProblem } from "../audit/problem.js";
import { LABEL_WIDTH, LEVEL_WIDTH, NOISE } from "../audit/resolution.js";
import type { Complex } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { diagonalCsr, selectRows, submatrix } from "../numerics/sparse.js";
import type { Operator } from "../operator/operator.js";
import { carriedRowError, type DescentStep, descentStep, rotateAll, rotationError } from "./descent.js";
import { type Eigenspace, type Split, splitIntoEigenspaces } from "./eigenspaces.js";
import { invariance } from "./invariance.js";
import { composed, isIdentity, rotated, rowRange } from "./rotate.js";
import type { PathStep, TreeBuilder } from "./tree.js";

/** A label that a block carries: the candidate's place among the problem's candidates and its eigenvalue there. */
export interface BlockLabel {
  readonly candidate: number;
  readonly value: Complex;
}

/**
 * A symmetry sector: a subspace that no label taken into account divides further, with H0 diagonalised inside.
 *
 * V does not leave a sector (to the bounds of the commutators), so effective operators and resolvents live inside it.
 */
export interface Sector {
  /** Orthonormal vectors as rows over the kets, eigenvectors of H0 in the order of `energies`. */
  readonly frame: Csr;
  /** Energy of each vector, ascending; equal for vectors that were not told apart. */
  readonly energies: Float64Array;
  /** Each perturbation in this basis: ⟨i|V|j⟩. */
  readonly perturbations: readonly Csr[];
  readonly labels: readonly BlockLabel[];
  /** The node and child at which H0 was reached. */
  readonly from: PathStep | undefined;
  /** The node that split this sector by H0. */
  readonly energyNode: number;
  /** Which child of that node each vector belongs to. */
  readonly energyChild: Int32Array;
  /** Bound on the distance of each vector from the exact combination of the kets that its tree describes. */
  readonly rowError: number;
  /** The sector's vectors before H0 was diagonalised: sparser, and enough to judge the labels on. */
  readonly labelFrame: Csr;
}

/** The whole space taken apart by labels and H0. */
export interface Sectors {
  readonly sectors: readonly Sector[];
  /** Rigorous bound on ‖F F† − 1‖₂ for the vectors of all sectors together. */
  readonly defect: number;
}

/** A block on the way down. */
interface Block {
  readonly frame: Csr;
  readonly h0: Csr;
  readonly perturbations: readonly Csr[];
  /** The operators still to come, restricted to this block, in the order of refinement. */
  readonly remaining: readonly Csr[];
  readonly labels: readonly BlockLabel[];
  readonly from: PathStep | undefined;
  readonly depth: number;
  /** For each perturbation, bound on the distance of its restricted matrix from the exact one over the stored frame. */
  readonly vErrors: readonly number[];
  /** See {@link Sector.rowError}. */
  readonly rowError: number;
}

/** Cost classes of an operator, cheapest first: grouping of indices, orbits, eigensolver. */
function cost(operator: Operator): number {
  return operator.isDiagonal ? 0 : operator.isMonomial ? 1 : 2 + operator.csr.re.length;
}

/**
 * Refines the whole space by a set of commuting conserved candidates, each block further by any other conserved candidate
 * that maps it into itself, and every sector by H0.
 *
 * Among the candidates the order is free, so it goes by cost: diagonal ones group indices, monomial ones give orbits in
 * closed form, the eigensolver takes what is left. H0 comes last; where it is diagonal this costs nothing, since an
 * operator that commutes with it connects only kets of equal energy and so falls apart by itself.
 *
 * @param backbone - places of the commuting candidates among the problem's candidates
 * @param others - places of the other conserved candidates
 * @param withH0 - false to stop at the labels (energies are then zero and H0 is not looked at)
 */
export function buildSectors(
  problem: PreparedProblem,
  backbone: readonly number[],
  others: readonly number[],
  tree: TreeBuilder,
  withH0 = true,
): Sectors {
  const candidate = (place: number): PreparedCandidate => problem.candidates[place] as PreparedCandidate;
  const order = [...backbone].sort((a, b) => cost(candidate(a).operator) - cost(candidate(b).operator) || a - b);
  const splitDefects: number[] = [];
  const compositionSquares: number[] = [];
  const sectors: Sector[] = [];

  const descend = (block: Block): void => {
    const place = order[order.length - block.remaining.length];
    const matrix = block.remaining[0];
    if (place === undefined || matrix === undefined) {
      refineLocally(block, others);
      return;
    }
    for (const child of refine(block, matrix, candidate(place), place, block.remaining.slice(1))) descend(child);
  };

  const refineLocally = (block: Block, open: readonly number[]): void => {
    if (block.frame.rows > 1) {
      for (const place of open) {
        const local = invariance(block.frame, candidate(place).operator);
        if (!local.invariant) continue;
        const rest = open.filter((other) => other !== place);
        for (const child of refine(block, local.matrix, candidate(place), place, [])) refineLocally(child, rest);
        return;
      }
    }
    finish(block);
  };

  /** Children of a block under one conserved candidate. */
  const refine = (block: Block, matrix: Csr, by: PreparedCandidate, place: number, rest: readonly Csr[]): Block[] => {
    const hermitian = by.kind === "hermitian";
    const norm = by.operator.norm;
    const split = splitIntoEigenspaces(matrix, { hermitian, noise: NOISE * norm, cluster: LABEL_WIDTH * norm });
    const whole = split.spaces.length === 1;
    const step = whole ? undefined : descentStep(split, block);
    const carried = withH0 && step !== undefined ? block.perturbations.map((v) => rotateAll(step, v)) : undefined;
    const vErrors =
      step === undefined
        ? block.vErrors
        : problem.perturbations.map(({ operator }, p) =>
            rotationError(step, block.perturbations[p] as Csr, operator, block.vErrors[p] ?? 0),
          );
    const node = tree.add({
      from: block.from,
      kind: "label",
      operator: by.name,
      size: block.frame.rows,
      values: split.spaces.map((space) => space.value),
      spreads: split.spaces.map((space) => space.spread),
      sizes: split.spaces.map((space) => space.size),
      ...(carried === undefined
        ? {}
        : { crossings: carried.map(({ crossing }, p) => roundUp(crossing + (vErrors[p] ?? 0))) }),
    });
    if (step !== undefined) note(block, split.defect, step);
    const frame = step === undefined ? block.frame : frameOf(step, block.frame);
    let from = 0;
    return split.spaces.map((space, child): Block => {
      const rotate = (operator: Csr): Csr => (whole ? operator : inSpace(space, operator));
      from += space.size;
      return {
        frame: rowRange(frame, from - space.size, space.size),
        h0: withH0 ? rotate(block.h0) : block.h0,
        perturbations: carried?.map(({ children }) => children[child] as Csr) ?? block.perturbations,
        remaining: rest.map(rotate),
        labels: [...block.labels, { candidate: place, value: space.value }],
        from: { node, child },
        depth: block.depth + 1,
        vErrors,
        rowError: step === undefined ? block.rowError : carriedRowError(step, block.rowError),
      };
    });
  };

  /** Records how far the new vectors of one step of the descent may be from orthonormal. */
  const note = (block: Block, splitDefect: number, step: DescentStep): void => {
    if (step.indices !== undefined) return;
    const { depth } = block;
    splitDefects[depth] = Math.max(splitDefects[depth] ?? 0, splitDefect);
    compositionSquares[depth] = (compositionSquares[depth] ?? 0) + step.compositionError ** 2;
  };

  const finish = (block: Block): void => {
    const size = block.frame.rows;
    const split = withH0
      ? splitIntoEigenspaces(block.h0, {
          hermitian: true,
          noise: NOISE * problem.h0.norm,
          cluster: energyTolerance(problem, size),
          ascending: true,
        })
      : unsplit(size);
    const { spaces } = split;
    const energyNode = tree.add({
      from: block.from,
      kind: "energy",
      operator: "H0",
      size,
      values: spaces.map((space) => space.value),
      spreads: spaces.map((space) => space.spread),
      sizes: spaces.map((space) => space.size),
    });
    const energies = new Float64Array(size);
    const energyChild = new Int32Array(size);
    let at = 0;
    spaces.forEach((space, child) => {
      energies.fill(space.value.re, at, at + space.size);
      energyChild.fill(child, at, at + space.size);
      at += space.size;
    });
    const step = isIdentity(split.rows) ? undefined : descentStep(split, block);
    if (step !== undefined) note(block, split.defect, step);
    sectors.push({
      frame: step === undefined ? block.frame : frameOf(step, block.frame),
      energies,
      perturbations: step === undefined ? block.perturbations : block.perturbations.map((v) => inSpace(step, v)),
      labels: block.labels,
      from: block.from,
      energyNode,
      energyChild,
      rowError: step === undefined ? block.rowError : carriedRowError(step, block.rowError),
      labelFrame: block.frame,
    });
  };

  descend({
    frame: diagonalCsr(new Float64Array(problem.n).fill(1)),
    h0: problem.h0.csr,
    perturbations: problem.perturbations.map((v) => v.operator.csr),
    remaining: order.map((place) => candidate(place).operator.csr),
    labels: [],
    from: undefined,
    depth: 0,
    vErrors: problem.perturbations.map(() => 0),
    rowError: 0,
  });
  // one step down: F' = U F + E with U block-diagonal, so ‖F'F'† − 1‖ ≤ ‖UU† − 1‖ + ‖U‖²‖FF† − 1‖ + (2‖U‖‖F‖ + ‖E‖)‖E‖
  let defect = 0;
  for (let depth = 0; depth < splitDefects.length; depth++) {
    const step = splitDefects[depth] ?? 0;
    const error = Math.sqrt(compositionSquares[depth] ?? 0);
    defect = roundUp(step + (1 + step) * defect + (2 * (1 + step) * (1 + defect) + error) * error, 16);
  }
  return { sectors, defect };
}

/**
 * Energies this close are tried as one level: the rounding to be expected of the eigensolver and of the entries. It decides
 * only what is attempted; whether the level stands is judged afterwards from its spread and the gap around it.
 */
export function energyTolerance(problem: PreparedProblem, size: number): number {
  const { norm, error, isDiagonal } = problem.h0;
  const solver = isDiagonal ? 0 : 8 * Math.sqrt(size) * UNIT_ROUNDOFF * norm;
  return LEVEL_WIDTH * norm + 32 * error + solver;
}

/** New vectors of a block over the kets. */
function frameOf({ rows, indices }: Pick<Eigenspace, "rows" | "indices">, frame: Csr): Csr {
  return indices === undefined ? composed(rows, frame) : selectRows(frame, indices);
}

/** An operator restricted to an eigenspace: conj(U) B Uᵀ, whose elements are u_i† B u_j. */
export function inSpace({ rows, indices }: Pick<Eigenspace, "rows" | "indices">, operator: Csr): Csr {
  return indices === undefined ? rotated(rows, operator) : submatrix(operator, indices);
}

/** A block of one child, itself. */
function unsplit(size: number): Split {
  const rows = diagonalCsr(new Float64Array(size).fill(1));
  const whole = { value: { re: 0, im: 0 }, spread: 0, size, rows, indices: rows.col };
  return { spaces: [whole], rows, indices: rows.col, defect: 0 };
}
