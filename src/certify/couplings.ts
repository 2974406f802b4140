import type { CandidateFinding } from "../audit/audit.js";
import type { PreparedCandidate, PreparedProblem } from "../audit/problem.js";
import type { Complex } from "../numerics/complex.js";
import { modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { rootOfSquares, roundDown, roundUp } from "../numerics/rounding.js";
import { selectRows } from "../numerics/sparse.js";
import { images } from "../operator/images.js";
import type { Operator } from "../operator/operator.js";
import type { NodeKind, PathStep, TreeNode } from "../refine/tree.js";
import type { LevelState, LevelStates } from "./level-states.js";
import { elementErrorBound, forEachProduct, gramDefect } from "./products.js";
import { smallestGap } from "./whole.js";

/** Evidence of one node that states of different children are not coupled by one perturbation. */
export interface CouplingBound {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** By the selection rule; Infinity where the node's operator says nothing about V. */
  readonly selectionRule: number;
  /** By direct evaluation, rounding included: of the elements, or of the norm of the block that contains them. */
  readonly direct: number;
  /** The smaller of the two. */
  readonly counted: number;
}

/** What one node of the tree contributes to one level. */
export interface NodeEvidence {
  /** Number of the node in the tree. */
  readonly node: number;
  /** Name of its operator. */
  readonly operator: string;
  /** What kind of refinement it is. */
  readonly kind: NodeKind;
  /** Eigenvalues that occur in this level. */
  readonly values: readonly Complex[];
  /** Smallest distance between them. */
  readonly gap: number;
  /** Bounds on ‖[A, V]‖₂, one a perturbation; empty where the node is no label. */
  readonly commutators: readonly number[];
  /** Largest bound on ‖A q − a q‖ and ‖A†q − a*q‖ over the states below. */
  readonly residual: number;
  /** One bound for each perturbation. */
  readonly couplings: readonly CouplingBound[];
  /** Bound on H0's elements between the states that part here, by the selection rule or their residuals; 0 where it is no label. */
  readonly energyCoupling: number;
  /**
   * Whether the label is conserved sharply enough, for its gap, to stand at every order: the selection rule bounds the
   * elements of H0 and of every perturbation below the resolution. True for nodes that are no label.
   */
  readonly sharp: boolean;
}

/** A pair of states of one level with its element of one perturbation. */
export interface PairElement {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** Places of the two states within the level. */
  readonly first: number;
  /** Place of the second state within the level. */
  readonly second: number;
  /** Real part of the element. */
  readonly re: number;
  /** Imaginary part of the element. */
  readonly im: number;
  /** Its modulus, as computed. */
  readonly size: number;
  /** Rigorous lower and upper bounds on the modulus. */
  readonly atLeast: number;
  /** Rigorous upper bound on the modulus. */
  readonly atMost: number;
}

/** All in-level elements of the perturbations, summarised. */
export interface LevelCouplings {
  /** The nodes at which states of the level part company. */
  readonly nodes: readonly NodeEvidence[];
  /** For each perturbation: V_μμ of each state. */
  readonly diagonals: readonly Float64Array[];
  /** For each perturbation: bound on the error of one element. */
  readonly elementError: readonly number[];
  /** For each perturbation: bound on the 2-norm of the off-diagonal elements together. */
  readonly offDiagonal: readonly number[];
  /** For each perturbation: largest counted bound over all pairs. */
  readonly largest: readonly number[];
  /** For each perturbation: largest direct element inside leaves of several states, rounding included. */
  readonly withinLeaves: readonly number[];
  /** Bound on ‖Q Q† − 1‖₂ of the level. */
  readonly orthonormality: number;
  /** The largest elements that are certainly not zero to the resolution, descending. */
  readonly worst: readonly PairElement[];
}

const WORST_KEPT = 10;

/** What is known before the elements of a level are evaluated. */
export interface CouplingInput {
  readonly problem: PreparedProblem;
  readonly findings: readonly CandidateFinding[];
  readonly level: LevelStates;
  readonly nodes: readonly TreeNode[];
  /** For each candidate: bounds on the residuals of each state (used where the state carries the label). */
  readonly residuals: readonly (Float64Array | undefined)[];
  /** Bounds on ‖H0 q − E q‖ of each state. */
  readonly energyResiduals: Float64Array;
  /** For each perturbation: elements certainly above this are listed. */
  readonly thresholds: readonly number[];
  /** Bound on ‖F F† − 1‖₂ of the whole basis. */
  readonly wholeDefect: number;
  /** Elements of H0 between labels count as vanished below this. */
  readonly energyThreshold: number;
}

/**
 * Bounds V between all states of a level, by direct evaluation and by the selection rule.
 *
 * *Directly.* Between states of one sector, element by element. Between sectors, at the node where they part: V's block between
 * the children's vectors was evaluated there once, and its norm bounds every element, since later vectors are unit
 * combinations of those to within their rounding errors.
 *
 * *Selection rule.* For a normal A with A q_ν = a_ν q_ν + r_ν, A†q_μ = a_μ* q_μ + s_μ and C = AV − VA,
 *
 *     |V_μν| ≤ ( ‖C‖ ‖q_μ‖ ‖q_ν‖ + ‖s_μ‖ ‖V q_ν‖ + ‖V q_μ‖ ‖r_ν‖ ) / |a_μ − a_ν|.
 */
export function levelCouplings(input: CouplingInput): LevelCouplings {
  const { problem, findings, nodes, residuals } = input;
  const { states, rowError } = input.level;
  const inside = insideParts(input);
  const { orthonormality } = inside;
  const length = Math.sqrt(1 + orthonormality);
  const found = nodesOf(states.map((state) => state.path));
  const worstResidual = (members: readonly number[]): number =>
    members.reduce((most, k) => Math.max(most, input.energyResiduals[k] as number), 0);
  const separating = [...found.values()].filter((entry) => entry.children.size > 1);
  const evidence = separating.map((entry): NodeEvidence => {
    const node = nodes[entry.node] as TreeNode;
    const children = [...entry.children].sort((a, b) => a - b);
    const values = children.map((child) => node.values[child] ?? { re: 0, im: 0 });
    const gap = smallestGap(values);
    const place = problem.candidates.findIndex((candidate: PreparedCandidate) => candidate.name === node.operator);
    const own = node.kind === "label" ? residuals[place] : undefined;
    const residual = own === undefined ? 0 : entry.states.reduce((most, k) => Math.max(most, own[k] as number), 0);
    const commutators = own === undefined ? [] : (findings[place]?.withPerturbations.map((c) => c.bound) ?? []);
    const couplings = problem.perturbations.map(({ name, operator }, p): CouplingBound => {
      const v = operator.norm + operator.error;
      const selectionRule =
        own === undefined || commutators[p] === undefined
          ? Number.POSITIVE_INFINITY
          : roundUp((((commutators[p] as number) * length + 2 * v * residual) * length) / gap, 16);
      const crossing = node.crossings?.[p];
      const direct =
        crossing === undefined
          ? roundUp((inside.largest[p]?.get(entry.node) ?? 0) + (inside.elementError[p] as number))
          : roundUp((crossing + 2 * v * rowError + operator.error) * (1 + input.wholeDefect) * (1 + rowError) ** 2, 16);
      return { perturbation: name, selectionRule, direct, counted: Math.min(selectionRule, direct) };
    });
    const h0 = problem.h0.norm + problem.h0.error;
    const energyRule =
      own === undefined
        ? 0
        : roundUp((((findings[place]?.withH0.bound ?? 0) * length + 2 * h0 * residual) * length) / gap, 16);
    const sharp =
      own === undefined ||
      (energyRule <= input.energyThreshold &&
        couplings.every(({ selectionRule }, p) => selectionRule <= (input.thresholds[p] ?? 0)));
    return {
      node: entry.node,
      operator: node.operator,
      kind: node.kind,
      values,
      gap,
      commutators,
      residual,
      couplings,
      energyCoupling:
        own === undefined ? 0 : Math.min(energyRule, roundUp(worstResidual(entry.states) * (1 + 2 * orthonormality))),
      sharp,
    };
  });
  const worst = [...inside.worst, ...betweenWorst(input, evidence)].sort(bySize).slice(0, WORST_KEPT);
  return {
    nodes: evidence,
    diagonals: inside.diagonals,
    elementError: inside.elementError,
    withinLeaves: inside.withinLeaves,
    orthonormality,
    worst,
    offDiagonal: problem.perturbations.map(({ operator }, p) => {
      // a row's own error moves one element by 2‖V‖ times it, a block of d rows by up to √d times as much
      const rows = 2.02 * (operator.norm + operator.error) * Math.sqrt(states.length) * rowError;
      return roundUp((inside.offDiagonal[p] ?? 0) + betweenParts(evidence, nodes, p, rows));
    }),
    largest: problem.perturbations.map((_, p) =>
      evidence.reduce((most, node) => Math.max(most, node.couplings[p]?.counted ?? 0), inside.withinLeaves[p] ?? 0),
    ),
  };
}

/**
 * The elements between states of different parts that are certainly not zero to the resolution; looked for only where no bound at a
 * node of labels rules them out.
 */
function betweenWorst({ problem, level, thresholds }: CouplingInput, evidence: readonly NodeEvidence[]): PairElement[] {
  const { states, vectors } = level;
  return problem.perturbations.flatMap(({ name, operator }, p): PairElement[] => {
    const threshold = thresholds[p] ?? 0;
    if (evidence.every((node) => node.kind !== "label" || (node.couplings[p]?.counted ?? 0) <= threshold)) return [];
    const error = elementErrorBound(operator, vectors);
    const found: PairElement[] = [];
    forEachProduct(vectors, images(vectors, operator), (first, second, re, im, common) => {
      if (common === 0 || states[first]?.part === states[second]?.part) return;
      const size = modulus(re, im);
      const atLeast = roundDown(size) - error;
      if (atLeast > threshold) {
        found.push({ perturbation: name, first, second, re, im, size, atLeast, atMost: roundUp(size) + error });
      }
    });
    return found.sort(bySize).slice(0, WORST_KEPT);
  });
}

function bySize(a: PairElement, b: PairElement): number {
  return b.size - a.size || a.first - b.first || a.second - b.second;
}

/** Norm of V's elements between parts: nodes of one operator act on disjoint blocks, different operators add. */
function betweenParts(
  evidence: readonly NodeEvidence[],
  nodes: readonly TreeNode[],
  p: number,
  rowErrors: number,
): number {
  const byOperator = new Map<string, number>();
  for (const node of evidence) {
    if (nodes[node.node]?.crossings === undefined) continue;
    const bound = (node.couplings[p]?.direct ?? 0) + rowErrors;
    byOperator.set(node.operator, Math.max(byOperator.get(node.operator) ?? 0, bound));
  }
  let sum = 0;
  for (const bound of byOperator.values()) sum += bound;
  return sum;
}

interface Found {
  readonly node: number;
  readonly children: Set<number>;
  readonly states: number[];
}

/** The nodes that a level's states pass, with the children taken. */
function nodesOf(paths: readonly (readonly PathStep[])[]): Map<number, Found> {
  const found = new Map<number, Found>();
  paths.forEach((path, state) => {
    for (const { node, child } of path) {
      let entry = found.get(node);
      if (entry === undefined) {
        entry = { node, children: new Set(), states: [] };
        found.set(node, entry);
      }
      entry.states.push(state);
      entry.children.add(child);
    }
  });
  return found;
}

/** Elements between states of one part, over all parts. */
interface Inside {
  readonly diagonals: readonly Float64Array[];
  readonly elementError: readonly number[];
  readonly offDiagonal: readonly number[];
  readonly withinLeaves: readonly number[];
  /** For each perturbation: largest element between states that part at a node. */
  readonly largest: readonly ReadonlyMap<number, number>[];
  readonly orthonormality: number;
  readonly worst: readonly PairElement[];
}

function insideParts({ problem, level, thresholds, wholeDefect }: CouplingInput): Inside {
  const { states, vectors, rowError } = level;
  const parts = new Map<number, number[]>();
  states.forEach((state, k) => {
    const list = parts.get(state.part);
    if (list === undefined) parts.set(state.part, [k]);
    else list.push(k);
  });
  const zeros = (): number[] => problem.perturbations.map(() => 0);
  const diagonals = problem.perturbations.map(() => new Float64Array(states.length));
  const largest = problem.perturbations.map(() => new Map<number, number>());
  const elementError = problem.perturbations.map(({ operator }) => elementErrorBound(operator, vectors));
  const offDiagonal = zeros();
  const withinLeaves = zeros();
  const worst: PairElement[] = [];
  let defect = 0;
  for (const members of parts.values()) {
    const own = members.length === states.length ? vectors : selectRows(vectors, members);
    defect = Math.max(defect, gramDefect(own));
    problem.perturbations.forEach(({ name, operator }, p) => {
      const pass: Pass = {
        name,
        members,
        states,
        error: elementError[p] as number,
        diagonal: diagonals[p] as Float64Array,
        largest: largest[p] as Map<number, number>,
        threshold: thresholds[p] ?? 0,
        worst,
      };
      const found = evaluate(operator, own, pass);
      offDiagonal[p] = Math.max(offDiagonal[p] ?? 0, found.offDiagonal);
      withinLeaves[p] = Math.max(withinLeaves[p] ?? 0, found.withinLeaves);
    });
  }
  worst.sort(bySize);
  // overlaps between parts are within the defect of the whole basis and the rounding of these vectors
  const between =
    parts.size < 2 ? 0 : 2 * wholeDefect * (1 + 2 * defect) + 2 * Math.sqrt(states.length) * rowError * 1.01;
  return {
    diagonals,
    elementError,
    offDiagonal,
    withinLeaves,
    largest,
    orthonormality: roundUp(defect + between, 16),
    worst: worst.slice(0, WORST_KEPT),
  };
}

/** One perturbation inside one part: where its elements go. */
interface Pass {
  readonly name: string;
  /** The level's states in this part, in order. */
  readonly members: readonly number[];
  readonly states: readonly LevelState[];
  readonly error: number;
  readonly diagonal: Float64Array;
  readonly largest: Map<number, number>;
  readonly threshold: number;
  readonly worst: PairElement[];
}

function evaluate(operator: Operator, vectors: Csr, pass: Pass): { offDiagonal: number; withinLeaves: number } {
  const { name, members, states, error, diagonal, largest, threshold, worst } = pass;
  // fields of one object: numbers captured by a callback would be made anew with every sum
  const total = { square: 0, terms: 0, withinLeaves: 0 };
  let floor = threshold;
  forEachProduct(vectors, images(vectors, operator), (r, c, re, im, common) => {
    const first = members[r] as number;
    const second = members[c] as number;
    if (r === c) {
      diagonal[first] = re;
      return;
    }
    if (common === 0) return;
    const size = modulus(re, im);
    const atMost = roundUp(size) + error;
    total.square += 2 * atMost ** 2;
    total.terms += 2;
    const node = partingNode(states[first]?.path ?? [], states[second]?.path ?? []);
    if (node === undefined) total.withinLeaves = Math.max(total.withinLeaves, roundUp(atMost));
    else if (size > (largest.get(node) ?? -1)) largest.set(node, size);
    const atLeast = roundDown(size) - error;
    if (atLeast <= floor) return;
    worst.push({ perturbation: name, first, second, re, im, size, atLeast, atMost });
    if (worst.length > 64 * WORST_KEPT) {
      worst.sort((a, b) => b.size - a.size);
      worst.length = WORST_KEPT;
      floor = Math.max(floor, (worst[WORST_KEPT - 1] as PairElement).atLeast);
    }
  });
  return {
    offDiagonal: roundUp(rootOfSquares(total.square, total.terms), members.length * members.length + 8),
    withinLeaves: total.withinLeaves,
  };
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
