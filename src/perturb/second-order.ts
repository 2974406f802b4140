import type { StudyInternals } from "../certify/internals.js";
import type { StateVector, Study } from "../certify/outcome.js";
import { imageError, images } from "../certify/residuals.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, roundUp } from "../numerics/rounding.js";
import { add, adjoint, maxRowEntries, multiply, selectRows } from "../numerics/sparse.js";
import type { Sector } from "../refine/sectors.js";
import type { Bounded } from "./bounded.js";

/** Second-order energies and first-order states of one level, computed sector by sector when asked for. */
export interface LevelSecondOrder {
  /** E2_pq of the level's k-th state. */
  readonly energies: (k: number) => readonly (readonly Bounded[])[];
  /** First-order correction of the level's k-th state, for each perturbation. */
  readonly corrections: (k: number) => readonly StateVector[];
}

/** The second order of one sector's share of a level. */
interface PartSecondOrder {
  /** Row of each of the level's states in this part, or −1. */
  readonly row: Int32Array;
  readonly perturbations: readonly PartColumn[];
}

/** One perturbation acting on the part's states; rows are states. */
interface PartColumn {
  /** ⟨k|V|μ⟩ over the sector's vectors k outside the level. */
  readonly outside: Csr;
  /** The same over E0 − E_k. */
  readonly scaled: Csr;
  /** Σ_k |k⟩⟨k|V|μ⟩/(E0 − E_k) over the kets. */
  readonly correction: Csr;
  readonly imageNorm: Float64Array;
  readonly correctionNorm: Float64Array;
  /** Bound on ‖(1 − P) V μ − (E0 − H0) x‖ of each row. */
  readonly residual: Float64Array;
}

/** Prepares the second order of one level of a study. */
export function levelSecondOrder(study: Study, internals: StudyInternals, place: number): LevelSecondOrder {
  const parts = new Map<number, PartSecondOrder>();
  const states = internals.states[place];
  const part = (k: number): PartSecondOrder => {
    const number = states?.states[k]?.part ?? 0;
    let found = parts.get(number);
    if (found === undefined) {
      found = solvePart(study, internals, place, number);
      parts.set(number, found);
    }
    return found;
  };
  return {
    energies: (k) => secondOrderEnergies(study, internals, place, k, part(k)),
    corrections: (k) => {
      const { row, perturbations } = part(k);
      return perturbations.map(({ correction }) => rowVector(correction, row[k] as number));
    },
  };
}

function solvePart(study: Study, internals: StudyInternals, place: number, number: number): PartSecondOrder {
  const { problem, sectors, levels } = internals;
  const resolved = internals.resolved[place];
  const found = internals.states[place];
  const level = resolved?.level;
  const part = resolved?.parts[number];
  if (found === undefined || level === undefined || part === undefined) throw new RangeError("no such level");
  const sector = sectors.sectors[part.sector] as Sector;
  const levelOf = levels.of[part.sector] as Int32Array;
  const own = found.states.flatMap((state, k) => (state.part === number ? [k] : []));
  const row = new Int32Array(found.states.length).fill(-1);
  own.forEach((k, r) => {
    row[k] = r;
  });
  const vectors = selectRows(found.vectors, own);
  const toSector = adjoint(sector.frame);
  const inLevel = study.levels[place]?.evidence.offDiagonal ?? [];
  const weight = (k: number): number => 1 / (level.energy - (sector.energies[k] as number));
  const perturbations = problem.perturbations.map(({ operator }, p): PartColumn => {
    const image = images(vectors, operator);
    const elements = multiply(image, toSector);
    const outside = keepColumns(elements, (k) => levelOf[k] !== level.place);
    const scaled = scaleColumns(outside, weight);
    const correction = multiply(scaled, sector.frame);
    // what is left of V μ outside the level, less (E0 − H0) x
    const inside = multiply(multiply(image, adjoint(vectors)), vectors);
    const remainder = add(1, image, -1, inside);
    const shifted = add(level.energy, correction, -1, images(correction, problem.h0));
    const difference = add(1, remainder, -1, shifted);
    const imageNorm = rowNorms(image);
    const correctionNorm = rowNorms(correction);
    const v = operator.norm + operator.error;
    const terms = maxRowEntries(vectors) + maxRowEntries(sector.frame) + 16;
    const rounding = 4 * gamma(terms);
    const residual = rowNorms(difference).map((norm, r) => {
      const x = correctionNorm[r] as number;
      const energy = Math.abs(level.energy) * rounding + imageError(problem.h0);
      return roundUp(norm + imageError(operator) + (inLevel[p] ?? 0) + rounding * v + energy * x, 32);
    });
    return { outside, scaled, correction, imageNorm, correctionNorm, residual };
  });
  return { row, perturbations };
}

/**
 * E2_pq = Re Σ_k ⟨μ|V_p|k⟩⟨k|V_q|μ⟩/(E0 − E_k) with a bound.
 *
 * With x the computed correction, w = Vμ, r = (1 − P)w − (E0 − H0)x and isolation d, the exact R w differs from x by at most
 * (‖r‖ + 2 sinΘ ‖w‖)/d outside the level and (sinΘ + ε)‖x‖ inside it; a state that is off its exact direction by δ changes
 * E2 by at most 2 δ ‖V_p‖‖V_q‖/d. δ collects the tilt of the level, the orthonormality defect, and at every node where the
 * state parts from others the residual (of the label, or of V's or W's block) over the gap there.
 */
