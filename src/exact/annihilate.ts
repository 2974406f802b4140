import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import { type ExactBudget, Meter } from "./budget.js";
import { requireNumbers, requireOperator, requireVector, requireVectors } from "./guards.js";
import type { ExactOperator } from "./operator.js";
import { Surd } from "./surd.js";
import type { ExactVector } from "./vector.js";

/** Whether a product annihilates a space: yes, or the first vector that it leaves. */
export type Annihilation =
  | {
      /** Every vector became zero. */
      readonly kind: "annihilated";
    }
  | {
      /** Some vector did not. */
      readonly kind: "left over";
      /** The place of the vector. */
      readonly column: number;
      /** A positive multiple of what Π(A − a_k) makes of it; not zero. */
      readonly residual: ExactVector;
    };

/**
 * Whether Π_k (A − a_k) p = 0 for every given vector p, vector by vector. Then A has no other eigenvalue than the a_k in the
 * space that they span and A generates; that each of them occurs is another question, see {@link projectorTraces}.
 *
 * @param values - the guessed eigenvalues
 * @param vectors - vectors that span the space
 * @throws GoodBasisError `shape`, `budget`
 *
 * @example
 * ```ts
 * import { annihilates, ExactOperator, ExactVector, Surd } from "goodbasis";
 *
 * const flip = ExactOperator.from([[0, 1], [1, 0]]);
 * const kets = [ExactVector.unit(2, 0), ExactVector.unit(2, 1)];
 * console.log(annihilates(flip, [Surd.from(1), Surd.from(-1)], kets).kind); // annihilated
 * ```
 */
export function annihilates(
  operator: ExactOperator,
  values: readonly Surd[],
  vectors: readonly ExactVector[],
  budget?: ExactBudget,
): Annihilation {
  requireOperator("annihilates", operator);
  requireNumbers("annihilates", values);
  requireVectors("annihilates", vectors);
  const meter = new Meter("annihilates", budget);
  for (const [column, vector] of vectors.entries()) {
    const residual = values.reduce((rest, value) => shifted(operator, value, rest, meter), vector);
    if (!residual.isZero) return { kind: "left over", column, residual };
  }
  return { kind: "annihilated" };
}

/** (A − a) v, divided by its content: only the direction counts. */
function shifted(operator: ExactOperator, value: Surd, vector: ExactVector, meter: Meter): ExactVector {
  if (vector.isZero) return vector;
  const image = operator.apply(vector).plus(vector, value.negate()).primitive();
  meter.spendProducts((vector.values.length * operator.count) / operator.n);
  for (const x of image.values) meter.weigh(x.largeTerms);
  return image;
}

/**
 * The part of a vector in the eigenspace of one eigenvalue: Π_{l ≠ k} (A − a_l)/(a_k − a_l) v, where the product over all
 * a_l annihilates v.
 *
 * @param values - the distinct eigenvalues
 * @param chosen - the place k of the one that is kept
 * @throws GoodBasisError `option` - two values are equal; `shape`, `budget`
 *
 * @example
 * ```ts
 * import { ExactOperator, ExactVector, spectralPart, Surd } from "goodbasis";
 *
 * const flip = ExactOperator.from([[0, 1], [1, 0]]);
 * const even = spectralPart(flip, [Surd.from(1), Surd.from(-1)], 0, ExactVector.unit(2, 0));
 * console.log(even.component(1).text()); // 1/2
 * ```
 */
export function spectralPart(
  operator: ExactOperator,
  values: readonly Surd[],
  chosen: number,
  vector: ExactVector,
  budget?: ExactBudget,
): ExactVector {
  requireOperator("spectralPart", operator);
  requireVector("spectralPart", vector);
  requireDistinct("spectralPart", values);
  const meter = new Meter("spectralPart", budget);
  const own = Number.isInteger(chosen) ? values[chosen] : undefined;
  if (own === undefined) {
    throw new GoodBasisError("option", `spectralPart: there is no eigenvalue ${shown(chosen)} among ${values.length}`, {
      chosen,
    });
  }
  let rest = vector;
  let scale = Surd.one;
  for (const [k, value] of values.entries()) {
    if (k === chosen) continue;
    meter.spendProducts((rest.values.length * operator.count) / operator.n);
    rest = operator.apply(rest).plus(rest, value.negate());
    scale = scale.times(own.minus(value));
    for (const x of rest.values) meter.weigh(x.largeTerms);
  }
  return rest.scale(scale.inverse());
}

/**
 * The traces of the spectral projectors of an operator with Π_k (A − a_k) = 0: the multiplicity of each a_k, 0 for one that
 * does not occur.
 *
 * tr P_k is the combination of tr 1, tr A, tr A², … with the coefficients of Lagrange's polynomial that is 1 at a_k and 0 at
 * the other values. No projector is formed.
 *
 * @param operator - the matrix of A in the whole space, in any basis; no Hermitian form is needed
 * @param values - distinct
 * @throws GoodBasisError `option` - two values are equal; `budget`
 *
 * @example
 * ```ts
 * import { ExactOperator, projectorTraces, Surd } from "goodbasis";
 *
 * const a = ExactOperator.diagonal([2, 2, -1]);
 * console.log(projectorTraces(a, [Surd.from(2), Surd.from(-1)]).join(" ")); // 2 1
 * ```
 */
export function projectorTraces(operator: ExactOperator, values: readonly Surd[], budget?: ExactBudget): Surd[] {
  requireOperator("projectorTraces", operator);
  requireDistinct("projectorTraces", values);
  const traces: Surd[] = [Surd.from(operator.n)];
  let power = operator;
  for (let k = 1; k < values.length; k++) {
    if (k > 1) power = power.times(operator, budget);
    traces.push(power.trace());
  }
  return values.map((own, chosen) => {
    let coefficients: readonly Surd[] = [Surd.one];
    for (const [k, value] of values.entries()) {
      if (k === chosen) continue;
      const inverse = own.minus(value).inverse();
      // times (x − a_l) / (a_k − a_l)
      coefficients = Array.from({ length: coefficients.length + 1 }, (_, j) =>
        (coefficients[j - 1] ?? Surd.zero).minus((coefficients[j] ?? Surd.zero).times(value)).times(inverse),
      );
    }
    return coefficients.reduce((sum, c, k) => sum.plus(c.times(traces[k] as Surd)), Surd.zero);
  });
}

function requireDistinct(where: string, values: readonly Surd[]): void {
  requireNumbers(where, values);
  for (const [k, value] of values.entries()) {
    const twin = values.findIndex((other, j) => j < k && other.equals(value));
    if (twin < 0) continue;
    const message = `${where}: eigenvalues ${twin} and ${k} are both ${value.text()}; give each once`;
    throw new GoodBasisError("option", message, { first: twin, second: k });
  }
}
