import type { ExactOperator } from "../exact/operator.js";
import { Surd } from "../exact/surd.js";
import type { ExactVector } from "../exact/vector.js";
import type { BlockValue, ProvedLeaf, RootValues } from "./proof.js";

/** An operator applied to a vector. */
export type Action = (vector: ExactVector) => ExactVector;

/** p(x), term by term. */
function polynomialAt(p: readonly Surd[], x: Surd): Surd {
  let [sum, power] = [Surd.zero, Surd.one];
  for (const c of p) {
    sum = sum.plus(c.times(power));
    power = power.times(x);
  }
  return sum;
}

/** Whether p(A) v = 0. */
export function annihilated(p: readonly Surd[], act: Action, vector: ExactVector): boolean {
  let [sum, power] = [vector.scale(0), vector];
  for (const c of p) {
    sum = sum.plus(power, c);
    power = act(power);
  }
  return sum.isZero;
}

/**
 * Whether a polynomial is monic and has as many simple real roots as its degree says: one sign change in each of that
 * many intervals, which ascend and do not meet.
 */
export function hasSimpleRoots({ polynomial, intervals }: RootValues["roots"]): boolean {
  const degree = polynomial.length - 1;
  if (degree < 1 || intervals.length !== degree || !polynomial[degree]?.equals(1)) return false;
  return intervals.every(({ low, high }, k) => {
    const before = intervals[k - 1];
    const ascending = low.compare(high) <= 0 && (before === undefined || before.high.compare(low) < 0);
    const signs = polynomialAt(polynomial, low).sign() * polynomialAt(polynomial, high).sign();
    return ascending && (low.equals(high) ? signs === 0 : signs < 0);
  });
}

/** Whether the operator does on a vector what a value says; nothing is claimed by an unknown one. */
export function actsAs(value: BlockValue, operator: ExactOperator, vector: ExactVector): boolean {
  if (value.kind === "unknown") return true;
  if (value.kind === "value") return operator.apply(vector).minus(vector.scale(value.value)).isZero;
  const { polynomial } = value.roots;
  if (value.part === "whole") return annihilated(polynomial, (v) => operator.apply(v), vector);
  const adjoint = operator.adjoint();
  const real: Action = (v) => operator.apply(v).plus(adjoint.apply(v)).scale("1/2");
  if (value.part === "re") return annihilated(polynomial, real, vector);
  const imaginary: Action = (v) => operator.apply(v).minus(adjoint.apply(v)).scale("-i/2");
  const re = value.re ?? Surd.zero;
  return real(vector).minus(vector.scale(re)).isZero && annihilated(polynomial, imaginary, vector);
}

/**
 * Whether each root is an eigenvalue of the stated multiplicity on the space of some vectors: by the traces of 1, A,
 * A², …, which for simple roots r_i fix the m_i in Σ m_i r_i^k, against Newton's sums of powers (Newton's identities).
 */
export function hasMultiplicities(
  { polynomial, multiplicity }: RootValues["roots"],
  act: Action,
  vectors: readonly ExactVector[],
): boolean {
  const degree = polynomial.length - 1;
  if (vectors.length !== multiplicity * degree) return false;
  const sums: Surd[] = [];
  let images: readonly ExactVector[] = vectors;
  for (let k = 1; k < degree; k++) {
    // s_k = −k c_{d−k} − Σ_{0<j<k} c_{d−j} s_{k−j} for a monic polynomial
    let sum = (polynomial[degree - k] as Surd).times(-k);
    for (let j = 1; j < k; j++) sum = sum.minus((polynomial[degree - j] as Surd).times(sums[k - j - 1] as Surd));
    sums.push(sum);
    images = images.map(act);
    let trace = Surd.zero;
    for (const [j, q] of vectors.entries()) {
      trace = trace.plus(q.inner(images[j] as ExactVector).over(q.squaredNorm));
    }
    if (!trace.equals(sum.times(multiplicity))) return false;
  }
  return true;
}

/** Halvings of two intervals before they count as one number. */
const MOST_HALVINGS = 1000;

