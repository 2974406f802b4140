import type { ExactOperator } from "../exact/operator.js";
import { fromRoots, type Polynomial } from "../exact/polynomial.js";
import { Surd } from "../exact/surd.js";
import type { ProofBudget } from "./budget.js";
import type { EnergyBlock, ExactSector } from "./descent.js";
import { Frame } from "./frame.js";
import type { LevelRoot } from "./proof.js";
import { within } from "./refine.js";
import { groupPieces } from "./root-pieces.js";
import { comparePoints, coprimePolynomials, type RealPoint, samePolynomial } from "./roots.js";
import type { ProofTree } from "./tree.js";
import { ValueGroups } from "./value-groups.js";

/** Where a block stands: its sector and its place there. */
export interface BlockPlace {
  readonly sector: number;
  readonly block: number;
}

/** A level before its states are resolved. */
export interface LevelDraft {
  readonly energy: { readonly kind: "value"; readonly value: Surd } | ({ readonly kind: "root" } & LevelRoot);
  /** The blocks with states in it, and how many of their states. */
  readonly blocks: readonly (BlockPlace & { readonly size: number })[];
}

/** All levels, and the sectors once energies of different sectors have been compared. */
export interface LevelDrafts {
  /** By ascending energy. */
  readonly levels: readonly LevelDraft[];
  readonly sectors: readonly ExactSector[];
  /** Blocks whose energies are unknown. */
  readonly unknown: readonly BlockPlace[];
}

/**
 * Puts the energies of all sectors together, exactly: numbers of the field are equal or not, and others are roots of
 * polynomials that are made coprime, so that two energies are equal only where they are the same root of the same one.
 */
export function formLevels(
  h0: ExactOperator,
  given: readonly ExactSector[],
  tree: ProofTree,
  budget: ProofBudget,
): LevelDrafts {
  const sectors = partCommonRoots(h0, given, tree, budget);
  const exact = new ValueGroups<BlockPlace & { size: number }>();
  const roots: { polynomial: Polynomial; drafts: (BlockPlace & { size: number })[][]; levels: LevelRoot[] }[] = [];
  const unknown: BlockPlace[] = [];
  for (const [sector, { blocks }] of sectors.entries()) {
    for (const [block, { energy, frame }] of blocks.entries()) {
      const place = { sector, block };
      if (energy.kind === "unknown") unknown.push(place);
      else if (energy.kind === "value") exact.add(energy.value, { ...place, size: frame.size });
      else {
        const { polynomial, multiplicity, intervals } = energy.roots;
        let group = roots.find((other) => samePolynomial(other.polynomial, polynomial));
        if (group === undefined) {
          const levels = intervals.map((_, k): LevelRoot => ({ roots: energy.roots, place: k }));
          group = { polynomial, drafts: intervals.map(() => []), levels };
          roots.push(group);
        }
        for (const draft of group.drafts) draft.push({ ...place, size: multiplicity });
      }
    }
  }
  const levels = [
    ...exact.list.map(({ value, items }): LevelDraft => ({ energy: { kind: "value", value }, blocks: items })),
    ...roots.flatMap(({ drafts, levels: list }) =>
      list.map((root, k): LevelDraft => ({ energy: { kind: "root", ...root }, blocks: drafts[k] ?? [] })),
    ),
  ].sort((a, b) => comparePoints(pointOf(a), pointOf(b)));
  return { levels, sectors, unknown };
}

function pointOf({ energy }: LevelDraft): RealPoint {
  if (energy.kind === "value") return energy;
  const bounds = energy.roots.intervals[energy.place] ?? { low: Surd.zero, high: Surd.zero };
  return { kind: "root", polynomial: energy.roots.polynomial, bounds };
}

/**
 * Takes blocks apart whose polynomials share a factor with another sector's, or have another sector's energy for a
 * root.
 */
function partCommonRoots(
  h0: ExactOperator,
  sectors: readonly ExactSector[],
  tree: ProofTree,
  budget: ProofBudget,
): readonly ExactSector[] {
  const blocks = sectors.flatMap((sector) => sector.blocks);
  const polynomials = blocks.flatMap(({ energy }) => (energy.kind === "roots" ? [energy.roots.polynomial] : []));
  if (polynomials.length === 0) return sectors;
  const numbers = new ValueGroups<true>();
  for (const { energy } of blocks) if (energy.kind === "value") numbers.add(energy.value, true);
  const linear = numbers.list.map(({ value }) => fromRoots([value]));
  const base = coprimePolynomials([...polynomials, ...linear]);
  const isWhole = (p: Polynomial): boolean => base.some((q) => samePolynomial(p, q));
  return sectors.map((sector) => ({
    blocks: sector.blocks.flatMap((block): EnergyBlock[] => {
      const { energy, frame } = block;
      if (energy.kind !== "roots" || isWhole(energy.roots.polynomial)) return [block];
      const piece = { ...energy.roots, vectors: frame.vectors };
      const split = tree.refine(block, { kind: "energy", operator: "H0" }, () =>
        groupPieces(within(h0, budget), [piece], base, budget).map(({ value, vectors }) => ({
          value,
          frame: new Frame(vectors),
        })),
      );
      return (split ?? []).map(({ child, path }) => ({ ...block, frame: child.frame, path, energy: child.value }));
    }),
  }));
}
