/** A place in a JSON document: keys of objects and indices of arrays, outermost first. */
export type JsonPath = readonly (string | number)[];

/** What is wrong with a text that is not JSON, and where. */
export interface JsonFault {
  /** Offset into the text, in UTF-16 units. */
  readonly offset: number;
  readonly expected: string;
  readonly came: string;
}

const NUMBER = /-?(?:0|[1-9]\d*)(?:\.\d+)?(?:[eE][+-]?\d+)?/y;
const STRING = /"[ !#-[\]-\uffff]*(?:\\(?:["\\/bfnrt]|u[0-9a-fA-F]{4})[ !#-[\]-\uffff]*)*"/y;
const SPACE = /[ \t\r\n]*/y;
const WORD = /true|false|null/y;
const DEEPEST = 200;

/**
 * The first fault of a JSON text (RFC 8259), or nothing. An object that names a key twice is a fault too: one of the two would
 * be lost without a word.
 *
 * @param text - the document
 */
export function jsonFault(text: string): JsonFault | undefined {
  try {
    new Scanner(text, undefined).document();
    return undefined;
  } catch (error) {
    if (error instanceof Stop) return error.fault;
    throw error;
  }
}

/**
 * Where the value at `path` begins; where there is none, where the innermost value that contains the place begins.
 *
 * @param text - a faultless JSON document
 * @param path - the place sought
 * @returns an offset into the text
 */
export function offsetOf(text: string, path: JsonPath): number {
  const scanner = new Scanner(text, path);
  scanner.document();
  return scanner.found;
}

/**
 * Line and column, counted from 1, of an offset into a text.
 *
 * @param text - the text
 * @param offset - in UTF-16 units
 */
export function lineAndColumn(text: string, offset: number): { line: number; column: number } {
  const before = text.slice(0, offset).split(/\r\n|\n|\r/);
  return { line: before.length, column: (before.at(-1)?.length ?? 0) + 1 };
}

/** Ends a scan. */
class Stop extends Error {
  readonly fault: JsonFault;

  constructor(fault: JsonFault) {
    super(fault.expected);
    this.fault = fault;
  }
}

/** Walks over a JSON text once; values are not kept. */
class Scanner {
  /** Offset of the deepest value on the way to the target. */
  found = 0;
  readonly #text: string;
  readonly #target: JsonPath | undefined;
  #at = 0;

  constructor(text: string, target: JsonPath | undefined) {
    this.#text = text;
    this.#target = target;
  }

  document(): void {
    if (this.#text.startsWith("\uFEFF")) this.#at = 1;
    this.#value(0, true);
    this.#skip(SPACE);
    if (this.#at < this.#text.length) this.#fail("the end of the file");
  }

  /** Reads a value; `onWay` says that all keys so far are those of the target. */
  #value(depth: number, onWay: boolean): void {
    this.#skip(SPACE);
    if (onWay) this.found = this.#at;
    if (depth > DEEPEST) this.#fail(`at most ${DEEPEST} levels of nesting`);
    const sign = this.#text[this.#at];
    if (sign === "{") this.#object(depth, onWay);
    else if (sign === "[") this.#array(depth, onWay);
    else if (!this.#skip(NUMBER) && !this.#skip(STRING) && !this.#skip(WORD)) this.#fail("a JSON value");
  }

  #object(depth: number, onWay: boolean): void {
    const seen = new Set<string>();
    this.#at++;
    if (this.#take("}")) return;
    do {
      this.#skip(SPACE);
      const start = this.#at;
      if (!this.#skip(STRING)) this.#fail('a key in double quotes (no comma before "}")');
      const key = String(JSON.parse(this.#text.slice(start, this.#at)));
      if (seen.has(key)) {
        throw new Stop({ offset: start, expected: "every key once", came: `"${key}" again` });
      }
      seen.add(key);
      if (!this.#take(":")) this.#fail(`":" after the key "${key}"`);
      this.#value(depth + 1, onWay && this.#target?.[depth] === key);
    } while (this.#take(","));
    if (!this.#take("}")) this.#fail('"," or "}"');
  }

  #array(depth: number, onWay: boolean): void {
    this.#at++;
    if (this.#take("]")) return;
    let index = 0;
    do this.#value(depth + 1, onWay && this.#target?.[depth] === index++);
    while (this.#take(","));
    if (!this.#take("]")) this.#fail('"," or "]"');
  }

  /** Steps over white space and one sign, if it is there. */
  #take(sign: string): boolean {
    this.#skip(SPACE);
    if (this.#text[this.#at] !== sign) return false;
    this.#at++;
    return true;
  }

  #skip(pattern: RegExp): boolean {
    pattern.lastIndex = this.#at;
    if (!pattern.test(this.#text)) return false;
    this.#at = pattern.lastIndex;
    return true;
  }

  #fail(expected: string): never {
    const rest = /^[^\s,:[\]{}]{1,20}|^./su.exec(this.#text.slice(this.#at, this.#at + 24));
    const came = rest === null ? "the end of the file" : `"${rest[0]}"`;
    throw new Stop({ offset: this.#at, expected, came });
  }
}
