import type { ExactBudget } from "../exact/budget.js";
import { type FieldRoots, fieldRoots } from "../exact/field-roots.js";
import type { Polynomial } from "../exact/polynomial.js";
import { isolate, type RootBounds } from "./roots.js";

/** Polynomials whose roots have been looked for: sectors that a symmetry links have the same ones. */
export class RootCache {
  readonly #field = new Map<string, FieldRoots>();
  readonly #bounds = new Map<string, readonly RootBounds[]>();

  /** {@link fieldRoots}, once for each polynomial. @throws GoodBasisError `budget` */
  field(p: Polynomial, budget: ExactBudget): FieldRoots {
    return once(this.#field, p, () => fieldRoots(p, budget));
  }

  /** {@link isolate}, once for each polynomial. @throws GoodBasisError `budget` */
  bounds(p: Polynomial): readonly RootBounds[] {
    return once(this.#bounds, p, () => isolate(p));
  }
}

function once<T>(known: Map<string, T>, p: Polynomial, find: () => T): T {
  const key = p.map((c) => c.text()).join(" ");
  const found = known.get(key) ?? find();
  known.set(key, found);
  return found;
}
