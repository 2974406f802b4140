import { Operator } from "../operator/operator.js";
import { atPlace, fileError, nameError, type Place } from "./place.js";
import type { Space } from "./space.js";

/** What the matrices of a file may refer to. */
export interface MatrixContext {
  readonly space: Space | undefined;
  /** Number of kets, as far as it is known before any matrix is read. */
  readonly n: number | undefined;
  /** Operators defined so far. */
  readonly defined: ReadonlyMap<string, Operator>;
  readonly loadMatrix: ((path: string) => string) | undefined;
}

/**
 * An operator on the whole space by name: a defined one, "identity", or one of a factor.
 *
 * @throws GoodBasisError `name`
 */
export function operatorByName(place: Place, name: string, context: MatrixContext): Operator {
  const [, base = name, exponent] = /^([^.]+)\^(\d+)$/.exec(name) ?? [];
  const own = context.defined.get(base);
  if (own !== undefined) return exponent === undefined ? own : own.power(Number(exponent));
  if (name === "identity" && context.n !== undefined) return Operator.identity(context.n);
  if (context.space !== undefined && name.includes(".")) return context.space.operator(place, name);
  const defined = [...context.defined.keys()].join(", ") || "nothing";
  const factors = context.space === undefined ? "no space with factors is given" : context.space.summary;
  throw nameError(place, name, `defined before it: ${defined}; ${factors}, with operators such as "L.x"`);
}

/**
 * The parts of a sum of names; the plus signs have spaces around them.
 */
function partsOfSum(text: string): string[] {
  return text.split(/\s\+\s/).map((part) => part.trim());
}

/**
 * An operator or a sum of operators by name: "Lz", "L.z + S.z".
 *
 * @throws GoodBasisError `name`, `shape`
 */
export function sumOfNames(place: Place, text: string, context: MatrixContext): Operator {
  return atPlace(place, () => Operator.sum(...partsOfSum(text).map((name) => operatorByName(place, name, context))));
}

/**
 * The space, for what cannot do without.
 *
 * @throws GoodBasisError `file`
 */
export function needSpace(place: Place, context: MatrixContext): Space {
  if (context.space !== undefined) return context.space;
  throw fileError(place, 'a "space" with factors in the file, which this form refers to', "none");
}
