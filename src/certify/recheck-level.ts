import { roundUp } from "../numerics/rounding.js";
import type { CertifiedLevel } from "./certificate-format.js";
import { type OwnOperator, type OwnProblem, productRounding } from "./recheck-operators.js";
import { type OwnTree, partingPlace } from "./recheck-tree.js";
import { type Bench, modulusOf, type Vectors } from "./recheck-vectors.js";

/** A bound from the own evaluation, and the largest that an honest one could give. */
export interface Pair {
  readonly tight: number;
  readonly loose: number;
}

/** Bounds on the 2-norm of a matrix of evaluated elements. */
export interface OwnNorm extends Pair {
  /** What every honest bound reaches: the norm of one row, or of all elements inside one group of equal labels, with their errors. */
  readonly least: number;
  /** The part of `least` that is no rounding. */
  readonly certain: number;
}

/** One operator between all states of a level. */
export interface OwnElements {
  readonly diagonal: Float64Array;
  /** Bounds on the 2-norm of what is off the diagonal. */
  readonly offDiagonal: OwnNorm;
  /** A lower bound on the Frobenius norm of what is off the diagonal. */
  readonly offFrobenius: number;
  /** Largest modulus off the diagonal. */
  readonly largestOff: number;
  /** For each node: largest modulus between states that part there; −1 where no two share a ket. */
  readonly atNode: Float64Array;
  /** For each node: the same with the error of each element. */
  readonly atNodeBound: Float64Array;
  /** For each node: the part of that which is no rounding. */
  readonly atNodeCertain: Float64Array;
  /** Largest modulus inside leaves of several states, with its error; 0 where no two share a ket. */
  readonly withinLeaves: number;
  /** The part of `withinLeaves` that is no rounding. */
  readonly withinLeavesCertain: number;
  /** Error of one element: rounding of the image and the product, and the entries' own. */
  readonly error: number;
  readonly looseError: number;
  /** The largest rigorous lower bound on an element, and its states; 0 where there is none. */
  readonly worst: { readonly atLeast: number; readonly first: number; readonly second: number };
}

/** What the re-check evaluates of one level. */
export interface OwnLevel {
  readonly tree: OwnTree;
  /** Bound on ‖Q Q† − 1‖₂. */
  readonly orthonormality: OwnNorm;
  /** A lower bound on it. */
  readonly orthonormalityAtLeast: number;
  readonly h0: OwnElements;
  /** Bounds on ‖H0 q − E q‖ of each state. */
  readonly residuals: Float64Array;
  readonly looseResiduals: Float64Array;
  /** The part of `residuals` that is no rounding. */
  readonly certainResiduals: Float64Array;
  readonly perturbations: readonly OwnElements[];
}

/** Evaluates overlaps, H0 and every perturbation between the states of level `l`. */
export function evaluateLevel(
  problem: OwnProblem,
  vectors: Vectors,
  bench: Bench,
  level: CertifiedLevel,
  l: number,
  tree: OwnTree,
): OwnLevel {
  const shape = levelShape(vectors, l);
  const { n } = problem;
  const gram = evaluateGram(vectors, bench, shape, tree, n);
  const nodes = level.nodes.length;
  const h0 = evaluateElements(problem.h0, vectors, bench, shape, tree, nodes);
  const d = shape.to - shape.from;
  const residuals = new Float64Array(d);
  const looseResiduals = new Float64Array(d);
  const certainResiduals = new Float64Array(d);
  let computed = 0;
  for (let k = 0; k < d; k++) {
    bench.image(problem.h0.columns, shape.from + k);
    const rho = bench.residual(shape.from + k, level.states[k]?.energy ?? 0, 0);
    const { rounding, looseRounding, operator } = problem.h0;
    residuals[k] = roundUp(rho + rounding + operator.error, n + 16);
    certainResiduals[k] = Math.max(0, rho - rounding) + operator.error;
    computed += rho * rho;
    // a state may be put together from d vectors whose errors add, and rounds once more in that
    const each = looseRounding + operator.error;
    looseResiduals[k] = roundUp(Math.sqrt(d) * each + 2 * operator.norm * Math.sqrt(n) * productRounding(n), n + 16);
  }
  // of those vectors it is told the residuals of all together
  for (let k = 0; k < d; k++) looseResiduals[k] = roundUp((looseResiduals[k] as number) + Math.sqrt(computed), d + 16);
  return {
    tree,
    ...gram,
    h0,
    residuals,
    looseResiduals,
    certainResiduals,
    perturbations: problem.perturbations.map((v) => evaluateElements(v, vectors, bench, shape, tree, nodes)),
  };
}

