import type { Complex } from "../numerics/complex.js";

/**
 * What a node of the refinement tree refines by.
 *
 * | kind | operator | what its evidence is |
 * |---|---|---|
 * | `label` | a conserved candidate | the selection rule: its commutator with V |
 * | `energy` | H0 | none for couplings: it separates levels |
 * | `perturbation` | V inside a level and sector | the residual of diagonalising PVP |
 * | `second order` | the second-order effective operator | none for couplings: V is scalar there |
 */
export type NodeKind = "label" | "energy" | "perturbation" | "second order";

/** A node of the refinement tree: one block, taken apart by one operator. */
export interface TreeNode {
  /** Number of the node, its place in the tree's list. */
  readonly id: number;
  /** The node and child that this block came from; undefined for the whole space. */
  readonly from: PathStep | undefined;
  /** What kind of refinement it is. */
  readonly kind: NodeKind;
  /** Name of the operator. */
  readonly operator: string;
  /** Dimension of the block. */
  readonly size: number;
  /** Eigenvalue of each child, in the order of the children. */
  readonly values: readonly Complex[];
  /** Largest distance of a computed eigenvalue in a child from the child's value. */
  readonly spreads: readonly number[];
  /** Dimension of each child. */
  readonly sizes: readonly number[];
  /**
   * For each perturbation, a rigorous bound on the 2-norm of its elements between different children, evaluated directly on
   * the children's vectors; undefined where that is left to whoever evaluates single elements.
   */
  readonly crossings?: readonly number[];
}

/** A step from a node to one of its children. */
export interface PathStep {
  /** Number of the node. */
  readonly node: number;
  /** Which child. */
  readonly child: number;
}

/** Collects nodes in the order in which they are made. */
export class TreeBuilder {
  readonly nodes: TreeNode[] = [];

  /** Adds a node and returns its number. */
  add(node: Omit<TreeNode, "id">): number {
    const id = this.nodes.length;
    this.nodes.push({ id, ...node });
    return id;
  }
}
