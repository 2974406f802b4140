import type { CertifiedLevel } from "./certificate-format.js";
import type { Ledger } from "./recheck-report.js";

/** How the nodes of a level take its states apart. */
export interface OwnTree {
  /** For each state: the nodes above it, outermost first, as pairs (place in `level.nodes`, child). */
  readonly paths: readonly (readonly number[])[];
  /** For each state: number of states in its leaf, itself included. */
  readonly together: readonly number[];
  /** For each state: which group of equal labels it belongs to. */
  readonly labelGroup: readonly number[];
  /** Number of groups of equal labels. */
  readonly labelGroups: number;
}

/**
 * Rebuilds the refinement of one level from its nodes: each must take exactly one of the groups apart that the larger ones left.
 * States that no node tells apart stay in one leaf.
 */
export function rebuildTree(ledger: Ledger, path: string, level: CertifiedLevel): OwnTree {
  const size = level.states.length;
  const paths: number[][] = level.states.map(() => []);
  const group = new Int32Array(size);
  const labelGroup = new Int32Array(size);
  const members = new Map<number, number>([[0, size]]);
  let groups = 1;
  let labelGroups = 1;
  const order = level.nodes.map((_, k) => k).sort((a, b) => reach(level, b) - reach(level, a) || a - b);
  const ids = new Set<number>();
  for (const place of order) {
    const node = level.nodes[place];
    if (node === undefined) continue;
    const where = `${path}.nodes[${place}]`;
    ledger.claim(!ids.has(node.id), `${where}.id`, () => `node number ${node.id} occurs twice`);
    ids.add(node.id);
    const all = node.states.flat();
    const first = all[0];
    const whole =
      node.states.length >= 2 &&
      node.states.every((list) => list.length > 0) &&
      all.every((state) => state < size) &&
      new Set(all).size === all.length &&
      first !== undefined &&
      all.every((state) => group[state] === group[first]) &&
      members.get(group[first] as number) === all.length;
    const good = ledger.claim(
      whole && node.states.length === node.values.length,
      `${where}.states`,
      () =>
        `the states below its values do not take one block apart: ${node.states.length} lists of ${all.length} states for ` +
        `${node.values.length} values`,
    );
    if (!good) continue;
    node.states.forEach((list, child) => {
      const next = child === 0 ? (group[list[0] as number] as number) : groups++;
      members.set(next, list.length);
      const nextLabel = node.kind !== "label" || child === 0 ? undefined : labelGroups++;
      for (const state of list) {
        group[state] = next;
        if (nextLabel !== undefined) labelGroup[state] = nextLabel;
        paths[state]?.push(place, child);
      }
    });
  }
  return {
    paths,
    together: Array.from(group, (g) => members.get(g) ?? 1),
    labelGroup: Array.from(labelGroup),
    labelGroups,
  };
}

function reach(level: CertifiedLevel, place: number): number {
  return level.nodes[place]?.states.reduce((sum, list) => sum + list.length, 0) ?? 0;
}

/** The place of the node at which two states part; −1 for two states of one leaf. */
export function partingPlace({ paths }: OwnTree, a: number, b: number): number {
  const p = paths[a] as readonly number[];
  const q = paths[b] as readonly number[];
  const length = Math.min(p.length, q.length);
  for (let k = 0; k < length; k += 2) {
    if (p[k] !== q[k]) return -1;
    if (p[k + 1] !== q[k + 1]) return p[k] as number;
  }
  return -1;
}