/** Where a level's vectors lie and how they overlap. */
interface Shape {
  readonly from: number;
  readonly to: number;
  /** Most entries of one vector. */
  readonly longest: number;
  /** Upper bound on ‖|Q|‖₂ for the matrix of moduli. */
  readonly moduli: number;
}

function levelShape(vectors: Vectors, l: number): Shape {
  const from = vectors.first[l] as number;
  const to = vectors.first[l + 1] as number;
  const { ptr, ket, re, im } = vectors;
  const byKet = new Map<number, number>();
  let longest = 0;
  let row = 0;
  for (let s = from; s < to; s++) {
    longest = Math.max(longest, (ptr[s + 1] as number) - (ptr[s] as number));
    let sum = 0;
    for (let p = ptr[s] as number; p < (ptr[s + 1] as number); p++) {
      const size = modulusOf(re[p] as number, im[p] as number);
      sum += size;
      byKet.set(ket[p] as number, (byKet.get(ket[p] as number) ?? 0) + size);
    }
    row = Math.max(row, sum);
  }
  let column = 0;
  for (const sum of byKet.values()) column = Math.max(column, sum);
  return { from, to, longest, moduli: roundUp(Math.sqrt(row * column), longest + to - from + 16) };
}

function evaluateGram(
  vectors: Vectors,
  bench: Bench,
  { from, to, longest, moduli }: Shape,
  tree: OwnTree,
  n: number,
): { orthonormality: OwnNorm; orthonormalityAtLeast: number } {
  const rows = new Float64Array(to - from);
  const parts = new Parts(to - from, tree);
  const relative = productRounding(longest);
  let bare = 0;
  let padded = 0;
  let atLeast = 0;
  let touched = 0;
  for (let r = from; r < to; r++) {
    bench.take(r);
    bench.project(from, r + 1, true);
    for (let t = 0; t < bench.met; t++) {
      const c = bench.partners[t] as number;
      const size = modulusOf((bench.re[c] as number) - (c === r ? 1 : 0), bench.im[c] as number);
      const exact = vectors.unit[r] === 1 && vectors.unit[c] === 1;
      const error = exact ? 0 : relative * 1.01;
      if (size + error === 0) continue;
      touched++;
      const weight = c === r ? 1 : 2;
      bare += weight * size * size;
      padded += weight * (size + error) ** 2;
      atLeast = Math.max(atLeast, size - error);
      parts.add(r - from, c - from, size, error, 0);
      addTo(rows, r - from, size);
      if (c !== r) addTo(rows, c - from, size);
    }
  }
  const row = largest(rows);
  const entrywise = Math.sqrt(padded);
  const normwise = Math.min(row, Math.sqrt(bare)) + relative * moduli * moduli;
  const tight = touched === 0 ? 0 : roundUp(Math.min(entrywise, normwise), 2 * touched + 16);
  return {
    orthonormality: {
      ...parts.norms(tight),
      tight,
      loose: entrywise + n * productRounding(2 * n),
    },
    orthonormalityAtLeast: atLeast,
  };
}

