import type { Surd } from "../exact/surd.js";
import type { PathStep } from "../refine/tree.js";
import type { BlockValue, ExactProof, ProofNode, ProvedLabel, ProvedShift } from "./proof.js";
import type { Faults } from "./verify-faults.js";

/** What stands at the end of a path. */
interface End {
  readonly place: string;
  readonly path: readonly PathStep[];
  readonly labels: readonly ProvedLabel[];
  readonly energy: BlockValue;
  readonly shifts: readonly ProvedShift[];
  /** E2 where a single perturbation has one. */
  readonly second: Surd | undefined;
  readonly sector: number;
  readonly size: number;
}

/**
 * Checks the list of nodes against the leaves, whose values are checked by themselves: sizes add up, every node sits
 * where its block comes from, and a child's value is what the leaves below it carry.
 */
export function verifyTree(proof: ExactProof, faults: Faults): void {
  const ends: End[] = [
    ...proof.leaves.map((leaf, k) => ({
      ...leaf,
      place: `leaf ${k}`,
      second: leaf.second?.[0]?.[0],
      size: leaf.vectors.length,
    })),
    ...proof.background.map((block, k) => ({
      ...block,
      place: `background ${k}`,
      shifts: [],
      second: undefined,
      size: block.vectors.length,
    })),
  ];
  const counted = proof.nodes.map(({ children }) => children.map(() => 0));
  for (const end of ends) {
    for (const [k, { node, child }] of end.path.entries()) {
      const own = proof.nodes[node];
      const value = own?.children[child]?.value;
      if (own === undefined || value === undefined) {
        faults.unless(false, end.place, `node ${node} has no child ${child}`);
        continue;
      }
      (counted[node] as number[])[child] = (counted[node]?.[child] ?? 0) + end.size;
      const before = end.path[k - 1];
      const linked = own.from?.node === before?.node && own.from?.child === before?.child;
      faults.unless(linked, `node ${node}`, "is not where its block comes from");
      faults.unless(carries(end, own, value), end.place, `does not carry the value of node ${node}`);
    }
  }
  for (const [k, { id, size, children, status }] of proof.nodes.entries()) {
    const sum = children.reduce((total, child) => total + child.size, 0);
    const right = id === k && sum === size && children.every((child, c) => child.size === counted[k]?.[c]);
    faults.unless(right, `node ${k}`, "its sizes do not add up");
    const exact = children.every(({ value }) => value.kind === "value");
    faults.unless((status === "exact") === exact, `node ${k}`, `is not ${status}`);
  }
  verifySectors(proof.nodes, ends, faults);
  const statuses = proof.nodes.map(({ status }) => status);
  const weakest = statuses.includes("bounded") ? "bounded" : statuses.includes("separated") ? "separated" : "exact";
  faults.unless(proof.status === weakest, "status", `is ${weakest} by the nodes, not ${proof.status}`);
}

/** Blocks are of one sector where their paths agree down to the first node by H0. */
function verifySectors(nodes: readonly ProofNode[], ends: readonly End[], faults: Faults): void {
  const sectorOf = new Map<string, number>();
  const pathOf = new Map<number, string>();
  for (const { path, sector, place } of ends) {
    const to = path.findIndex(({ node }) => nodes[node]?.kind === "energy");
    const steps = to < 0 ? path : path.slice(0, to);
    const key = steps.map(({ node, child }) => `${node}.${child}`).join(" ");
    const known = (sectorOf.get(key) ?? sector) === sector && (pathOf.get(sector) ?? key) === key;
    faults.unless(known, place, `does not belong to sector ${sector}`);
    sectorOf.set(key, sector);
    pathOf.set(sector, key);
  }
}

/** Whether the end of a path states what a node above it says. */
function carries(end: End, { kind, operator }: ProofNode, value: BlockValue): boolean {
  switch (kind) {
    case "label": {
      const label = end.labels.find(({ candidate }) => candidate === operator);
      return label !== undefined && sameValue(label.value, value);
    }
    case "energy":
      // polynomials may fall apart further down
      return value.kind === "value" ? sameValue(end.energy, value) : true;
    case "perturbation": {
      const shift = end.shifts.find(({ perturbation }) => perturbation === operator);
      return shift !== undefined && sameValue(shift.value, value);
    }
    case "second order":
      return value.kind !== "value" || end.second === undefined || end.second.equals(value.value);
    default:
      return kind satisfies never;
  }
}

function sameValue(a: BlockValue, b: BlockValue): boolean {
  if (a.kind === "value") return b.kind === "value" && a.value.equals(b.value);
  if (a.kind === "unknown" || b.kind !== "roots") return a.kind === b.kind;
  const [p, q] = [a.roots.polynomial, b.roots.polynomial];
  return a.part === b.part && p.length === q.length && p.every((c, k) => c.equals(q[k] ?? 0));
}
