import { GoodBasisError } from "../errors.js";
import type { BasisState, LevelResult, Study } from "./findings.js";
import type { StudyInternals } from "./internals.js";

/** Known to this module alone: without it no certified basis can be made. */
const KEY: unique symbol = Symbol("certified");

const internalsOf = new WeakMap<object, StudyInternals>();

/**
 * A basis that has been proved good for V.
 *
 * Only {@link findGoodBasis} makes one: look-alikes neither compile nor pass at run time.
 */
class CertifiedBasis<K extends string = string> {
  readonly #study: Study<K>;

  constructor(key: typeof KEY, study: Study<K>) {
    if (key !== KEY) {
      throw new GoodBasisError(
        "not-certified",
        'a good basis cannot be constructed; take outcome.basis from findGoodBasis when outcome.verdict is "good"',
      );
    }
    this.#study = study;
  }

  /** The states studied, level by level. */
  get states(): readonly BasisState<K>[] {
    return this.#study.states;
  }

  /** The levels studied, by ascending energy. */
  get levels(): readonly LevelResult[] {
    return this.#study.levels;
  }

  /** Everything found on the way. */
  get study(): Study<K> {
    return this.#study;
  }
}

/** A basis that has been proved good for V; see {@link findGoodBasis}. Its constructor is private to the library. */
export type GoodBasis<K extends string = string> = CertifiedBasis<K>;

/** Freezes an object with everything in it, except what typed arrays and maps hold, which cannot be frozen. */
function freezeDeeply(value: object): void {
  if (ArrayBuffer.isView(value) || Object.isFrozen(value)) return;
  Object.freeze(value);
  for (const item of Array.isArray(value) ? value : Object.values(value)) {
    if (typeof item === "object" && item !== null) freezeDeeply(item);
  }
}

/** Makes a certified basis; called where the verdict is given and nowhere else. */
export function certifyBasis<K extends string>(study: Study<K>, internals: StudyInternals): GoodBasis<K> {
  const basis = new CertifiedBasis(KEY, study);
  internalsOf.set(basis, internals);
  for (const state of study.states) {
    // its vector is a copy each time
    for (const part of [state.labels, state.shifts, state.safe]) freezeDeeply(part);
    Object.freeze(state);
  }
  Object.freeze(study.states);
  const { levels, whole, audit, tree, sets, perturbations, candidates } = study;
  for (const part of [levels, whole, audit, tree, sets, perturbations, candidates]) freezeDeeply(part);
  Object.freeze(study);
  Object.freeze(basis);
  return basis;
}

/**
 * The working data behind a certified basis.
 *
 * @throws GoodBasisError `not-certified` for any other object
 */
export function requireCertified(what: string, basis: unknown): StudyInternals {
  const internals = typeof basis === "object" && basis !== null ? internalsOf.get(basis) : undefined;
  if (internals !== undefined) return internals;
  throw new GoodBasisError(
    "not-certified",
    `${what} takes a basis that findGoodBasis has proved good; check that outcome.verdict is "good" and pass outcome.basis`,
  );
}