function evaluateElements(
  v: OwnOperator,
  vectors: Vectors,
  bench: Bench,
  { from, to, longest, moduli }: Shape,
  tree: OwnTree,
  nodes: number,
): OwnElements {
  const d = to - from;
  const { norm, error: entries } = v.operator;
  const relative = productRounding(longest) * norm;
  const error = roundUp((v.rounding + relative) * 1.001 + entries, 16);
  const diagonal = new Float64Array(d);
  const rows = new Float64Array(d);
  const parts = new Parts(d, tree);
  const atNode = new Float64Array(nodes).fill(-1);
  const atNodeBound = new Float64Array(nodes);
  const atNodeCertain = new Float64Array(nodes);
  let bare = 0;
  let padded = 0;
  let withinLeaves = 0;
  let withinLeavesCertain = 0;
  let touched = 0;
  let largestOff = 0;
  let worst = { atLeast: 0, first: -1, second: -1 };
  for (let r = from; r < to; r++) {
    bench.image(v.columns, r);
    bench.project(from, r + 1, v.columns.im === undefined);
    for (let t = 0; t < bench.met; t++) {
      const c = bench.partners[t] as number;
      const x = bench.re[c] as number;
      if (c === r) {
        diagonal[r - from] = x;
        continue;
      }
      touched++;
      const size = modulusOf(x, bench.im[c] as number);
      const rounding = (vectors.unit[r] === 1 ? 0 : v.rounding) + (vectors.unit[c] === 1 ? 0 : relative);
      const own = size + rounding * 1.001 + entries;
      bare += 2 * size * size;
      padded += 2 * own * own;
      const certain = Math.max(0, size - rounding * 1.001) + entries;
      parts.add(r - from, c - from, size, rounding * 1.001, entries);
      addTo(rows, r - from, size);
      addTo(rows, c - from, size);
      if (size > largestOff) largestOff = size;
      const node = partingPlace(tree, c - from, r - from);
      if (node < 0) {
        withinLeaves = Math.max(withinLeaves, size + error);
        withinLeavesCertain = Math.max(withinLeavesCertain, certain);
      } else {
        if (certain > (atNodeCertain[node] as number)) atNodeCertain[node] = certain;
        if (size > (atNode[node] as number)) atNode[node] = size;
        if (own > (atNodeBound[node] as number)) atNodeBound[node] = own;
      }
      const atLeast = size * (1 - 1e-12) - error;
      if (atLeast > worst.atLeast) worst = { atLeast, first: c - from, second: r - from };
    }
  }
  const row = largest(rows);
  const normwise =
    Math.min(row, Math.sqrt(bare)) + (v.rounding * moduli + relative * moduli * moduli) * 1.001 + entries;
  const entrywise = Math.sqrt(padded);
  const most = entrywise + vectors.n * productRounding(2 * vectors.n) * norm;
  const tight = touched === 0 ? 0 : roundUp(Math.min(entrywise, normwise), 2 * touched + 16);
  return {
    diagonal,
    offDiagonal: {
      ...parts.norms(tight),
      tight,
      loose: most + entries * (nodes + 1),
    },
    offFrobenius: Math.max(0, Math.sqrt(bare) * (1 - 1e-9) - error * Math.sqrt(2 * touched)),
    largestOff,
    atNode,
    atNodeBound,
    atNodeCertain,
    withinLeaves: roundUp(withinLeaves),
    withinLeavesCertain,
    error,
    looseError: error + v.looseRounding + productRounding(vectors.n) * norm,
    worst,
  };
}

/** Sums of squares that no bound on the norm of a Hermitian matrix of elements falls below: by rows, and by groups of equal labels. */
class Parts {
  readonly #group: readonly number[];
  readonly #rows: Float64Array;
  readonly #rowsCertain: Float64Array;
  readonly #groups: Float64Array;
  readonly #groupsCertain: Float64Array;
  #rounding = 0;
  #entries = 0;

  constructor(size: number, { labelGroup, labelGroups }: OwnTree) {
    this.#group = labelGroup;
    this.#rows = new Float64Array(size);
    this.#rowsCertain = new Float64Array(size);
    this.#groups = new Float64Array(labelGroups);
    this.#groupsCertain = new Float64Array(labelGroups);
  }

  /** Adds the elements (a, b) and (b, a), with what rounding and the entries' own uncertainty may add to each. */
  add(a: number, b: number, size: number, rounding: number, entries: number): void {
    const sure = Math.max(0, size - rounding);
    this.#rounding = Math.max(this.#rounding, rounding);
    this.#entries = Math.max(this.#entries, entries);
    this.#rows[a] = (this.#rows[a] as number) + size * size;
    this.#rowsCertain[a] = (this.#rowsCertain[a] as number) + sure * sure;
    if (a !== b) {
      this.#rows[b] = (this.#rows[b] as number) + size * size;
      this.#rowsCertain[b] = (this.#rowsCertain[b] as number) + sure * sure;
    }
    const group = this.#group[a] as number;
    if (group !== this.#group[b]) return;
    const weight = a === b ? 1 : 2;
    this.#groups[group] = (this.#groups[group] as number) + weight * (size + rounding + entries) ** 2;
    this.#groupsCertain[group] = (this.#groupsCertain[group] as number) + weight * (sure + entries) ** 2;
  }

  /** @param tight - a bound on the norm, which needs no more */
  norms(tight: number): { least: number; certain: number } {
    const row = Math.sqrt(largest(this.#rows)) + this.#rounding + this.#entries;
    const rowCertain = Math.sqrt(largest(this.#rowsCertain)) + this.#entries;
    return {
      least: Math.min(tight, Math.max(row, Math.sqrt(largest(this.#groups)))),
      certain: Math.min(tight, Math.max(rowCertain, Math.sqrt(largest(this.#groupsCertain)))),
    };
  }
}

/** Adds an element to the sum of its row. */
function addTo(rows: Float64Array, row: number, size: number): void {
  rows[row] = (rows[row] as number) + size;
}

function largest(values: Float64Array): number {
  return values.reduce((most, x) => Math.max(most, x), 0);
}
