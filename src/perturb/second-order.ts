import type { NodeEvidence } from "../certify/couplings.js";
import type { StudyInternals } from "../certify/internals.js";
import type { LevelResult, StateVector, Study } from "../certify/outcome.js";
import { imageError, rowProduct } from "../certify/residuals.js";
import type { Csr } from "../numerics/csr.js";
import { gamma, rootOfSquares, roundUp } from "../numerics/rounding.js";
import { add, adjoint, maxRowEntries, multiply, selectRows } from "../numerics/sparse.js";
import { images } from "../operator/images.js";
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
  const level = study.levels[place];
  const scale = level === undefined ? undefined : levelScale(study, internals, level);
  return {
    energies: (k) =>
      level === undefined || scale === undefined ? [] : secondOrderEnergies(internals, level, scale, k, part(k)),
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
    const terms = maxRowEntries(vectors) + maxRowEntries(sector.frame) + own.length + 16;
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

/** The numbers that every bound on a second-order element of one level is made of. */
interface LevelScale {
  /** Distance of any exact eigenvalue of H0 outside the level from the level. */
  readonly isolation: number;
  /** Bound on the distance of any exact energy of the level from the one computed with. */
  readonly width: number;
  readonly tilt: number;
  readonly epsilon: number;
  readonly norms: readonly number[];
  readonly imageErrors: readonly number[];
}

function levelScale(study: Study, { problem }: StudyInternals, level: LevelResult): LevelScale {
  const gap = Math.min(level.gapBelow ?? Number.POSITIVE_INFINITY, level.gapAbove ?? Number.POSITIVE_INFINITY);
  return {
    isolation: gap - 2 * study.whole.energyEnclosure - level.spread,
    width: study.states
      .slice(level.firstState, level.firstState + level.degeneracy)
      .reduce((most, state) => Math.max(most, Math.abs(state.energy - level.energy) + state.energyPlusMinus), 0),
    tilt: level.tilt,
    epsilon: level.evidence.orthonormality + study.whole.orthonormality,
    norms: problem.perturbations.map(({ operator }) => operator.norm + operator.error),
    imageErrors: problem.perturbations.map(({ operator }) => imageError(operator)),
  };
}

/**
 * E2_pq = Re Σ_k ⟨μ|V_p|k⟩⟨k|V_q|μ⟩/(E0 − E_k) with a bound: {@link elementError} and, for a state that is off its exact
 * direction by δ, δ (‖V_p‖ ‖R V_q μ‖ + ‖V_q‖ ‖R V_p μ‖) + δ² ‖V_p‖‖V_q‖/d.
 */
function secondOrderEnergies(
  internals: StudyInternals,
  level: LevelResult,
  scale: LevelScale,
  k: number,
  part: PartSecondOrder,
): Bounded[][] {
  const r = part.row[k] as number;
  const { isolation, norms } = scale;
  const direction = directionError(internals, level, k, part, scale);
  return part.perturbations.map((left, p) =>
    part.perturbations.map((right, q): Bounded => {
      if (isolation === Number.POSITIVE_INFINITY) return { value: 0, plusMinus: 0 };
      const value =
        (rowProduct(left.outside, r, right.scaled, r).re + rowProduct(left.scaled, r, right.outside, r).re) / 2;
      if (!(isolation > 0)) return { value, plusMinus: Number.POSITIVE_INFINITY };
      const v = norms[p] as number;
      const u = norms[q] as number;
      const turn =
        direction * (v * correctionBound(right, r, scale) + u * correctionBound(left, r, scale)) +
        direction * direction * v * (u / isolation);
      return { value, plusMinus: roundUp(elementError(left, right, p, r, r, scale) + turn, 16) };
    }),
  );
}

/**
 * Bound on the error of Σ_k ⟨μ|V_p|k⟩⟨k|V_q|ν⟩/(E0 − E_k) for the vectors as they are: ‖V_p μ‖ times that of R V_q ν, and the
 * rounding of the sum.
 */
function elementError(left: PartColumn, right: PartColumn, p: number, r: number, s: number, scale: LevelScale): number {
  const w = left.imageNorm[r] as number;
  const x = right.correctionNorm[s] as number;
  const rounding = 4 * gamma(maxRowEntries(left.outside) + 8) * w * x;
  const image = scale.imageErrors[p] as number;
  return roundUp(w * (1 + scale.epsilon) * correctionError(right, s, scale) + rounding + image * x, 32);
}

/**
 * Bound on ‖x − R V ν‖ for the computed correction x: with w = V ν, r = (1 − P)w − (E0 − H0)x for the exact E0 and isolation d, at most
 * (‖r‖ + 2 sinΘ ‖w‖)/d outside the level and (sinΘ + ε)‖x‖ inside it.
 */
function correctionError(column: PartColumn, s: number, { isolation, width, tilt, epsilon }: LevelScale): number {
  const x = column.correctionNorm[s] as number;
  const outside = (column.residual[s] as number) + width * x + 2 * tilt * (column.imageNorm[s] as number);
  return outside / isolation + (tilt + epsilon) * x;
}

/**
 * How far a state may be turned inside its block at a node of V: the exact matrix of V differs from the computed diagonal by Δ,
 * what is off the diagonal, the evaluation, the width of the level, and the tilt so far times 2‖V‖; sinΘ ≤ Δ/(gap − Δ).
 */
function turnByPerturbation(
  node: NodeEvidence,
  level: LevelResult,
  error: number,
  { norms, width }: LevelScale,
): number {
  const { offDiagonal, elementError: evaluation } = level.evidence;
  const off = Math.max(0, ...offDiagonal) + Math.max(0, ...evaluation) + width + 2 * Math.max(...norms) * error;
  return 2 * off < node.gap ? (3 * off) / node.gap : 2;
}

/** Upper bound on ‖R V ν‖. */
function correctionBound(column: PartColumn, s: number, scale: LevelScale): number {
  return (column.correctionNorm[s] as number) + correctionError(column, s, scale);
}

/**
 * Bound on the angle between a state's vector and its exact direction inside the nearby symmetric model: the tilt of the level,
 * the orthonormality defect, and at every node where the state parts from others the residual there (of the label, or of V's or
 * W's block) over the gap (Davis and Kahan, SIAM J. Numer. Anal. 7, 1 (1970)).
 */
function directionError(
  internals: StudyInternals,
  level: LevelResult,
  k: number,
  part: PartSecondOrder,
  scale: LevelScale,
): number {
  const states = internals.states[level.index]?.states ?? [];
  const path = states[k]?.path ?? [];
  const passes = (node: number, of: number): boolean => states[of]?.path.some((step) => step.node === node) === true;
  const onPath = level.evidence.nodes.filter((node) => path.some((step) => step.node === node.node));
  let error = Math.SQRT2 * level.tilt + level.evidence.orthonormality;
  for (const node of onPath) {
    if (node.kind === "label") error += (2 * node.residual) / node.gap;
    if (node.kind === "perturbation") error += turnByPerturbation(node, level, error, scale);
  }
  const only = part.perturbations[0];
  for (const node of onPath) {
    if (node.kind !== "second order" || only === undefined) continue;
    const r = part.row[k] as number;
    // the block W is taken on may itself be turned by the error so far
    const norm = scale.norms[0] as number;
    const turned = 2 * error * norm * (norm / scale.isolation);
    let square = 0;
    let terms = 0;
    states.forEach((_, other) => {
      const s = part.row[other] as number;
      if (other === k || s < 0 || !passes(node.node, other)) return;
      const element = rowProduct(only.outside, r, only.scaled, s);
      square += (Math.hypot(element.re, element.im) + elementError(only, only, 0, r, s, scale) + turned) ** 2;
      terms++;
    });
    error += (2 * rootOfSquares(square, terms)) / node.gap;
  }
  return roundUp(error, 16 * (onPath.length + states.length));
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

/** Upper bounds on the norms of all rows. */
function rowNorms(rows: Csr): Float64Array {
  const norms = new Float64Array(rows.rows);
  for (let r = 0; r < rows.rows; r++) {
    const from = rows.ptr[r] as number;
    const to = rows.ptr[r + 1] as number;
    let sum = 0;
    for (let p = from; p < to; p++) {
      sum += (rows.re[p] as number) ** 2 + (rows.im === undefined ? 0 : (rows.im[p] as number) ** 2);
    }
    norms[r] = roundUp(rootOfSquares(sum, to - from), to - from + 8);
  }
  return norms;
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
