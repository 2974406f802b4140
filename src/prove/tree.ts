import { GoodBasisError } from "../errors.js";
import type { NodeKind, PathStep } from "../refine/tree.js";
import type { Frame } from "./frame.js";
import type { BlockValue, ProofNode, ProofStatus } from "./proof.js";
import type { Child } from "./refine.js";
import { valueText } from "./value-text.js";

/** A block on the way down. */
export interface ProofBlock {
  readonly frame: Frame;
  readonly labels: readonly RawLabel[];
  /** Steps from the whole space down to the block. */
  readonly path: readonly PathStep[];
}

/** A label that is not named yet. */
export interface RawLabel {
  /** Place of the candidate. */
  readonly candidate: number;
  readonly value: BlockValue;
}

/** What a node says besides its children. */
export interface NodeTitle {
  readonly kind: NodeKind;
  readonly operator: string;
}

/** Collects the nodes of the proof. */
export class ProofTree {
  readonly nodes: ProofNode[] = [];

  /**
   * Refines a block and records the node. A block that the budget does not allow to refine stays whole, and the node
   * says so.
   *
   * @returns each child with its path; undefined where the operator leads out of the block
   */
  refine(
    block: ProofBlock,
    title: NodeTitle,
    split: () => readonly Child[] | undefined,
  ): { child: Child; path: readonly PathStep[] }[] | undefined {
    const { children, stopped } = attempt(split, block.frame);
    if (children === undefined) return undefined;
    if (block.frame.size === 1 && children.length === 1) return children.map((child) => ({ child, path: block.path }));
    const id = this.nodes.length;
    const status = statusOf(title.kind, children);
    this.nodes.push({
      id,
      from: block.path[block.path.length - 1],
      ...title,
      size: block.frame.size,
      children: children.map(({ value, frame }) => ({ value, size: frame.size })),
      status,
      sentence: stopped ?? sentenceOf(title, children, block.frame.size),
    });
    return children.map((child, k) => ({ child, path: [...block.path, { node: id, child: k }] }));
  }
}

function attempt(
  split: () => readonly Child[] | undefined,
  frame: Frame,
): { children: readonly Child[] | undefined; stopped?: string } {
  try {
    return { children: split() };
  } catch (error) {
    if (!(error instanceof GoodBasisError) || error.code !== "budget") throw error;
    const stopped = `not proved within the budget: ${error.message}`;
    return { children: [{ value: { kind: "unknown" }, frame }], stopped };
  }
}

function statusOf(kind: NodeKind, children: readonly Child[]): ProofStatus {
  if (children.every(({ value }) => value.kind === "value")) return "exact";
  return kind === "label" && children.every(({ value }) => value.kind !== "unknown") ? "separated" : "bounded";
}

function sentenceOf({ kind, operator }: NodeTitle, children: readonly Child[], size: number): string {
  const exact = children.flatMap(({ value }) => (value.kind === "value" ? [value] : []));
  const list = exact.map(valueText).join(", ");
  const all = size === 1 ? "the one dimension" : `all ${size} dimensions`;
  if (exact.length === children.length) {
    const what = exact.length === 1 ? `is the number ${list}` : `has the eigenvalues ${list}`;
    return `${operator} ${what} in this block, proved by exact eigenspaces that fill ${all}`;
  }
  if (kind === "second order") {
    return `the second-order operator has eigenvalues on ${all} that leave the field; its states are left together`;
  }
  const rest = children.filter(({ value }) => value.kind !== "value");
  const dimension = rest.reduce((sum, { frame }) => sum + frame.size, 0);
  const known = exact.length === 0 ? "" : `${operator} has the exact eigenvalues ${list} in this block; `;
  const unknown = rest.some(({ value }) => value.kind === "unknown");
  const why = unknown
    ? "the budget ended before their eigenvalues were found"
    : `their eigenvalues leave the field: ${rest.map(({ value }) => valueText(value)).join("; ")}`;
  const left = `${dimension} of ${size} dimensions are left`;
  const then =
    kind === "label"
      ? `exact commutation keeps states with different eigenvalues of ${operator} apart, without vectors for each`
      : "they are proved to be apart from the rest, and left to rigorous bounds inside";
  return `${known}${left}, ${why}; ${then}`;
}
