import type { CandidateFinding } from "../audit/audit.js";
import type { PreparedCandidate, PreparedProblem } from "../audit/problem.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, roundDown, roundUp } from "../numerics/rounding.js";
import { conjugate, maxRowEntries, multiply, transpose } from "../numerics/sparse.js";
import type { Operator } from "../operator/operator.js";
import type { NodeKind, PathStep, TreeNode } from "../refine/tree.js";
import type { LevelStates } from "./level-states.js";
import { imageError, images } from "./residuals.js";
import { smallestGap } from "./whole.js";

/** Evidence of one node that states of different children are not coupled by one perturbation. */
export interface CouplingBound {
  readonly perturbation: string;
  /** By the selection rule; Infinity where the node's operator says nothing about V. */
  readonly selectionRule: number;
  /** By direct evaluation of the elements, rounding included. */
  readonly direct: number;
  /** The smaller of the two. */
  readonly counted: number;
}

/** What one node of the tree contributes to one level. */
export interface NodeEvidence {
  readonly node: number;
  readonly operator: string;
  readonly kind: NodeKind;
  /** Eigenvalues that occur in this level. */
  readonly values: readonly { readonly re: number; readonly im: number }[];
  /** Smallest distance between them. */
  readonly gap: number;
  /** Bounds on ‖[A, V]‖₂, one a perturbation; empty where the node is no label. */
  readonly commutators: readonly number[];
  /** Largest bound on ‖A q − a q‖ and ‖A†q − a*q‖ over the states below. */
  readonly residual: number;
  readonly couplings: readonly CouplingBound[];
}

/** A pair of states of one level with its element of one perturbation. */
export interface PairElement {
  readonly perturbation: string;
  /** Places of the two states within the level. */
  readonly first: number;
  readonly second: number;
  readonly re: number;
  readonly im: number;
  readonly size: number;
  /** Rigorous lower and upper bounds on the modulus. */
  readonly atLeast: number;
  readonly atMost: number;
}

/** All in-level elements of the perturbations, summarised. */
export interface LevelCouplings {
  readonly nodes: readonly NodeEvidence[];
  /** For each perturbation: V_μμ of each state. */
  readonly diagonals: readonly Float64Array[];
  /** For each perturbation: bound on the error of one element. */
  readonly elementError: readonly number[];
  /** For each perturbation: bound on the Frobenius norm of the off-diagonal elements. */
  readonly offDiagonal: readonly number[];
  /** For each perturbation: largest counted bound over all pairs. */
  readonly largest: readonly number[];
  /** For each perturbation: largest direct element inside leaves of several states, rounding included. */
  readonly withinLeaves: readonly number[];
  /** Bound on ‖Q Q† − 1‖_F of the level. */
  readonly orthonormality: number;
  /** The largest elements that are certainly not zero to the resolution, descending. */
  readonly worst: readonly PairElement[];
}

const WORST_KEPT = 10;

/**
 * Evaluates V between all states of a level, and bounds the same elements by the selection rule.
 *
 * For a normal A with A q_ν = a_ν q_ν + r_ν, A†q_μ = a_μ* q_μ + s_μ and C = AV − VA,
 *
 *     |V_μν| ≤ ( ‖C‖ ‖q_μ‖ ‖q_ν‖ + ‖s_μ‖ ‖V q_ν‖ + ‖V q_μ‖ ‖r_ν‖ ) / |a_μ − a_ν|.
 *
 * @param residuals - for each candidate: bounds on the residuals of each state (used where the state carries the label)
 * @param thresholds - for each perturbation: elements certainly above this are listed
 */
export function levelCouplings(
  problem: PreparedProblem,
  findings: readonly CandidateFinding[],
  { states, vectors }: LevelStates,
  nodes: readonly TreeNode[],
  residuals: readonly (Float64Array | undefined)[],
  thresholds: readonly number[],
): LevelCouplings {
  const bra = conjugate(vectors);
  const gram = multiply(bra, transpose(vectors));
  const orthonormality = gramDefect(gram, vectors);
  const length = Math.sqrt(1 + orthonormality);
  const paths = states.map((state) => state.path);
  const places = new Map<number, number>();
  const found: Found[] = [];
  paths.forEach((path, state) => {
    for (const { node, child } of path) {
      let place = places.get(node);
      if (place === undefined) {
        place = found.length;
        places.set(node, place);
        found.push({ node, children: new Map(), states: [] });
      }
      const entry = found[place] as Found;
      entry.states.push(state);
      entry.children.set(child, (entry.children.get(child) ?? 0) + 1);
    }
  });
  const separating = found.filter((entry) => entry.children.size > 1);
  const direct = problem.perturbations.map(() => new Map<number, number>());
  const diagonals: Float64Array[] = [];
  const elementError: number[] = [];
  const offDiagonal: number[] = [];
  const withinLeaves: number[] = [];
  const worst: PairElement[] = [];
  problem.perturbations.forEach((perturbation, p) => {
    const pass = evaluate(perturbation, bra, vectors, paths, direct[p] as Map<number, number>, thresholds[p] ?? 0, worst);
    diagonals.push(pass.diagonal);
    elementError.push(pass.error);
    offDiagonal.push(pass.offDiagonal);
    withinLeaves.push(pass.withinLeaves);
  });
  const evidence = separating.map((entry): NodeEvidence => {
    const node = nodes[entry.node] as TreeNode;
    const values = [...entry.children.keys()].sort((a, b) => a - b).map((child) => node.values[child] ?? { re: 0, im: 0 });
    const gap = smallestGap(values);
    const place = problem.candidates.findIndex((candidate: PreparedCandidate) => candidate.name === node.operator);
    const own = node.kind === "label" ? residuals[place] : undefined;
    const residual = own === undefined ? 0 : Math.max(...entry.states.map((state) => own[state] as number));
    const commutators = own === undefined ? [] : (findings[place]?.withPerturbations.map((c) => c.bound) ?? []);
    const couplings = problem.perturbations.map(({ name, operator }, p): CouplingBound => {
      const v = operator.norm + operator.error;
      const selectionRule =
        own === undefined || commutators[p] === undefined
          ? Number.POSITIVE_INFINITY
          : roundUp((((commutators[p] as number) * length + 2 * v * residual) * length) / gap, 16);
      const largest = (direct[p]?.get(entry.node) ?? 0) + (elementError[p] as number);
      return { perturbation: name, selectionRule, direct: largest, counted: Math.min(selectionRule, largest) };
    });
    return { node: entry.node, operator: node.operator, kind: node.kind, values, gap, commutators, residual, couplings };
  });
  worst.sort((a, b) => b.size - a.size || a.first - b.first || a.second - b.second);
  return {
    nodes: evidence,
    diagonals,
    elementError,
    offDiagonal,
    withinLeaves,
    largest: problem.perturbations.map((_, p) =>
      Math.max(withinLeaves[p] ?? 0, ...evidence.map((node) => node.couplings[p]?.counted ?? 0)),
    ),
    orthonormality,
    worst: worst.slice(0, WORST_KEPT),
  };
}