/** A real number: exact, or one root of a polynomial in an interval. */
export type Point =
  | { readonly value: Surd; readonly polynomial?: undefined }
  | { readonly polynomial: readonly Surd[]; readonly low: Surd; readonly high: Surd };

/** The sign of a − b where the numbers are shown to differ; 0 where they are not. */
export function order(a: Point, b: Point): number {
  if (a.polynomial === undefined && b.polynomial === undefined) return a.value.compare(b.value);
  if (isSameRoot(a, b)) return 0;
  let [x, y] = [intervalOf(a), intervalOf(b)];
  for (let k = 0; k < MOST_HALVINGS; k++) {
    if (x.high.compare(y.low) < 0) return -1;
    if (y.high.compare(x.low) < 0) return 1;
    // a number that is a root itself will never part from it
    if (a.polynomial === undefined && polynomialAt(b.polynomial ?? [], a.value).isZero) return 0;
    if (b.polynomial === undefined && polynomialAt(a.polynomial ?? [], b.value).isZero) return 0;
    x = half(a, x);
    y = half(b, y);
  }
  return 0;
}

function isSameRoot(a: Point, b: Point): boolean {
  if (a.polynomial === undefined || b.polynomial === undefined) return false;
  const [p, q] = [a.polynomial, b.polynomial];
  const sameInterval = a.low.equals(b.low) && a.high.equals(b.high);
  return sameInterval && p.length === q.length && p.every((c, k) => c.equals(q[k] ?? Surd.zero));
}

interface Interval {
  readonly low: Surd;
  readonly high: Surd;
}

function intervalOf(point: Point): Interval {
  return point.polynomial === undefined ? { low: point.value, high: point.value } : point;
}

function half(point: Point, { low, high }: Interval): Interval {
  if (point.polynomial === undefined) return { low, high };
  const middle = low.plus(high).over(2);
  const sign = polynomialAt(point.polynomial, middle).sign();
  if (sign === 0) return { low: middle, high: middle };
  return sign === polynomialAt(point.polynomial, high).sign() ? { low, high: middle } : { low: middle, high };
}

/** The real numbers that a value may be. */
export function pointsOf(value: BlockValue): Point[] {
  if (value.kind === "unknown") return [];
  if (value.kind === "value") return [{ value: value.value }];
  return value.roots.intervals.map(({ low, high }) => ({ polynomial: value.roots.polynomial, low, high }));
}

/** Whether two values of one operator are shown to have no eigenvalue in common. */
export function apart(a: BlockValue, b: BlockValue): boolean {
  if (a.kind === "unknown" || b.kind === "unknown") return false;
  if (a.kind === "value" && b.kind === "value") return !a.value.equals(b.value);
  if (a.kind === "value") return apart(b, a);
  const disjoint = (points: readonly Point[]): boolean =>
    pointsOf(a).every((x) => points.every((y) => order(x, y) !== 0));
  if (b.kind === "roots") {
    if (a.part === b.part) {
      const otherRe = a.part === "im" && !(a.re ?? Surd.zero).equals(b.re ?? Surd.zero);
      return otherRe || disjoint(pointsOf(b));
    }
    if (a.part === "whole" || b.part === "whole") return false;
    return a.part === "re" ? disjoint([{ value: b.re ?? Surd.zero }]) : apart(b, a);
  }
  if (a.part === "whole") return !b.value.isReal || disjoint([{ value: b.value }]);
  if (a.part === "re") return disjoint([{ value: b.value.re }]);
  return !b.value.re.equals(a.re ?? Surd.zero) || disjoint([{ value: b.value.im }]);
}

/** Whether some label tells two sets of vectors apart. */
export function labelsApart(
  a: Pick<ProvedLeaf, "labels"> | undefined,
  b: Pick<ProvedLeaf, "labels"> | undefined,
): boolean {
  if (a === undefined || b === undefined) return false;
  return a.labels.some(({ candidate, value }) => {
    const other = b.labels.find((label) => label.candidate === candidate);
    return other !== undefined && apart(value, other.value);
  });
}
