import { Operator } from "../operator/operator.js";
import { type MatrixContext, needSpace, operatorByName } from "./names.js";
import { type FileNumber, isExactText, readExact, readNumber } from "./numbers.js";
import { atPlace, fileError, inside, type Place, showValue } from "./place.js";
import type { TermFile } from "./problem-file.js";

/** Multiples of this count as exactly the number that was written. */
const SHORT = 2 ** -10;

/**
 * The sum of terms, each a coefficient times a product of operators or a scalar product.
 *
 * A coefficient counts as known to half a unit in its last place, a multiple of 1/1024 and a text such as "1/3" as exact.
 *
 * @throws GoodBasisError `file`, `name`, `shape`, `not-finite`
 */
export function sumOfTerms(place: Place, terms: readonly TermFile[], context: MatrixContext): Operator {
  const operators = terms.flatMap((term, k) => {
    const at = inside(place, k);
    return instances(at, term).map((instance) => readTerm(at, instance, context));
  });
  if (operators.length > 0) return atPlace(place, () => Operator.sum(...operators));
  if (context.n !== undefined) return Operator.zero(context.n);
  throw fileError(place, "at least one term", "an empty list");
}

/** The term once for every bond. */
function instances(place: Place, term: TermFile): TermFile[] {
  const { bonds, ...rest } = term;
  if (bonds === undefined) return [rest];
  const names = [...(term.product ?? []), ...(term.dot ?? [])];
  if (!names.some((name) => /\[[ij]\]/.test(name))) {
    throw fileError(place, 'names with "[i]" and "[j]", as bonds are given', showValue(names));
  }
  return bonds.map(([i, j]) => {
    const at = (name: string): string => name.replaceAll("[i]", `[${i}]`).replaceAll("[j]", `[${j}]`);
    return {
      ...rest,
      ...(term.product === undefined ? {} : { product: term.product.map(at) }),
      ...(term.dot === undefined ? {} : { dot: [at(term.dot[0]), at(term.dot[1])] as const }),
    };
  });
}

function readTerm(place: Place, term: TermFile, context: MatrixContext): Operator {
  const operator = readProduct(place, term, context);
  return term.coefficient === undefined ? operator : scaled(inside(place, "coefficient"), term.coefficient, operator);
}

function readProduct(place: Place, term: TermFile, context: MatrixContext): Operator {
  const { product, dot } = term;
  if ((product === undefined) === (dot === undefined)) {
    throw fileError(place, 'either "product" or "dot"', showValue(term));
  }
  if (dot !== undefined) return scalarProduct(inside(place, "dot"), dot, context);
  const at = inside(place, "product");
  const factors = (product ?? []).map((name, k) => operatorByName(inside(at, k), name, context));
  const [first, ...others] = factors;
  if (first !== undefined) return atPlace(at, () => others.reduce((result, factor) => result.times(factor), first));
  if (context.n === undefined) throw fileError(at, "at least one operator", "an empty list");
  return Operator.identity(context.n);
}

/** A·B = A_z B_z + (A₊B₋ + A₋B₊)/2, whether A and B commute or not. */
function scalarProduct(place: Place, names: readonly [string, string], context: MatrixContext): Operator {
  const space = needSpace(place, context);
  const a = space.vector(inside(place, 0), names[0]);
  const b = space.vector(inside(place, 1), names[1]);
  const across = a.plus.times(b.minus).plus(a.minus.times(b.plus));
  return a.z.times(b.z).plus(across.scale(0.5));
}

function scaled(place: Place, coefficient: FileNumber, operator: Operator): Operator {
  if (isExactText(coefficient)) return operator.scale(readExact(place, coefficient));
  const z = readNumber(place, coefficient);
  if (isShort(z.re) && isShort(z.im)) return operator.scale(z);
  // As a matrix of one element the number carries the uncertainty of its last place into every product.
  return Operator.from({ re: [[z.re]], im: [[z.im]] }).kron(operator);
}

function isShort(x: number): boolean {
  return Number.isSafeInteger(x / SHORT);
}
