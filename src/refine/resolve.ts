import type { PreparedProblem } from "../audit/problem.js";
import { LABEL_WIDTH, NOISE } from "../audit/resolution.js";
import type { Csr } from "../numerics/csr.js";
import { diagonalCsr, findEntry, selectRows, submatrix } from "../numerics/sparse.js";
import { splitIntoEigenspaces } from "./eigenspaces.js";
import { invariance } from "./invariance.js";
import type { Level, LevelPart, Levels } from "./levels.js";
import { composed, isIdentity } from "./rotate.js";
import { type SecondOrder, secondOrder } from "./second-order.js";
import { type BlockLabel, energyTolerance, inSpace, type Sector } from "./sectors.js";
import type { NodeKind, PathStep, TreeBuilder } from "./tree.js";

/**
 * How far the states of a level are told apart: by labels only; by V as well; by the second-order operator as well; or as
 * far as the library goes (today the second order).
 */
export type Depth = "labels" | "first order" | "second order" | "full";

/** A leaf of the tree: states that nothing studied tells apart; usually one. */
export interface Leaf {
  /** Orthonormal vectors as rows over the vectors of the part. */
  readonly rows: Csr;
  readonly from: PathStep;
  /** Labels of the sector and those found inside the level. */
  readonly labels: readonly BlockLabel[];
  /** The eigenvalue of the second-order operator, where it was studied. */
  readonly second: number | undefined;
}

/** One sector's share of a level, refined. */
export interface ResolvedPart extends LevelPart {
  readonly leaves: readonly Leaf[];
  /** For each perturbation: what reaches out of the level. */
  readonly outward: readonly SecondOrder[];
}

/** A level refined as deep as asked. */
export interface ResolvedLevel {
  readonly level: Level;
  readonly parts: readonly ResolvedPart[];
}

interface Block {
  readonly rows: Csr;
  readonly indices: Int32Array | undefined;
  readonly from: PathStep;
  readonly labels: readonly BlockLabel[];
  readonly second: number | undefined;
}

const ONE_VECTOR = diagonalCsr([1]);

/**
 * Refines one level: in every sector by the remaining conserved candidates that map the block into itself, then by each
 * perturbation in turn, then (for a single perturbation) by the second-order operator inside what is still together.
 *
 * @param others - places of the conserved candidates outside the backbone
 */
export function resolveLevel(
  problem: PreparedProblem,
  sectors: readonly Sector[],
  levels: Levels,
  level: Level,
  others: readonly number[],
  depth: Depth,
  tree: TreeBuilder,
): ResolvedLevel {
  const parts = level.parts.map((part): ResolvedPart => {
    const sector = sectors[part.sector] as Sector;
    const outward = sector.perturbations.map((v) =>
      secondOrder(
        sector.energies,
        v,
        part.indices,
        levels.of[part.sector] as Int32Array,
        level.place,
        level.energy,
        levels.energies,
      ),
    );
    return { ...part, outward, leaves: refinePart(problem, sector, part, outward, others, depth, tree) };
  });
  return { level, parts };
}

function refinePart(
  problem: PreparedProblem,
  sector: Sector,
  part: LevelPart,
  outward: readonly SecondOrder[],
  others: readonly number[],
  depth: Depth,
  tree: TreeBuilder,
): Leaf[] {
  const size = part.indices.length;
  const identity = size === 1 ? ONE_VECTOR : diagonalCsr(new Float64Array(size).fill(1));
  const first = part.indices[0] as number;
  let blocks: Block[] = [
    {
      rows: identity,
      indices: identity.col,
      from: { node: sector.energyNode, child: sector.energyChild[first] as number },
      labels: sector.labels,
      second: undefined,
    },
  ];
  const frame = size > 1 && others.length > 0 ? selectRows(sector.frame, part.indices) : undefined;
  if (frame !== undefined) blocks = refineByOthers(problem, frame, blocks, others, tree);
  if (depth === "labels") return blocks;
  sector.perturbations.forEach((v, k) => {
    const { name, operator } = problem.perturbations[k] as (typeof problem.perturbations)[number];
    const inside = within(v, part.indices);
    const by = {
      kind: "perturbation",
      name,
      noise: NOISE * operator.norm,
      cluster: LABEL_WIDTH * operator.norm,
    } as const;
    blocks = blocks.flatMap((block) => refineBlock(block, inside, by, tree));
  });
  const only = outward[0];
  if (depth === "first order" || outward.length !== 1 || only === undefined) return blocks;
  const norm = problem.perturbations[0]?.operator.norm ?? 0;
  const by = {
    kind: "second order",
    name: "W",
    noise: NOISE * only.scale,
    // below what H0's and V's own rounding leaves of a splitting, W tells nothing apart
    cluster: Math.max(LABEL_WIDTH * only.scale, energyTolerance(problem, size) + NOISE * 8 * norm),
  } as const;
  return blocks.flatMap((block) => {
    if (block.rows.rows > 1) return refineBlock(block, only.w, by, tree);
    return [block];
  });
}

