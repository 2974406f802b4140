import { type ExactBudget, Meter } from "./budget.js";
import { type EquationRow, nullSpace } from "./elimination.js";
import { requireOperator } from "./guards.js";
import { ExactOperator } from "./operator.js";
import { monic, type Polynomial, polynomial } from "./polynomial.js";
import { Surd } from "./surd.js";

/**
 * The characteristic polynomial det(x − A), for matrices of a few dozen rows.
 *
 * M_1 = 1, c_{n−k} = −tr(A M_k)/k, M_{k+1} = A M_k + c_{n−k}: n products of matrices, and no division except by whole
 * numbers (Le Verrier's method in Faddeev's form, common practice).
 *
 * @returns n + 1 coefficients by ascending power, the last one 1
 * @throws GoodBasisError `budget`
 *
 * @example
 * ```ts
 * import { characteristicPolynomial, ExactOperator, fieldRoots } from "goodbasis";
 *
 * const chain = ExactOperator.from([[0, 1, 0], [1, 0, 1], [0, 1, 0]]);
 * console.log(fieldRoots(characteristicPolynomial(chain)).roots.join(" ")); // -sqrt(2) 0 sqrt(2)
 * ```
 */
export function characteristicPolynomial(operator: ExactOperator, budget?: ExactBudget): Polynomial {
  requireOperator("characteristicPolynomial", operator);
  const { n } = operator;
  const meter = new Meter("characteristicPolynomial", budget);
  const coefficients: Surd[] = new Array<Surd>(n + 1).fill(Surd.zero);
  coefficients[n] = Surd.one;
  const one = ExactOperator.identity(n);
  let power = one;
  for (let k = 1; k <= n; k++) {
    meter.spendProducts(operator.count * n);
    const product = operator.times(power, budget);
    const c = product.trace().over(-k);
    meter.weigh(c.largeTerms);
    coefficients[n - k] = c;
    power = product.plus(one.scale(c));
  }
  return coefficients;
}

/**
 * The minimal polynomial: the first combination of 1, A, A², … that vanishes, found by elimination over the field. Its roots
 * are the eigenvalues, and A can be diagonalised where it has no double root.
 *
 * @returns coefficients by ascending power, the last one 1
 * @throws GoodBasisError `budget`
 *
 * @example
 * ```ts
 * import { ExactOperator, minimalPolynomial } from "goodbasis";
 *
 * console.log(minimalPolynomial(ExactOperator.diagonal([1, 1, 2])).join(" ")); // 2 -3 1
 * ```
 */
export function minimalPolynomial(operator: ExactOperator, budget?: ExactBudget): Polynomial {
  requireOperator("minimalPolynomial", operator);
  const { n } = operator;
  const powers: ExactOperator[] = [ExactOperator.identity(n)];
  for (let k = 1; k <= n; k++) {
    powers.push((powers[k - 1] as ExactOperator).times(operator, budget));
    const [relation] = nullSpace(k + 1, equations(powers), new Meter("minimalPolynomial", budget));
    if (relation === undefined) continue;
    const coefficients = Array.from({ length: k + 1 }, (_, j) => relation.component(j));
    return monic(polynomial(coefficients));
  }
  // the characteristic polynomial annihilates (Cayley and Hamilton), so the loop has returned
  return characteristicPolynomial(operator, budget);
}

/** One equation for each place (row, col): Σ_j x_j (A^j)_{row, col} = 0. */
function equations(powers: readonly ExactOperator[]): EquationRow[] {
  const rows = new Map<number, Map<number, Surd>>();
  for (const [j, power] of powers.entries()) {
    for (const { row, col, value } of power.elements()) {
      const place = row * power.n + col;
      const equation = rows.get(place) ?? new Map<number, Surd>();
      equation.set(j, value);
      rows.set(place, equation);
    }
  }
  return [...rows.values()];
}
