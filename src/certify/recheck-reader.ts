import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";

/** A value of a JSON document together with its path, and the types that it may be read as. */
export class Reader {
  readonly #value: unknown;
  readonly #path: string;

  constructor(value: unknown, path: string) {
    this.#value = value;
    this.#path = path;
  }

  /** The error that says what was expected here and what came. */
  malformed(expected: string, got: string = shown(this.#value)): GoodBasisError {
    const place = this.#path === "" ? "the top" : this.#path;
    return new GoodBasisError(
      "file",
      `recheck: the certificate is malformed at ${place}: expected ${expected}, got ${got}; ` +
        "hand over what outcome.certificate() wrote, or its JSON",
      { path: this.#path, expected, got },
    );
  }

  /** The field of an object. */
  field(name: string): Reader {
    const value = Object.hasOwn(this.#object(), name) ? Reflect.get(this.#object(), name) : undefined;
    return new Reader(value, join(this.#path, name));
  }

  /** Whether an object has a field. */
  has(name: string): boolean {
    return Object.hasOwn(this.#object(), name);
  }

  /** Refuses an object with any field but these. */
  only(names: readonly string[]): void {
    for (const name of Object.keys(this.#object())) {
      if (!names.includes(name))
        throw new Reader(this.field(name).#value, join(this.#path, name)).malformed("no such field");
    }
  }

  /** All fields of an object, read alike. */
  record<T>(read: (item: Reader) => T): Record<string, T> {
    return Object.fromEntries(Object.keys(this.#object()).map((name) => [name, read(this.field(name))]));
  }

  /** A list, its items read alike. */
  list<T>(read: (item: Reader) => T): T[] {
    if (!Array.isArray(this.#value)) throw this.malformed("a list");
    return Array.from(this.#value, (item: unknown, k) => read(new Reader(item, `${this.#path}[${k}]`)));
  }

  /** A list of finite numbers; the list itself, not a copy. */
  numbers(): readonly number[] {
    const value = this.#value;
    if (!Array.isArray(value)) throw this.malformed("a list of numbers");
    const bad = firstNoNumber(value);
    if (bad >= 0) throw new Reader(value[bad], `${this.#path}[${bad}]`).malformed("a finite number");
    return value;
  }

  /** A finite number. */
  number(): number {
    const value = this.#value;
    if (typeof value === "number" && Number.isFinite(value)) return value;
    throw this.malformed("a finite number");
  }

  /** A finite number from 0 on. */
  bound(): number {
    const value = this.number();
    if (value >= 0) return value;
    throw this.malformed("a number that is not negative");
  }

  /** A whole number from a smallest one on. */
  count(least: number): number {
    const value = this.number();
    if (Number.isSafeInteger(value) && value >= least) return value;
    throw this.malformed(`a whole number from ${least} on`);
  }

  /** A text. */
  text(): string {
    const value = this.#value;
    if (typeof value === "string") return value;
    throw this.malformed("a text");
  }

  /** True or false. */
  boolean(): boolean {
    const value = this.#value;
    if (typeof value === "boolean") return value;
    throw this.malformed("true or false");
  }

  /** Null, or what else is read. */
  orNull<T>(read: (item: Reader) => T): T | null {
    return this.#value === null ? null : read(this);
  }

  /** Whether this is a text. */
  isText(): boolean {
    return typeof this.#value === "string";
  }

  /** One of a few texts. */
  choice<T extends string>(texts: readonly T[]): T {
    const found = texts.find((text) => text === this.#value);
    if (found !== undefined) return found;
    throw this.malformed(texts.map((text) => `"${text}"`).join(" or "));
  }

  /** One of a few numbers. */
  numberChoice<T extends number>(numbers: readonly T[]): T {
    const found = numbers.find((x) => x === this.#value);
    if (found !== undefined) return found;
    throw this.malformed(numbers.join(" or "));
  }

  #object(): object {
    const value = this.#value;
    if (typeof value === "object" && value !== null && !Array.isArray(value)) return value;
    throw this.malformed("an object");
  }
}

function firstNoNumber(list: readonly unknown[]): number {
  for (let k = 0; k < list.length; k++) {
    const x = list[k];
    if (typeof x !== "number" || !Number.isFinite(x)) return k;
  }
  return -1;
}

/** The path of a field: with a dot where the name is a plain word, in brackets otherwise. */
export function join(path: string, name: string): string {
  if (!/^[\p{L}_$][\p{L}\p{N}_$]*$/u.test(name)) return `${path}[${JSON.stringify(name)}]`;
  return path === "" ? name : `${path}.${name}`;
}

/**
 * A certificate that was handed over as text, parsed; anything else as it is.
 *
 * @throws GoodBasisError `file` - text that is not JSON
 */
export function parsedCertificate(certificate: unknown): unknown {
  if (typeof certificate !== "string") return certificate;
  try {
    return JSON.parse(certificate.replace(/^\uFEFF/, ""));
  } catch (error) {
    const reason = error instanceof Error ? error.message : String(error);
    const message = `recheck: the certificate is text that is not JSON (${reason}); hand over what outcome.certificate() wrote, or its JSON`;
    throw new GoodBasisError("file", message, { path: "" });
  }
}
