import type { Audit } from "../audit/audit.js";
import type { PreparedCandidate, PreparedProblem } from "../audit/problem.js";
import { LABEL_WIDTH } from "../audit/resolution.js";
import type { Complex } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { roundUp } from "../numerics/rounding.js";
import { selectRows } from "../numerics/sparse.js";
import { adjointImages, images } from "../operator/images.js";
import { labelFamily, type StateLabel, sharpLabel, vagueLabel } from "../refine/label.js";
import type { TreeNode } from "../refine/tree.js";
import type { LevelState, LevelStates } from "./level-states.js";
import { imageError, residualBounds, rowProduct } from "./residuals.js";
import type { SectorEvidence } from "./whole.js";

/** A candidate's number in one state, before it is named. */
export interface LabelNumber {
  readonly value: Complex;
  /** Bound on ‖A q − a q‖ and, for a candidate that is not Hermitian, on ‖A†q − a*q‖. */
  readonly radius: number;
  /** Whether the state carries this label in the tree. */
  readonly onPath: boolean;
}

/**
 * The numbers of one candidate in every state of a level.
 *
 * Where the state's sector carries the label, its value and the sector's residual bound; elsewhere the expectation value and
 * the residual of the state itself.
 *
 * @param sectorOf - the sector of each of the level's parts
 */
export function labelNumbers(
  candidate: PreparedCandidate,
  place: number,
  { states, vectors, rowError }: LevelStates,
  sectorOf: (part: number) => SectorEvidence | undefined,
): LabelNumber[] {
  const { operator } = candidate;
  const composed = 2 * (operator.norm + operator.error) * rowError;
  const numbers = states.map((state): LabelNumber | undefined => {
    const own = state.labels.find((label) => label.candidate === place);
    const residual = sectorOf(state.part)?.labelResiduals.get(place);
    if (own === undefined || residual === undefined) return undefined;
    return { value: own.value, radius: roundUp(residual + composed), onPath: true };
  });
  const open = numbers.flatMap((number, k) => (number === undefined ? [k] : []));
  if (open.length > 0) {
    const rest = measure(
      candidate,
      place,
      open.map((k) => states[k] as LevelState),
      selectRows(vectors, open),
    );
    open.forEach((k, r) => {
      numbers[k] = rest[r];
    });
  }
  return numbers as LabelNumber[];
}

function measure(
  candidate: PreparedCandidate,
  place: number,
  states: readonly LevelState[],
  vectors: Csr,
): LabelNumber[] {
  const rows = images(vectors, candidate.operator);
  const values = states.map((state, k): { value: Complex; onPath: boolean } => {
    const own = state.labels.find((label) => label.candidate === place);
    if (own !== undefined) return { value: own.value, onPath: true };
    const mean = rowProduct(vectors, k, rows, k);
    return { value: candidate.kind === "hermitian" ? { re: mean.re, im: 0 } : mean, onPath: false };
  });
  const error = imageError(candidate.operator);
  const value = (row: number): Complex => values[row]?.value ?? { re: 0, im: 0 };
  const direct = residualBounds(rows, vectors, value, error);
  const adjoint = candidate.kind === "hermitian" ? undefined : adjointResiduals(candidate, vectors, value, error);
  return values.map((entry, k) => ({
    ...entry,
    radius: Math.max(direct[k] as number, adjoint === undefined ? 0 : (adjoint[k] as number)),
  }));
}

function adjointResiduals(
  candidate: PreparedCandidate,
  vectors: Csr,
  value: (row: number) => Complex,
  error: number,
): Float64Array {
  const conjugate = (row: number): Complex => ({ re: value(row).re, im: -value(row).im });
  return residualBounds(adjointImages(vectors, candidate.operator), vectors, conjugate, error);
}

/** The values without those that repeat to within `width`: never two that were told apart. */
function distinctValues(values: readonly Complex[], width: number): Complex[] {
  const cell = (x: number): number => Math.round(x / width);
  return [...new Map(values.map((value) => [`${cell(value.re)} ${cell(value.im)}`, value])).values()];
}

/**
 * Names the numbers of one candidate in all states studied.
 *
 * A state counts as an eigenvector where the residual is as small as the solver leaves it; everything else is an expectation
 * value with its standard deviation.
 */
export function nameLabels(
  problem: PreparedProblem,
  audit: Audit,
  place: number,
  numbers: readonly LabelNumber[],
  nodes: readonly TreeNode[],
): StateLabel[] {
  const candidate = problem.candidates[place] as PreparedCandidate;
  const finding = audit.candidates[place];
  const role = finding?.conserved === true ? "conserved" : finding?.descriptive === true ? "descriptive" : "broken";
  const sharp = (entry: LabelNumber): boolean => entry.radius <= 16 * LABEL_WIDTH * candidate.operator.norm;
  const seen = distinctValues(
    [
      ...nodes
        .filter((node) => node.kind === "label" && node.operator === candidate.name)
        .flatMap((node) => node.values),
      ...numbers.filter((entry) => !entry.onPath && sharp(entry)).map((entry) => entry.value),
    ],
    LABEL_WIDTH * candidate.operator.norm,
  );
  const all = numbers.every((entry) => entry.onPath || sharp(entry));
  const widest = numbers.reduce((most, entry) => (sharp(entry) ? Math.max(most, entry.radius) : most), 0);
  const family = labelFamily(candidate.label, seen, 4 * widest + LABEL_WIDTH * candidate.operator.norm, all);
  return numbers.map((entry) =>
    entry.onPath || sharp(entry)
      ? sharpLabel(family, entry.value, entry.radius, role)
      : vagueLabel(entry.value, entry.radius, role),
  );
}