interface Found {
  readonly node: number;
  readonly children: Map<number, number>;
  readonly states: number[];
}

/**
 * Bound on ‖conj(Q) Qᵀ − 1‖_F from its computed elements. Each is a sum of at most m products, in error by at most
 * √2 γ_{m+2} ‖q_μ‖ ‖q_ν‖; elements that are not stored have no common ket and are exactly zero.
 */
export function gramDefect(gram: Csr, vectors: Csr): number {
  const error = Math.SQRT2 * gamma(maxRowEntries(vectors) + 4) * 1.01;
  let sum = 0;
  for (let r = 0; r < gram.rows; r++) {
    for (let p = gram.ptr[r] as number; p < (gram.ptr[r + 1] as number); p++) {
      const x = (gram.re[p] as number) - (gram.col[p] === r ? 1 : 0);
      const y = gram.im === undefined ? 0 : (gram.im[p] as number);
      if (x === 0 && y === 0 && single(vectors, r) && single(vectors, gram.col[p] as number)) continue;
      sum += (Math.sqrt(x * x + y * y) + error) ** 2;
    }
  }
  return roundUp(Math.sqrt(sum), gram.re.length + 8);
}

/** A row that is one ket with coefficient 1: its products are exact. */
function single(vectors: Csr, row: number): boolean {
  const p = vectors.ptr[row] as number;
  return (vectors.ptr[row + 1] as number) - p === 1 && vectors.re[p] === 1;
}

interface Pass {
  readonly diagonal: Float64Array;
  readonly error: number;
  readonly offDiagonal: number;
  readonly withinLeaves: number;
}

function evaluate(
  { name, operator }: { readonly name: string; readonly operator: Operator },
  bra: Csr,
  vectors: Csr,
  paths: readonly (readonly PathStep[])[],
  direct: Map<number, number>,
  threshold: number,
  worst: PairElement[],
): Pass {
  const matrix = multiply(bra, transpose(images(vectors, operator)));
  // one element: the image's error, and a sum of at most m products with ‖q‖ ‖Vq‖ as the scale
  const error = roundUp(
    (imageError(operator) + Math.SQRT2 * gamma(maxRowEntries(vectors) + 4) * operator.norm) * (1 + 2 ** -18),
  );
  const diagonal = new Float64Array(matrix.rows);
  let sum = 0;
  let withinLeaves = 0;
  let floor = threshold;
  for (let r = 0; r < matrix.rows; r++) {
    for (let p = matrix.ptr[r] as number; p < (matrix.ptr[r + 1] as number); p++) {
      const c = matrix.col[p] as number;
      const x = matrix.re[p] as number;
      if (c === r) {
        diagonal[r] = x;
        continue;
      }
      const y = matrix.im === undefined ? 0 : (matrix.im[p] as number);
      const size = Math.sqrt(x * x + y * y);
      sum += (size + error) ** 2;
      if (c < r) continue;
      const node = partingNode(paths[r] as readonly PathStep[], paths[c] as readonly PathStep[]);
      if (node === undefined) withinLeaves = Math.max(withinLeaves, size + error);
      else if (size > (direct.get(node) ?? -1)) direct.set(node, size);
      const atLeast = roundDown(size) - error;
      if (atLeast <= floor) continue;
      worst.push({ perturbation: name, first: r, second: c, re: x, im: y, size, atLeast, atMost: roundUp(size) + error });
      if (worst.length > 64 * WORST_KEPT) {
        worst.sort((a, b) => b.size - a.size);
        worst.length = WORST_KEPT;
        floor = Math.max(floor, (worst[WORST_KEPT - 1] as PairElement).atLeast);
      }
    }
  }
  return { diagonal, error, offDiagonal: roundUp(Math.sqrt(sum), matrix.re.length + 8), withinLeaves };
}

/** The node at which two states part company; undefined for two states of one leaf. */
export function partingNode(a: readonly PathStep[], b: readonly PathStep[]): number | undefined {
  for (let k = 0; k < Math.min(a.length, b.length); k++) {
    const p = a[k] as PathStep;
    const q = b[k] as PathStep;
    if (p.node !== q.node) return undefined;
    if (p.child !== q.child) return p.node;
  }
  return undefined;
}
