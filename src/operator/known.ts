import { GoodBasisError } from "../errors.js";
import { ExactOperator } from "../exact/operator.js";
import { Surd, type SurdInput } from "../exact/surd.js";
import { type Complex, isScalar } from "../numerics/complex.js";
import { roundUp } from "../numerics/rounding.js";
import { uncertainKron, uncertainScale } from "./arithmetic.js";
import { requireScalar } from "./checks.js";
import { Companion } from "./companion.js";
import { exactNumber, isExactEntry, shadowOf } from "./exact-input.js";
import type { Radius, Uncertain } from "./radius.js";
import { type MatrixData, readMatrix, type Uncertainty, withUncertainty } from "./read.js";

/** A matrix of doubles with radii, and what it is exactly, where that is known beyond the doubles. */
export interface Known {
  readonly core: Uncertain;
  readonly companion: Companion | undefined;
}

/**
 * Reads a matrix of plain or exact numbers in any form.
 *
 * Exact entries are rounded correctly, with radius zero where that is no rounding at all. A stated uncertainty comes on top, and
 * then nothing is known exactly any more; `"exact"` states what they are anyway.
 *
 * @throws GoodBasisError what {@link readMatrix}, {@link withUncertainty} and `Surd.from` throw
 */
export function readKnown(verb: string, input: unknown, uncertainty: Uncertainty | undefined): Known {
  const read = readPlain(verb, input);
  if (!(read instanceof ExactOperator)) {
    return { core: withUncertainty(verb, read, uncertainty), companion: undefined };
  }
  const core: Uncertain = read.toFloating();
  const stated = withUncertainty(verb, core, uncertainty === "exact" ? undefined : uncertainty);
  if (stated === core || !(stated.radius instanceof Float64Array)) return { core, companion: Companion.of(() => read) };
  return { core: { csr: core.csr, radius: together(stated.radius, core.radius) }, companion: undefined };
}

function together(a: Float64Array, b: Radius): Radius {
  return b instanceof Float64Array ? a.map((r, e) => roundUp(r + (b[e] as number))) : a;
}

/**
 * A matrix of plain numbers, or the exact operator that one with exact entries stands for. Those are looked for only where the
 * reader of plain numbers stumbles, so that plain matrices are read at full speed.
 *
 * @throws GoodBasisError what {@link readMatrix} and `Surd.from` throw
 */
function readPlain(verb: string, input: unknown): Uncertain | ExactOperator {
  if (input instanceof ExactOperator) return input;
  try {
    return readMatrix(verb, input as MatrixData);
  } catch (error) {
    const shadow = error instanceof GoodBasisError ? shadowOf(input) : undefined;
    if (shadow === undefined) throw error;
    readMatrix(verb, shadow.input as MatrixData);
    return shadow.entries(verb);
  }
}

/** A factor: the nearest doubles, how far they are off, and the number itself. */
interface Factor {
  readonly core: Uncertain | undefined;
  readonly z: Complex;
  readonly exact: () => Surd;
}

/**
 * z A for a plain number, which counts as the very number that it is, or for an exact one.
 *
 * @param factor - a number, `{ re, im }`, text, `Surd`, `Fraction` or big integer
 * @param companion - what A is exactly
 * @throws GoodBasisError `option`, `not-finite`, `text`, `zero-division`
 */
export function scaleKnown(a: Uncertain, companion: Companion | undefined, factor: unknown): Known {
  const { core, z, exact } = readFactor(factor);
  return {
    core: core === undefined ? uncertainScale(a, z) : uncertainKron(core, a, "scale"),
    companion: companion && Companion.combined(companion, companion, (x) => x.scale(exact())),
  };
}

function readFactor(factor: unknown): Factor {
  if (isScalar(factor) || !isExactEntry(factor)) {
    const z = requireScalar("scale", factor);
    return { core: undefined, z, exact: () => Surd.from(z) };
  }
  const exact = exactNumber("scale", { factor: String(factor) }, factor as SurdInput);
  const z = requireScalar("scale", exact.toComplex());
  const { csr, radius } = ExactOperator.diagonal([exact]).toFloating();
  return { core: radius === "exact" ? undefined : { csr, radius }, z, exact: () => exact };
}
