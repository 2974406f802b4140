import { GoodBasisError } from "../errors.js";
import { type ExactBudget, Meter } from "./budget.js";
import { requireOperator } from "./guards.js";
import type { ExactOperator } from "./operator.js";
import { Surd } from "./surd.js";
import { ExactVector } from "./vector.js";

/** A row of a system of equations: coefficients by column, none zero. */
export type EquationRow = ReadonlyMap<number, Surd>;

/** A row with coefficient 1 at its pivot column, where no other row has any. */
interface PivotRow {
  readonly pivot: number;
  readonly row: EquationRow;
}

/** Cost of a pivot: number of entries first, then how long the number is; small ones keep the rest small. */
function weight(x: Surd): number {
  const { largeTerms, safeParts } = x;
  if (largeTerms !== undefined) return 2 + largeTerms.roots.length;
  if (safeParts === undefined) return 2;
  return Math.abs(safeParts.re) === safeParts.den && safeParts.im === 0 ? 0 : 1;
}

/**
 * Reduced row echelon form over the field, sparse rows, shortest rows first and the simplest coefficient of each as pivot.
 * Deterministic. What cancels is seen exactly, so the number of pivots is the rank.
 *
 * @param rows - equations; zero coefficients are allowed
 * @param meter - counts multiplications and weighs coefficients
 * @returns pivot rows by ascending pivot column
 */
function reducedEchelon(rows: readonly EquationRow[], meter: Meter): PivotRow[] {
  const pivots = new Map<number, Map<number, Surd>>();
  const order = rows.map((_, k) => k).sort((j, k) => (rows[j]?.size ?? 0) - (rows[k]?.size ?? 0) || j - k);
  for (const k of order) {
    const rest = new Map([...(rows[k] as EquationRow)].filter(([, x]) => !x.isZero));
    // no pivot row has an entry at another pivot's column, so one pass over the columns at the start is enough
    for (const column of [...rest.keys()]) {
      const row = pivots.get(column);
      if (row !== undefined) subtract(rest, row, rest.get(column), meter);
    }
    let [best, least] = [-1, Number.POSITIVE_INFINITY];
    for (const [column, x] of rest) {
      const cost = weight(x);
      if (cost > least || (cost === least && column > best)) continue;
      [best, least] = [column, cost];
    }
    const head = rest.get(best);
    if (head === undefined) continue;
    const inverse = head.inverse();
    meter.spendProducts(rest.size);
    for (const [column, x] of rest) {
      const scaled = column === best ? Surd.one : x.times(inverse);
      meter.weigh(scaled.largeTerms);
      rest.set(column, scaled);
    }
    for (const row of pivots.values()) subtract(row, rest, row.get(best), meter);
    pivots.set(best, rest);
  }
  return [...pivots].sort(([a], [b]) => a - b).map(([pivot, row]) => ({ pivot, row }));
}

/** target − factor · row, in place. */
function subtract(target: Map<number, Surd>, row: EquationRow, factor: Surd | undefined, meter: Meter): void {
  if (factor === undefined) return;
  meter.spendProducts(row.size);
  const negative = factor.negate();
  for (const [column, x] of row) {
    const product = x.times(negative);
    const sum = target.get(column)?.plus(product) ?? product;
    if (sum.isZero) target.delete(column);
    else target.set(column, sum);
  }
}

function rowsOf(operator: ExactOperator): Map<number, Surd>[] {
  const rows = Array.from({ length: operator.n }, () => new Map<number, Surd>());
  for (const { row, col, value } of operator.elements()) rows[row]?.set(col, value);
  return rows;
}

/**
 * The rank of an exact matrix.
 *
 * @throws GoodBasisError `budget`
 *
 * @example
 * ```ts
 * import { ExactOperator, exactRank } from "goodbasis";
 *
 * console.log(exactRank(ExactOperator.from([["sqrt(2)", "sqrt(6)"], [1, "sqrt(3)"]]))); // 1
 * ```
 */
export function exactRank(operator: ExactOperator, budget?: ExactBudget): number {
  requireOperator("exactRank", operator);
  return reducedEchelon(rowsOf(operator), new Meter("exactRank", budget)).length;
}

/**
 * A basis of the null space of an exact matrix, or of the common one of several: every v with A v = 0 is a combination of the
 * returned ones.
 *
 * @param operators - one operator, or several on the same kets
 * @returns primitive vectors, one for each free column, by ascending free column; not orthogonal in general, see
 *   {@link orthogonalise}
 * @throws GoodBasisError `shape` - no operator, or different numbers of kets; `budget`
 *
 * @example
 * ```ts
 * import { ExactOperator, exactKernel } from "goodbasis";
 *
 * const [v] = exactKernel(ExactOperator.from([["sqrt(2)", "sqrt(6)"], [1, "sqrt(3)"]]));
 * console.log(v?.component(0).text(), v?.component(1).text()); // -sqrt(3) 1
 * ```
 */
export function exactKernel(operators: ExactOperator | readonly ExactOperator[], budget?: ExactBudget): ExactVector[] {
  const list = Array.isArray(operators) ? (operators as readonly ExactOperator[]) : [operators as ExactOperator];
  for (const operator of list) requireOperator("exactKernel", operator);
  const n = list[0]?.n;
  if (n === undefined || list.some((operator) => operator.n !== n)) {
    const message = "exactKernel: expected at least one operator, and all on the same number of kets";
    throw new GoodBasisError("shape", message, { sizes: list.map((operator) => operator.n) });
  }
  return nullSpace(n, list.flatMap(rowsOf), new Meter("exactKernel", budget));
}

/** The null space of equations in n unknowns. */
export function nullSpace(n: number, rows: readonly EquationRow[], meter: Meter): ExactVector[] {
  const pivots = reducedEchelon(rows, meter);
  const isPivot = new Uint8Array(n);
  const columns = new Map<number, [number, Surd][]>();
  for (const { pivot, row } of pivots) {
    isPivot[pivot] = 1;
    for (const [column, x] of row) {
      if (column === pivot) continue;
      const list = columns.get(column) ?? [];
      list.push([pivot, x.negate()]);
      columns.set(column, list);
    }
  }
  const vectors: ExactVector[] = [];
  for (let column = 0; column < n; column++) {
    if (isPivot[column] === 1) continue;
    vectors.push(ExactVector.fromEntries(n, [[column, Surd.one], ...(columns.get(column) ?? [])]).primitive());
  }
  return vectors;
}
