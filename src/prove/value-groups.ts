import type { Surd } from "../exact/surd.js";

/**
 * Collects things under exact numbers. Equal numbers round to the same doubles, so only numbers under one pair of
 * doubles are compared exactly.
 */
export class ValueGroups<T> {
  readonly #buckets = new Map<string, { readonly value: Surd; readonly items: T[] }[]>();
  readonly #groups: { readonly value: Surd; readonly items: T[] }[] = [];

  /** Adds something under a number and returns the number of its group. */
  add(value: Surd, item: T): void {
    const { re, im } = value.toComplex();
    const key = `${re} ${im}`;
    const bucket = this.#buckets.get(key) ?? [];
    this.#buckets.set(key, bucket);
    const group = bucket.find((other) => other.value.equals(value));
    if (group !== undefined) {
      group.items.push(item);
      return;
    }
    const fresh = { value, items: [item] };
    bucket.push(fresh);
    this.#groups.push(fresh);
  }

  /** The groups in the order of their first members. */
  get list(): readonly { readonly value: Surd; readonly items: readonly T[] }[] {
    return this.#groups;
  }
}
