import { GoodBasisError } from "../errors.js";
import { characteristicPolynomial } from "../exact/characteristic.js";
import { ExactOperator } from "../exact/operator.js";
import { commonDivisor, degree, derivative } from "../exact/polynomial.js";
import type { Depth } from "../refine/resolve.js";
import type { ProofBudget } from "./budget.js";
import { type EnergyBlock, type ExactSector, refineByCandidates } from "./descent.js";
import type { Frame } from "./frame.js";
import type { ExactProblem } from "./problem.js";
import type { BlockValue, LeafKind } from "./proof.js";
import { type Child, refineHermitian, within } from "./refine.js";
import { Resolvent } from "./resolvent.js";
import type { ProofTree } from "./tree.js";

/** A block with the first-order shifts known of it. */
export interface ShiftedBlock extends EnergyBlock {
  /** One for each perturbation used so far. */
  readonly shifts: readonly BlockValue[];
}

/** A leaf before it is named. */
export interface LeafDraft extends ShiftedBlock {
  /** What its second order is found with; undefined where none is asked for or V is not a number on the leaf. */
  readonly resolvent: Resolvent | undefined;
  /** Whether the second-order operator of a single perturbation is a number on the leaf. */
  readonly scalarSecond: boolean;
  readonly kind: LeafKind;
}

/** What resolving needs beside the block. */
export interface Resolving {
  readonly problem: ExactProblem;
  readonly sector: ExactSector;
  /** Places of the conserved candidates. */
  readonly conserved: readonly number[];
  readonly depth: Depth;
  readonly tree: ProofTree;
  readonly budget: ProofBudget;
}

/**
 * Resolves the states of one energy in one sector: by candidates that map this block into itself, by each perturbation
 * in turn, then (for a single perturbation) by its second-order operator where V is a number.
 */
export function resolveBlock(given: Resolving, block: EnergyBlock): LeafDraft[] {
  const { problem, conserved, tree, budget, depth } = given;
  const { energy } = block;
  const known = energy.kind === "value";
  const parts = known ? refineByCandidates(problem, block, conserved, tree, budget) : [block];
  let blocks = parts.map((own): ShiftedBlock => ({ ...own, shifts: [] }));
  for (const { name, operator } of known && depth !== "labels" ? problem.perturbations : []) {
    blocks = blocks.flatMap((own) => {
      if (own.shifts.some((shift) => shift.kind !== "value")) {
        return [{ ...own, shifts: [...own.shifts, { kind: "unknown" } as const] }];
      }
      const split = tree.refine(own, { kind: "perturbation", operator: name }, () =>
        refineHermitian(own.frame, within(operator, budget), budget),
      );
      return (split ?? []).map(({ child, path }) => ({
        ...own,
        frame: child.frame,
        path,
        shifts: [...own.shifts, child.value],
      }));
    });
  }
  if (!known || depth === "labels" || depth === "first order") return blocks.map((own) => leaf(given, own));
  const resolvent = new Resolvent(problem.h0, given.sector, energy.value, budget);
  return blocks.flatMap((own) => secondOrder(given, own, resolvent));
}

/** A leaf; one on which the second-order operator was not found to be a number has no second order of its own. */
function leaf(given: Resolving, block: ShiftedBlock, resolvent?: Resolvent, isNumber = false): LeafDraft {
  const kind = kindOf(given, block);
  return { ...block, kind, scalarSecond: resolvent !== undefined && (isNumber || block.frame.size === 1), resolvent };
}

/** Refines a block on which V is a number by the second-order operator. */
function secondOrder(given: Resolving, block: ShiftedBlock, resolvent: Resolvent): LeafDraft[] {
  const { problem, tree, budget } = given;
  if (block.shifts.some((shift) => shift.kind !== "value")) return [leaf(given, block)];
  const [only, ...more] = problem.perturbations;
  if (block.frame.size === 1 || only === undefined || more.length > 0) return [leaf(given, block, resolvent)];
  const split = tree.refine(block, { kind: "second order", operator: "W" }, (): Child[] => {
    const children = refineHermitian(block.frame, effective(only.operator, resolvent), budget);
    // states of a part with eigenvalues outside the field could not be compared with the others of their level
    const exact = children.every(({ value }) => value.kind === "value");
    return exact ? children : [{ value: { kind: "unknown" }, frame: block.frame }];
  });
  return (split ?? []).map(({ child, path }) =>
    leaf(given, { ...block, frame: child.frame, path }, resolvent, child.value.kind === "value"),
  );
}

/** W = P V R V P over a frame. */
function effective(v: ExactOperator, resolvent: Resolvent): (frame: Frame) => ExactOperator {
  return (frame) =>
    ExactOperator.fromTriplets(
      frame.size,
      frame.vectors.flatMap((q, j) => {
        const x = resolvent.apply(v.apply(q));
        if (x === undefined) {
          throw new GoodBasisError("budget", "W: what is unknown of this sector may belong to the level");
        }
        return [...frame.coefficients(v.apply(x))].map(([i, value]) => [i, j, value] as const);
      }),
    );
}

/** Largest leaf for which a characteristic polynomial is formed to tell its states apart. */
const MOST_SEPARATED = 32;

function kindOf(given: Resolving, block: ShiftedBlock): LeafKind {
  const { frame, energy, shifts } = block;
  if (frame.size === 1) return "state";
  if (isSimple(energy) || isSeparated(given, block)) return "separated";
  const [only, ...more] = shifts;
  return more.length === 0 && only !== undefined && isSimple(only) ? "shifted" : "together";
}

function isSimple(value: BlockValue): boolean {
  return value.kind === "roots" && value.roots.multiplicity === 1;
}

/**
 * Whether labels with values outside the field take the states of a leaf apart, together with the energy where it
 * leaves the field too: a combination of these operators, which commute, has no eigenvalue twice.
 */
function isSeparated({ problem, budget }: Resolving, { frame, labels, energy }: ShiftedBlock): boolean {
  if (frame.size > MOST_SEPARATED) return false;
  const operators = labels.flatMap(({ candidate, value }) =>
    value.kind === "roots" ? (problem.candidates[candidate]?.operator ?? []) : [],
  );
  if (operators.length === 0) return false;
  try {
    const matrices = [...operators, ...(energy.kind === "roots" ? [problem.h0] : [])]
      .map((operator) => frame.matrix(operator, budget))
      .filter(({ invariant }) => invariant)
      .map(({ matrix }) => matrix);
    return COMBINATIONS.some((coefficient) => {
      const sum = matrices.reduce(
        (total, matrix, k) => total.plus(matrix.scale(coefficient(k))),
        ExactOperator.zero(frame.size),
      );
      const p = characteristicPolynomial(sum, budget);
      return degree(commonDivisor(p, derivative(p))) === 0;
    });
  } catch (error) {
    if (!(error instanceof GoodBasisError) || error.code !== "budget") throw error;
    return false;
  }
}

/** Combinations that are tried: the first operator alone, then all with different weights. */
const COMBINATIONS: readonly ((k: number) => number)[] = [(k) => (k === 0 ? 1 : 0), (k) => k + 1, (k) => (k + 2) ** 2];