/** The submatrix on the vectors of a part. */
function within(v: Csr, indices: Int32Array): Csr {
  if (indices.length === v.rows) return v;
  const [only] = indices;
  if (indices.length > 1 || only === undefined) return submatrix(v, indices);
  const p = findEntry(v, only, only);
  return diagonalCsr(
    [p < 0 ? 0 : (v.re[p] as number)],
    v.im === undefined ? undefined : [p < 0 ? 0 : (v.im[p] as number)],
  );
}

function refineByOthers(
  problem: PreparedProblem,
  frame: Csr,
  blocks: Block[],
  others: readonly number[],
  tree: TreeBuilder,
): Block[] {
  return blocks.flatMap((block) => {
    if (block.rows.rows === 1) return [block];
    const vectors = composed(block.rows, frame);
    for (const place of others) {
      if (block.labels.some((label) => label.candidate === place)) continue;
      const candidate = problem.candidates[place] as (typeof problem.candidates)[number];
      const local = invariance(vectors, candidate.operator);
      if (!local.invariant) continue;
      const norm = candidate.operator.norm;
      const by = {
        kind: "label",
        name: candidate.name,
        noise: NOISE * norm,
        cluster: LABEL_WIDTH * norm,
        hermitian: candidate.kind === "hermitian",
        candidate: place,
      } as const;
      return refineByOthers(problem, frame, refineBlock(block, local.matrix, by, tree, true), others, tree);
    }
    return [block];
  });
}

interface RefineBy {
  readonly kind: NodeKind;
  readonly name: string;
  readonly noise: number;
  readonly cluster: number;
  readonly hermitian?: boolean;
  readonly candidate?: number;
}

/** Splits a block by an operator given over the part's vectors (or, if `restricted`, over the block's own). */
function refineBlock(block: Block, operator: Csr, by: RefineBy, tree: TreeBuilder, restricted = false): Block[] {
  const matrix = restricted || isIdentity(block.rows) ? operator : inSpace(block, operator);
  const split = splitIntoEigenspaces(matrix, {
    hermitian: by.hermitian ?? true,
    noise: by.noise,
    cluster: by.cluster,
  });
  const node = tree.add({
    from: block.from,
    kind: by.kind,
    operator: by.name,
    size: block.rows.rows,
    values: split.spaces.map((space) => space.value),
    spreads: split.spaces.map((space) => space.spread),
    sizes: split.spaces.map((space) => space.size),
  });
  const whole = split.spaces.length === 1;
  const same = isIdentity(split.rows);
  return split.spaces.map((space, child): Block => {
    const chosen = space.indices;
    // Vectors of a block that stays whole are kept: where V is scalar there, any basis serves.
    const keep = whole && (same || by.kind !== "perturbation");
    return {
      rows: keep
        ? block.rows
        : chosen === undefined
          ? composed(space.rows, block.rows)
          : selectRows(block.rows, chosen),
      indices: keep
        ? block.indices
        : chosen === undefined || block.indices === undefined
          ? undefined
          : chosen.map((index) => (block.indices as Int32Array)[index] as number),
      from: { node, child },
      labels:
        by.candidate === undefined ? block.labels : [...block.labels, { candidate: by.candidate, value: space.value }],
      second: by.kind === "second order" ? space.value.re : block.second,
    };
  });
}
