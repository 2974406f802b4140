import { Fraction } from "fraction.js";
import { type PreparedCandidate, type PreparedProblem, type Problem, prepareProblem } from "../audit/problem.js";
import { checkResolution, couplingScale, DEFAULT_RESOLUTION, FAR_BELOW } from "../audit/resolution.js";
import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, shown } from "../misuse.js";
import { type Complex, modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { roundDown, roundUp, UNIT_ROUNDOFF } from "../numerics/rounding.js";
import { selectRows } from "../numerics/sparse.js";
import { adjointImages, images } from "../operator/images.js";
import type { Operator } from "../operator/operator.js";
import { energyTolerance } from "../refine/sectors.js";
import { type BasisColumns, readColumns } from "./columns.js";
import { denominatorRemarks, reachRemarks } from "./denominators.js";
import { overall } from "./find.js";
import { type GuardOptions, guardSetting } from "./guard.js";
import { checkLevelWidth, requireOptions } from "./options.js";
import { elementErrorBound, forEachProduct, gramDefect, gramElementError } from "./products.js";
import { type Repair, repairLevel } from "./repair.js";
import { imageError, residualBounds, rowProduct } from "./residuals.js";
import { short } from "./short.js";
import { around, type Spectrum, spectrumOf } from "./spectrum.js";
import type { Verdict } from "./verdict.js";

/** A label that somebody claims for a column: an eigenvalue, or a quantum number as text ("3/2", "-1"). */
export type ClaimedLabel = number | Complex | string;

/** Options of {@link validateBasis}. */
export interface ValidateOptions extends GuardOptions {
  /** What counts as vanished, relative to ‖V‖, ‖H0‖, ‖A‖ (each without its common part) or 1. Default 1e-10. */
  readonly resolution?: number;
  /** Energies up to this far apart are one level; by default what rounding and the columns' residuals leave. */
  readonly levelWidth?: number;
}

/** A checked claim: its bound from above and below, and whether it holds to the resolution. */
export interface Checked {
  /** Whether the claim holds to the resolution. */
  readonly verdict: Verdict;
  /** Rigorous bounds on the deviation. */
  readonly atMost: number;
  /** Rigorous lower bound on the deviation. */
  readonly atLeast: number;
}

/** What was found of one column. */
export interface ColumnFinding {
  /** Number of the column. */
  readonly column: number;
  /** ⟨q|H0|q⟩/⟨q|q⟩. */
  readonly energy: number;
  /** ‖H0 q − E q‖. */
  readonly eigenvector: Checked;
  /** ‖A q − a q‖ for every label claimed. */
  readonly labels: Readonly<Record<string, Checked>>;
}

/** Two columns of one level that V couples. */
export interface ColumnCoupling {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** Numbers of the two columns. */
  readonly columns: readonly [number, number];
  /** |V_μν| in the problem's unit, as computed. */
  readonly size: number;
  /** Rigorous lower bound on it. */
  readonly atLeast: number;
  /** Rigorous upper bound on it. */
  readonly atMost: number;
}

/** What was found of one level of the basis. */
export interface ValidatedLevel {
  /** Middle of the columns' energies. */
  readonly energy: number;
  /** Numbers of its columns, by energy. */
  readonly columns: readonly number[];
  /** Whether V leaves its columns uncoupled. */
  readonly verdict: Verdict;
  /** Bound on the largest in-level element of each perturbation. */
  readonly largest: readonly number[];
  /** The pairs that are certainly coupled, largest first; at most ten. */
  readonly worst: readonly ColumnCoupling[];
  /** The rotation inside the level that diagonalises V there. */
  readonly repair: Repair;
}

/** What {@link validateBasis} found. */
export interface Validation {
  /** The verdict on the whole basis. */
  readonly verdict: Verdict;
  /** Unit of all energies. */
  readonly unit: string;
  /**
   * Whether the columns are as many as the kets. Otherwise every level is counted against H0's spectrum, and one that lacks states is
   * not called good; denominators are bounded by V's reach out of each level over the distance to the next.
   */
  readonly complete: boolean;
  /** ‖Q†Q − 1‖, and the pair of columns (or the one column, twice) that deviates most. */
  readonly orthonormality: Checked & {
    /** The two columns, or one column twice. */
    readonly worst: readonly [number, number];
    /** The element of Q†Q − 1 there. */
    readonly size: number;
  };
  /** One finding for each column. */
  readonly columns: readonly ColumnFinding[];
  /** The levels that the columns form, by ascending energy. */
  readonly levels: readonly ValidatedLevel[];
  /** Everything that stands between the basis and "good", one sentence each. */
  readonly remarks: readonly string[];
}

/**
 * Checks a basis that somebody brings: orthonormal? eigenvectors of H0? labelled rightly? and does V couple columns inside any
 * level? If it does, the rotation inside each level that repairs it is returned.
 *
 * @param problem - H0, V and the candidates that the labels belong to
 * @param columns - n rows, one column a state; need not be complete, but levels must be
 * @param labels - for each label name, one claimed value a column; the names are candidates of the problem
 * @throws GoodBasisError `shape`, `not-finite`, `name`, `option`, and whatever the problem itself throws
 *
 * @example
 * ```ts
 * import { validateBasis } from "goodbasis";
 *
 * const problem = { h0: { diagonal: [0, 0, 1] }, v: [[0, 0.1, 0], [0.1, 0, 0], [0, 0, 0]] };
 * const validation = validateBasis(problem, [[1, 0, 0], [0, 1, 0], [0, 0, 1]]);
 * console.log(validation.verdict, validation.levels[0]?.worst[0]?.size); // not good 0.1
 * ```
 */
export function validateBasis<K extends string>(
  problem: Problem<K>,
  columns: BasisColumns,
  labels?: Readonly<Partial<Record<K, readonly ClaimedLabel[]>>>,
  options: ValidateOptions = {},
): Validation {
  const prepared = prepareProblem(problem);
  requireOptions("validateBasis", options, ["resolution", "levelWidth", "lambda", "refuseAbove"]);
  const resolution = checkResolution(options.resolution ?? DEFAULT_RESOLUTION);
  checkLevelWidth(options.levelWidth);
  const setting = guardSetting(options);
  const vectors = readColumns(columns, prepared.n);
  const orthonormality = checkOrthonormality(vectors, resolution);
  const claims = readClaims(prepared, labels === undefined ? {} : labels, vectors.rows);
  const found = checkColumns(prepared, vectors, claims, resolution);
  const complete = vectors.rows === prepared.n;
  const spectrum = complete ? undefined : spectrumOf(prepared);
  const levels = checkLevels(prepared, vectors, found, resolution, options, spectrum);
  const remarks = [
    ...orthonormalityRemarks(orthonormality),
    ...columnRemarks(found),
    ...levels.flatMap((level) => level.remarks),
    ...(complete
      ? denominatorRemarks(
          prepared,
          vectors,
          levels.map(({ level }) => level),
          setting,
        )
      : levels.flatMap(({ level, gap }) =>
          reachRemarks(prepared, selectRows(vectors, level.columns), level.energy, gap, setting),
        )),
  ];
  const verdicts: Verdict[] = [
    orthonormality.verdict,
    ...found.flatMap(({ eigenvector, labels: own }) => [eigenvector, ...Object.values(own)].map((c) => c.verdict)),
    ...levels.map((level) => level.level.verdict),
    ...(remarks.length > 0 ? (["undecided"] as const) : []),
  ];
  return {
    verdict: overall(verdicts),
    unit: prepared.unit,
    complete,
    orthonormality,
    columns: found,
    levels: levels.map(({ level }) => level),
    remarks,
  };
}

/** A residual within this many times the uncertainty of its evaluation, entries included, cannot be told from zero, and counts as zero. */
const SURELY_WITHIN = 4;

function judge(atMost: number, atLeast: number, threshold: number): Checked {
  return { atMost, atLeast, verdict: atMost <= threshold ? "good" : atLeast > threshold ? "not good" : "undecided" };
}

/** Bound on the length of the longest column, at least 1: the rounding of everything computed from a column grows with it. */
function longestColumn(vectors: Csr): number {
  let most = 1;
  for (let k = 0; k < vectors.rows; k++) most = Math.max(most, rowProduct(vectors, k, vectors, k).re);
  return roundUp(Math.sqrt(most), vectors.cols + 8);
}

function checkOrthonormality(vectors: Csr, resolution: number): Validation["orthonormality"] {
  const bound = gramDefect(vectors, longestColumn(vectors));
  let worst: readonly [number, number] = [0, 0];
  let size = 0;
  forEachProduct(vectors, vectors, (r, c, re, im) => {
    const deviation = Math.hypot(re - (r === c ? 1 : 0), im);
    if (deviation > size) {
      size = deviation;
      worst = [r, c];
    }
  });
  const atLeast = Math.max(0, roundDown(size) - gramElementError(vectors) * (1 + size));
  return { ...judge(bound, atLeast, resolution), worst, size };
}

/** Claimed eigenvalues by candidate, one a column. */
type Claims = readonly { readonly candidate: PreparedCandidate; readonly values: readonly Complex[] }[];

function readClaims(
  problem: PreparedProblem,
  labels: Readonly<Record<string, readonly ClaimedLabel[] | undefined>>,
  count: number,
): Claims {
  const named = isObject(labels) && !Array.isArray(labels);
  requireArgument(named, "validateBasis", "as labels an object with lists of values", labels, "or leave it out");
  return Object.entries(labels).flatMap(([name, values]) => {
    if (values === undefined) return [];
    const candidate = problem.candidates.find((other) => other.name === name);
    if (candidate === undefined) {
      const known = problem.candidates.map((other) => other.name).join(", ") || "none";
      throw new GoodBasisError("name", `label ${name} is no candidate of the problem (candidates: ${known})`, { name });
    }
    if (!Array.isArray(values) || values.length !== count) {
      const came = Array.isArray(values) ? `${values.length} values` : shown(values);
      throw new GoodBasisError("shape", `label ${name} has ${came} for ${count} columns; give one a column`, { name });
    }
    return [{ candidate, values: values.map((value, k) => readClaim(candidate, value, k)) }];
  });
}

function readClaim(candidate: PreparedCandidate, value: ClaimedLabel, column: number): Complex {
  const bad = (): GoodBasisError =>
    new GoodBasisError(
      "option",
      `label ${candidate.name} of column ${column} is ${shown(value)}; give an eigenvalue of ${candidate.name}, ` +
        'or a quantum number such as "3/2"',
      { name: candidate.name, column },
    );
  if (typeof value === "number") {
    if (!Number.isFinite(value)) throw bad();
    return { re: value, im: 0 };
  }
  if (typeof value !== "string") {
    if (!Number.isFinite(value?.re) || !Number.isFinite(value.im)) throw bad();
    return { re: value.re, im: value.im };
  }
  const match = /^([+-]?)(\d+)(?:\/(\d+))?$/.exec(value.trim().replace("−", "-"));
  if (match === null || Number(match[3] ?? 1) === 0) throw bad();
  const number = new Fraction(match[0]).valueOf();
  return { re: candidate.label === "j" ? number * (number + 1) : number, im: 0 };
}

function checkColumns(problem: PreparedProblem, vectors: Csr, claims: Claims, resolution: number): ColumnFinding[] {
  const energyRows = images(vectors, problem.h0);
  const norms = Float64Array.from({ length: vectors.rows }, (_, k) => rowProduct(vectors, k, vectors, k).re);
  const energies = norms.map((norm, k) => (norm > 0 ? rowProduct(vectors, k, energyRows, k).re / norm : 0));
  const energyAt = (k: number): Complex => ({ re: energies[k] as number, im: 0 });
  const longest = longestColumn(vectors);
  const allowance = (operator: Operator, largest: number): number =>
    roundUp(longest * imageError(operator) + 5 * UNIT_ROUNDOFF * (longest - 1) * largest);
  const error = allowance(
    problem.h0,
    energies.reduce((most, energy) => Math.max(most, Math.abs(energy)), 0),
  );
  const residuals = residualBounds(energyRows, vectors, energyAt, error);
  const judged = claims.map(({ candidate, values }) => {
    const own = allowance(
      candidate.operator,
      values.reduce((most, value) => Math.max(most, Math.abs(value.re) + Math.abs(value.im)), 0),
    );
    const valueAt = (k: number): Complex => values[k] as Complex;
    const direct = residualBounds(images(vectors, candidate.operator), vectors, valueAt, own);
    const conjugate = (k: number): Complex => ({ re: valueAt(k).re, im: -valueAt(k).im });
    const adjoint =
      candidate.kind === "hermitian"
        ? direct
        : residualBounds(adjointImages(vectors, candidate.operator), vectors, conjugate, own);
    const scale = couplingScale(candidate.operator);
    return { candidate, own, valueAt, scale, residual: direct.map((x, k) => Math.max(x, adjoint[k] as number)) };
  });
  return Array.from(energies, (energy, column): ColumnFinding => {
    const residual = residuals[column] as number;
    const labels: Record<string, Checked> = {};
    for (const { candidate, own, valueAt, scale, residual: all } of judged) {
      const bound = all[column] as number;
      const least = residualFloor(bound, own, valueAt(column), problem.n);
      labels[candidate.name] = judge(bound, least, Math.max(resolution * scale, SURELY_WITHIN * own));
    }
    return {
      column,
      energy,
      eigenvector: judge(
        residual,
        residualFloor(residual, error, energyAt(column), problem.n),
        Math.max(resolution * couplingScale(problem.h0), SURELY_WITHIN * error),
      ),
      labels,
    };
  });
}

/** The lower bound that belongs to an upper one of {@link residualBounds}: twice what was added there, taken off again. */
function residualFloor(bound: number, error: number, value: Complex, n: number): number {
  const added = error + 5 * UNIT_ROUNDOFF * (Math.abs(value.re) + Math.abs(value.im));
  return Math.max(0, roundDown(bound, 2 * n + 24) - 2.01 * added);
}

interface JudgedLevel {
  readonly level: ValidatedLevel;
  /** Distance to the nearest other level. */
  readonly gap: number;
  readonly remarks: readonly string[];
}

function checkLevels(
  problem: PreparedProblem,
  vectors: Csr,
  found: readonly ColumnFinding[],
  resolution: number,
  options: ValidateOptions,
  spectrum: Spectrum | undefined,
): JudgedLevel[] {
  const residual = found.reduce((most, column) => Math.max(most, column.eigenvector.atMost), 0);
  const width = options.levelWidth ?? energyTolerance(problem, problem.n) + 2 * residual;
  const order = [...found].sort((a, b) => a.energy - b.energy || a.column - b.column);
  const groups: ColumnFinding[][] = [];
  for (const column of order) {
    const last = groups[groups.length - 1];
    const previous = last?.[last.length - 1];
    if (last === undefined || previous === undefined || column.energy - previous.energy > width) groups.push([column]);
    else last.push(column);
  }
  const bottom = (g: number): number => groups[g]?.[0]?.energy ?? Number.POSITIVE_INFINITY;
  const top = (g: number): number => groups[g]?.at(-1)?.energy ?? Number.NEGATIVE_INFINITY;
  return groups.map((group, g): JudgedLevel => {
    const columns = group.map((finding) => finding.column);
    const own = selectRows(vectors, columns);
    const inside = problem.perturbations.map(({ name, operator }) =>
      insideLevel(name, operator, own, columns, resolution),
    );
    const worst = inside
      .flatMap((found) => found.worst)
      .sort((a, b) => b.size - a.size)
      .slice(0, 10);
    const largest = inside.map((found) => found.largest);
    const undecided = inside.some((found, p) => {
      const operator = problem.perturbations[p]?.operator;
      return operator !== undefined && found.largest > resolution * couplingScale(operator);
    });
    const energy = (bottom(g) + top(g)) / 2;
    const near = spectrum === undefined ? undefined : around(spectrum, bottom(g), top(g), width);
    const between = Math.min(g === 0 ? Number.POSITIVE_INFINITY : bottom(g) - top(g - 1), bottom(g + 1) - top(g));
    const gap = Math.min(between, near?.gap ?? Number.POSITIVE_INFINITY);
    const spread = top(g) - bottom(g) + 2 * residual;
    const remarks: string[] = [];
    for (const pair of worst.slice(0, 3)) {
      remarks.push(
        `${pair.perturbation} couples columns ${pair.columns[0]} and ${pair.columns[1]} of the level at ${short(energy)} by ` +
          `${short(pair.size)}${problem.unit === "" ? "" : ` ${problem.unit}`}; the rotation returned for this level repairs it`,
      );
    }
    if (near !== undefined && near.count > group.length) {
      remarks.push(
        `H0 has ${near.count} states at ${short(energy)}, of which the basis holds ${group.length}: whether V couples these to the ` +
          "missing ones is not known; bring the whole level",
      );
    }
    if (spread > FAR_BELOW * gap) {
      remarks.push(
        `the level at ${short(energy)} is ${short(spread)} wide and the next only ${short(gap)} away; ` +
          "merge them with levelWidth or give sharper energies",
      );
    }
    if (group.some((finding) => finding.eigenvector.verdict !== "good")) {
      remarks.push(`the level at ${short(energy)} holds columns that are no eigenvectors of H0`);
    }
    const verdict: Verdict = worst.length > 0 ? "not good" : undecided || remarks.length > 0 ? "undecided" : "good";
    return { level: { energy, columns, verdict, largest, worst, repair: repairLevel(problem, own) }, gap, remarks };
  });
}

function insideLevel(
  name: string,
  operator: PreparedProblem["h0"],
  own: Csr,
  columns: readonly number[],
  resolution: number,
): { largest: number; worst: ColumnCoupling[] } {
  const error = elementErrorBound(operator, own) * 2 * longestColumn(own) ** 2;
  const threshold = resolution * couplingScale(operator);
  let largest = 0;
  const worst: ColumnCoupling[] = [];
  forEachProduct(own, images(own, operator), (r, c, re, im, common) => {
    if (r === c || common === 0) return;
    const size = modulus(re, im);
    const atMost = roundUp(size) + error;
    const atLeast = Math.max(0, roundDown(size) - error);
    if (atMost > largest) largest = atMost;
    if (atLeast <= threshold) return;
    worst.push({ perturbation: name, columns: [columns[r] as number, columns[c] as number], size, atLeast, atMost });
  });
  worst.sort((a, b) => b.size - a.size || a.columns[0] - b.columns[0]);
  return { largest, worst: worst.slice(0, 10) };
}

function orthonormalityRemarks({ verdict, worst, size }: Validation["orthonormality"]): string[] {
  if (verdict === "good") return [];
  const [a, b] = worst;
  return [
    a === b
      ? `column ${a} is not normalised: ⟨q|q⟩ is off 1 by ${short(size)}`
      : `columns ${a} and ${b} are not orthogonal: their overlap is ${short(size)}`,
  ];
}

function columnRemarks(found: readonly ColumnFinding[]): string[] {
  return found.flatMap(({ column, energy, eigenvector, labels }) => [
    ...(eigenvector.verdict === "good"
      ? []
      : [
          `column ${column} is no eigenvector of H0: ‖H0 q − E q‖ ≤ ${short(eigenvector.atMost)} at E = ${short(energy)}`,
        ]),
    ...Object.entries(labels).flatMap(([name, checked]) =>
      checked.verdict === "good"
        ? []
        : [`column ${column} does not carry the label claimed for ${name}: ‖A q − a q‖ ≤ ${short(checked.atMost)}`],
    ),
  ]);
}
