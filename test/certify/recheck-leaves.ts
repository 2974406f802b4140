/** A leaf of a JSON document: its path as the re-check writes it, and the keys that lead to it. */
export interface Leaf {
  readonly path: string;
  readonly keys: readonly (string | number)[];
  readonly value: string | number | boolean | null;
}

/** All leaves of a JSON document, in order. */
export function leavesOf(value: unknown, keys: readonly (string | number)[] = []): Leaf[] {
  if (Array.isArray(value)) return value.flatMap((item: unknown, k) => leavesOf(item, [...keys, k]));
  if (typeof value === "object" && value !== null) {
    return Object.entries(value).flatMap(([key, item]) => leavesOf(item, [...keys, key]));
  }
  if (value === null || typeof value === "string" || typeof value === "number" || typeof value === "boolean") {
    return [{ path: pathOf(keys), keys, value }];
  }
  throw new TypeError(`not JSON: ${typeof value}`);
}

function pathOf(keys: readonly (string | number)[]): string {
  return keys.reduce<string>((path, key) => {
    if (typeof key === "number") return `${path}[${key}]`;
    return path === "" ? key : `${path}.${key}`;
  }, "");
}

/** A deep copy with one leaf replaced. */
export function replaced(document: unknown, keys: readonly (string | number)[], value: unknown): unknown {
  const [key, ...rest] = keys;
  if (key === undefined) return value;
  if (Array.isArray(document)) {
    return document.map((item: unknown, k) => (k === key ? replaced(item, rest, value) : item));
  }
  if (typeof document !== "object" || document === null) throw new TypeError(`nothing at ${key}`);
  return Object.fromEntries(
    Object.entries(document).map(([name, item]) => [name, name === key ? replaced(item, rest, value) : item]),
  );
}
