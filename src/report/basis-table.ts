import { type GoodBasis, requireCertified } from "../certify/good-basis.js";
import type { BasisState, LevelResult, Study } from "../certify/outcome.js";
import { GoodBasisError } from "../errors.js";
import { isObject, requireArgument, requireOptions, shown } from "../misuse.js";
import { perturb } from "../perturb/perturb.js";
import { type BasisColumn, columnsFor, type FilledColumn, type SecondOrderShifts } from "./basis-columns.js";
import { basisNotes } from "./basis-notes.js";
import type { Table, TableRow } from "./table.js";

/** Options of {@link basisTable}. */
export interface BasisTableOptions<K extends string = string> {
  /**
   * Which columns, in their order; see {@link BasisColumn}. Default: level, E0, degeneracy, labels, shift, second (of a
   * certified basis), evidence, safe, expansion.
   */
  readonly columns?: readonly BasisColumn<K>[];
  /** Most terms of an expansion, from 1 on; the number and weight of the others are stated. Default 6. */
  readonly terms?: number;
  /** Coefficients with a smaller modulus are left out, their number and weight stated. Default 1e-6. */
  readonly threshold?: number;
  /** Indices of the levels to show, among the levels studied; default all. */
  readonly levels?: readonly number[];
}

const DEFAULT_TERMS = 6;
const DEFAULT_THRESHOLD = 1e-6;

/**
 * The labelled states as a table: levels, energies, labels, shifts with their ±, the evidence, and the states in the caller's
 * kets.
 *
 * @param source - a certified basis, or any outcome or study; for the latter the notes say which levels are not good
 * @param options - columns and their order, length of expansions
 * @returns a plain object; {@link formatTable} sets it as text, Markdown, CSV, JSON or LaTeX
 * @throws GoodBasisError `option` for an unknown column or a number outside its range, `not-certified` for second-order shifts
 *   of anything but a certified basis
 *
 * @example
 * ```ts
 * import { basisTable, findGoodBasis, formatTable } from "goodbasis";
 *
 * const outcome = findGoodBasis({
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] } },
 *   unit: "cm⁻¹",
 * });
 * const table = basisTable(outcome, { columns: ["level", "E0", "label:A", "shift", "expansion"] });
 * console.log(formatTable(table, "text"));
 * ```
 */
export function basisTable<K extends string>(
  source: GoodBasis<K> | Study<K>,
  options: BasisTableOptions<K> = {},
): Table {
  const certified = !isObject(source) || !("audit" in source);
  if (certified) requireCertified("basisTable", source);
  const study: Study<K> = certified ? source.study : source;
  requireArgument(isStudy(study), "basisTable", "a basis or an outcome", source, "pass what findGoodBasis returned");
  requireOptions("basisTable", options, ["columns", "terms", "threshold", "levels"]);
  const levels = chooseLevels(study.levels, options.levels);
  const columnSource = {
    study,
    second: certified ? secondOrder(source, levels) : undefined,
    terms: checkTerms(options.terms ?? DEFAULT_TERMS),
    threshold: checkThreshold(options.threshold ?? DEFAULT_THRESHOLD),
  };
  const names = options.columns ?? defaultColumns(certified);
  if (!Array.isArray(names)) {
    throw new GoodBasisError("option", `basisTable: columns is ${shown(names)}; give a list of column names`, {});
  }
  const filled = names.flatMap((name) => columnsFor(name, columnSource));
  checkRepeats(filled);
  const rows = levels.flatMap((level) =>
    study.states
      .slice(level.firstState, level.firstState + level.degeneracy)
      .map((state) => makeRow(filled, state, level)),
  );
  const columns = filled.map(({ column }) => column);
  return { unit: study.unit, columns, rows, notes: basisNotes(study, levels, columns, rows) };
}

function isStudy(study: unknown): boolean {
  const lists = ["levels", "states", "candidates", "perturbations"];
  return isObject(study) && lists.every((name) => Array.isArray(Reflect.get(study, name)));
}

function defaultColumns(second: boolean): readonly BasisColumn<never>[] {
  const last: readonly BasisColumn<never>[] = ["evidence", "safe", "expansion"];
  return ["level", "E0", "degeneracy", "labels", "shift", ...(second ? (["second"] as const) : []), ...last];
}

/** Second-order shifts of the states for which they are safe, computed when the first one is asked for. */
function secondOrder<K extends string>(
  basis: GoodBasis<K>,
  levels: readonly LevelResult[],
): (state: number) => SecondOrderShifts {
  let found: ReadonlyMap<number, SecondOrderShifts> | undefined;
  return (state) => {
    if (found === undefined) {
      const places = new Set(levels.map((level) => level.index));
      const select = basis.states
        .filter(({ level, safe }) => places.has(level) && (safe.energies === "all" || safe.energies >= 2))
        .map(({ index }) => index);
      found = new Map(perturb(basis, { order: 2, select }).states.map(({ index, second }) => [index, second]));
    }
    return found.get(state);
  };
}

function makeRow<K extends string>(
  columns: readonly FilledColumn<K>[],
  state: BasisState<K>,
  level: LevelResult,
): TableRow {
  return { state: state.index, level: level.index, cells: columns.map(({ cell }) => cell(state, level)) };
}

function checkRepeats<K extends string>(columns: readonly FilledColumn<K>[]): void {
  const seen = new Set<string>();
  for (const { column } of columns) {
    if (seen.has(column.key)) {
      throw new GoodBasisError(
        "option",
        `basisTable: the column "${column.key}" is asked for twice; name every column once`,
        {
          column: column.key,
        },
      );
    }
    seen.add(column.key);
  }
}

function chooseLevels(levels: readonly LevelResult[], chosen: readonly number[] | undefined): readonly LevelResult[] {
  if (chosen === undefined) return levels;
  const next = "or leave it out for all levels";
  requireArgument(Array.isArray(chosen), "basisTable", "as levels a list of indices", chosen, next);
  return chosen.map((index) => {
    const level = typeof index === "number" ? levels[index] : undefined;
    if (level !== undefined) return level;
    throw new GoodBasisError(
      "no-level",
      `basisTable: there is no level ${shown(index)}; ${levels.length} levels were studied, so give numbers from 0 to ` +
        `${levels.length - 1}`,
      { level: index },
    );
  });
}

function checkTerms(terms: number): number {
  if (Number.isInteger(terms) && terms >= 1) return terms;
  throw new GoodBasisError("option", `basisTable: terms is ${shown(terms)}; give a whole number from 1 on`, { terms });
}

function checkThreshold(threshold: number): number {
  if (typeof threshold === "number" && threshold >= 0 && threshold < 1) return threshold;
  throw new GoodBasisError("option", `basisTable: threshold is ${shown(threshold)}; give a number from 0 to below 1`, {
    threshold,
  });
}
