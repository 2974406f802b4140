import type { PreparedProblem } from "../audit/problem.js";
import type { Complex } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { maxRowEntries, multiply, selectRows } from "../numerics/sparse.js";
import { stackRows } from "../numerics/stack.js";
import { compositionRowError } from "../refine/descent.js";
import { alignByLadders, DROPPED_PART } from "../refine/ladder.js";
import { fixPhases } from "../refine/phase.js";
import type { ResolvedLevel } from "../refine/resolve.js";
import type { BlockLabel, Sector } from "../refine/sectors.js";
import type { PathStep, TreeNode } from "../refine/tree.js";

/** A state of a level as the tree left it. */
export interface LevelState {
  readonly part: number;
  readonly leaf: number;
  /** Row within the leaf. */
  readonly row: number;
  readonly labels: readonly BlockLabel[];
  /** The steps from the root of the tree to the leaf. */
  readonly path: readonly PathStep[];
  /** Number of states in the leaf. */
  readonly together: number;
}

/** The states of a level, in their final order, with their vectors over the kets. */
export interface LevelStates {
  readonly states: readonly LevelState[];
  /** Row k is state k. */
  readonly vectors: Csr;
  /** Bound on the distance of each vector from the exact combination of the kets that the tree describes. */
  readonly rowError: number;
  /** The part of it that arose inside the level, after the sector's own vectors. */
  readonly leafError: number;
}

/** Fixing a phase costs at most three rounded operations a component, twice. */
const PHASE_ERROR = 12 * UNIT_ROUNDOFF;

/**
 * Lists the states of a level and writes their vectors over the kets, with phases fixed.
 *
 * Order: by label, candidate after candidate as the caller listed them, descending values (ascending angles for complex
 * ones); then by first-order energy, ascending.
 */
export function levelStates(
  problem: PreparedProblem,
  resolved: ResolvedLevel,
  sectors: readonly Sector[],
  nodes: readonly TreeNode[],
): LevelStates {
  const states: LevelState[] = [];
  const stacks: Csr[] = [];
  let rowError = 0;
  let leafError = 0;
  resolved.parts.forEach((part, place) => {
    const sector = sectors[part.sector] as Sector;
    const frame = part.indices.length === sector.frame.rows ? sector.frame : selectRows(sector.frame, part.indices);
    part.leaves.forEach((leaf, index) => {
      const path = pathTo(leaf.from, nodes);
      for (let row = 0; row < leaf.rows.rows; row++) {
        states.push({ part: place, leaf: index, row, labels: leaf.labels, path, together: leaf.rows.rows });
      }
      const kept = isIdentity(leaf.rows);
      stacks.push(kept ? frame : multiply(leaf.rows, frame));
      const entries = maxRowEntries(leaf.rows);
      const composed = kept ? 0 : compositionRowError(entries, frame);
      // a unit row of m entries adds up m of the sector's errors, at most √m times as much
      const carried = kept ? sector.rowError : Math.sqrt(entries) * 1.001 * sector.rowError;
      rowError = Math.max(rowError, carried + composed);
      leafError = Math.max(leafError, composed);
    });
  });
  const order = states.map((_, k) => k).sort((a, b) => compare(problem, nodes, states[a], states[b]) || a - b);
  const stacked = fixPhases(selectRows(stackRows(stacks, problem.n), order));
  const sorted = order.map((k) => states[k] as LevelState);
  const turned = PHASE_ERROR + DROPPED_PART * Math.sqrt(maxRowEntries(stacked));
  return {
    states: sorted,
    vectors: alignByLadders(problem, sorted, stacked),
    rowError: rowError === 0 ? 0 : roundUp(rowError + turned),
    leafError: rowError === 0 ? 0 : roundUp(leafError + turned),
  };
}

/** The steps from the root to a step, root first. */
export function pathTo(step: PathStep, nodes: readonly TreeNode[]): PathStep[] {
  const path: PathStep[] = [];
  for (let at: PathStep | undefined = step; at !== undefined; at = nodes[at.node]?.from) path.push(at);
  return path.reverse();
}

function compare(
  problem: PreparedProblem,
  nodes: readonly TreeNode[],
  a: LevelState | undefined,
  b: LevelState | undefined,
): number {
  if (a === undefined || b === undefined) return 0;
  for (let place = 0; place < problem.candidates.length; place++) {
    const x = a.labels.find((label) => label.candidate === place);
    const y = b.labels.find((label) => label.candidate === place);
    if (x === undefined || y === undefined) {
      if (x !== y) return x === undefined ? 1 : -1;
      continue;
    }
    const difference = rank(x.value) - rank(y.value) || y.value.re - x.value.re;
    if (Math.abs(difference) > 1e-9 * (Math.abs(x.value.re) + Math.abs(y.value.re) + 1e-300)) return difference;
  }
  for (let k = 0; k < Math.min(a.path.length, b.path.length); k++) {
    const p = a.path[k] as PathStep;
    const q = b.path[k] as PathStep;
    if (p.node !== q.node) return p.node - q.node;
    if (p.child === q.child) continue;
    const node = nodes[p.node];
    return (node?.values[p.child]?.re ?? 0) - (node?.values[q.child]?.re ?? 0);
  }
  return 0;
}

/** Complex eigenvalues go by angle in [0, 2π); real ones all have rank 0. */
function rank(value: Complex): number {
  if (value.im === 0) return 0;
  const angle = Math.atan2(value.im, value.re);
  return angle < 0 ? angle + 2 * Math.PI : angle;
}

function isIdentity(rows: Csr): boolean {
  return rows.rows === rows.cols && rows.re.length === rows.rows && rows.re.every((x) => x === 1) && sorted(rows.col);
}

function sorted(col: Int32Array): boolean {
  return col.every((c, k) => c === k);
}