function secondOrderEnergies(
  study: Study,
  internals: StudyInternals,
  place: number,
  k: number,
  { row, perturbations }: PartSecondOrder,
): Bounded[][] {
  const level = study.levels[place];
  const r = row[k] as number;
  if (level === undefined) return [];
  const gap = Math.min(level.gapBelow ?? Number.POSITIVE_INFINITY, level.gapAbove ?? Number.POSITIVE_INFINITY);
  const isolation = gap - 2 * study.whole.energyEnclosure - level.spread;
  const { tilt } = level;
  const epsilon = level.evidence.orthonormality + study.whole.orthonormality;
  const norms = internals.problem.perturbations.map(({ operator }) => operator.norm + operator.error);
  const directionError = stateError(study, internals, place, k);
  return perturbations.map((left, p) =>
    perturbations.map((right, q): Bounded => {
      const value = (rowDot(left.outside, right.scaled, r) + rowDot(left.scaled, right.outside, r)) / 2;
      if (isolation === Number.POSITIVE_INFINITY) return { value: 0, plusMinus: 0 };
      if (!(isolation > 0)) return { value, plusMinus: Number.POSITIVE_INFINITY };
      const w = left.imageNorm[r] as number;
      const v = norms[p] as number;
      const u = norms[q] as number;
      const solve = ((right.residual[r] as number) + 2 * tilt * (right.imageNorm[r] as number)) / isolation;
      const leak = (tilt + epsilon) * (right.correctionNorm[r] as number);
      const turn = (2 * directionError * v * u) / isolation;
      const rounding = 4 * gamma(maxRowEntries(left.outside) + 8) * w * (right.correctionNorm[r] as number);
      const entries =
        imageError(internals.problem.perturbations[p]?.operator ?? internals.problem.h0) *
        (right.correctionNorm[r] as number);
      return { value, plusMinus: roundUp(w * (solve + leak) * (1 + epsilon) + turn + rounding + entries, 32) };
    }),
  );
}

/** Bound on how far a state's vector is from its exact direction inside the nearby symmetric model. */
function stateError(study: Study, internals: StudyInternals, place: number, k: number): number {
  const level = study.levels[place];
  const path = internals.states[place]?.states[k]?.path ?? [];
  if (level === undefined) return Number.POSITIVE_INFINITY;
  let error = level.tilt + level.evidence.orthonormality;
  for (const node of level.evidence.nodes) {
    if (!path.some((step) => step.node === node.node)) continue;
    if (node.kind === "label") error += (2 * node.residual) / node.gap;
    else {
      const dropped = Math.max(0, ...level.evidence.offDiagonal);
      const norm = Math.max(...internals.problem.perturbations.map(({ operator }) => operator.norm + operator.error));
      const scale = node.kind === "perturbation" ? dropped : 2 ** -40 * norm;
      error += (2 * scale) / node.gap;
    }
  }
  return error;
}

function keepColumns(rows: Csr, keep: (column: number) => boolean): Csr {
  const ptr = new Int32Array(rows.rows + 1);
  const kept: number[] = [];
  for (let r = 0; r < rows.rows; r++) {
    for (let p = rows.ptr[r] as number; p < (rows.ptr[r + 1] as number); p++)
      if (keep(rows.col[p] as number)) kept.push(p);
    ptr[r + 1] = kept.length;
  }
  const { im } = rows;
  return {
    rows: rows.rows,
    cols: rows.cols,
    ptr,
    col: Int32Array.from(kept, (p) => rows.col[p] as number),
    re: Float64Array.from(kept, (p) => rows.re[p] as number),
    im: im === undefined ? undefined : Float64Array.from(kept, (p) => im[p] as number),
  };
}

function scaleColumns(rows: Csr, weight: (column: number) => number): Csr {
  return {
    ...rows,
    re: rows.re.map((x, p) => x * weight(rows.col[p] as number)),
    im: rows.im?.map((y, p) => y * weight(rows.col[p] as number)),
  };
}

function rowNorms(rows: Csr): Float64Array {
  const norms = new Float64Array(rows.rows);
  for (let r = 0; r < rows.rows; r++) {
    let sum = 0;
    for (let p = rows.ptr[r] as number; p < (rows.ptr[r + 1] as number); p++) {
      sum += (rows.re[p] as number) ** 2 + (rows.im === undefined ? 0 : (rows.im[p] as number) ** 2);
    }
    norms[r] = Math.sqrt(sum);
  }
  return norms;
}

/** Re Σ conj(a_k) b_k over one row of two matrices of the same pattern origin. */
function rowDot(a: Csr, b: Csr, row: number): number {
  let sum = 0;
  let p = a.ptr[row] as number;
  let q = b.ptr[row] as number;
  const pEnd = a.ptr[row + 1] as number;
  const qEnd = b.ptr[row + 1] as number;
  while (p < pEnd && q < qEnd) {
    const i = a.col[p] as number;
    const j = b.col[q] as number;
    if (i === j) {
      sum += (a.re[p] as number) * (b.re[q] as number);
      if (a.im !== undefined && b.im !== undefined) sum += (a.im[p] as number) * (b.im[q] as number);
    }
    if (i <= j) p++;
    if (j <= i) q++;
  }
  return sum;
}

function rowVector(rows: Csr, row: number): StateVector {
  const from = rows.ptr[row] as number;
  const to = rows.ptr[row + 1] as number;
  const im = rows.im?.slice(from, to);
  return {
    kets: rows.col.slice(from, to),
    re: rows.re.slice(from, to),
    im: im?.some((y) => y !== 0) ? im : undefined,
  };
}
