import { requireArgument } from "../misuse.js";
import { ExactOperator } from "./operator.js";
import { Surd } from "./surd.js";
import { ExactVector } from "./vector.js";

/** What plain JavaScript may hand to the functions on exact numbers, refused with an error that says what belongs there. */

/** @throws GoodBasisError `option` */
export function requireOperator(verb: string, came: unknown): void {
  const next = "make one with ExactOperator.from, or take the exact of an Operator";
  requireArgument(came instanceof ExactOperator, verb, "an ExactOperator", came, next);
}

/** @throws GoodBasisError `option` */
export function requireVector(verb: string, came: unknown): void {
  requireArgument(came instanceof ExactVector, verb, "an ExactVector", came, "make one with ExactVector.from");
}

/** @throws GoodBasisError `option` */
export function requireVectors(verb: string, came: unknown): void {
  const good = Array.isArray(came) && came.every((vector) => vector instanceof ExactVector);
  requireArgument(good, verb, "a list of ExactVectors", came, "make each with ExactVector.from");
}

/** @throws GoodBasisError `option` */
export function requireNumbers(verb: string, came: unknown): void {
  const good = Array.isArray(came) && came.every((x) => x instanceof Surd);
  requireArgument(good, verb, "a list of Surds", came, "make each with Surd.from");
}
