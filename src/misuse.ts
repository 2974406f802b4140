import { GoodBasisError } from "./errors.js";

/** Longest value shown in full in a message. */
const LONGEST = 60;

/** Any value in few words, for messages: numbers and short data as they are, text in quotes, everything else by its kind. */
export function shown(value: unknown): string {
  switch (typeof value) {
    case "undefined":
      return "nothing";
    case "bigint":
      return `${value}n, a bigint`;
    case "symbol":
      return "a symbol";
    case "function":
      return "a function";
    case "number":
    case "boolean":
      return String(value);
    case "string":
      return cut(JSON.stringify(value));
    case "object":
      return value === null ? "null" : shownObject(value);
    default:
      return typeof value;
  }
}

function shownObject(value: object): string {
  const kind: unknown = value.constructor?.name;
  if (!Array.isArray(value) && kind !== "Object" && kind !== undefined) return `an object of class ${String(kind)}`;
  try {
    return cut(JSON.stringify(value));
  } catch {
    // a circle, a bigint inside, or a toJSON that throws
    return Array.isArray(value) ? `an array of ${value.length}` : "an object";
  }
}

function cut(text: string): string {
  return text.length > LONGEST ? `${text.slice(0, LONGEST - 3)}…` : text;
}

/** `; did you mean "candidates"?` where a known name is close to a wrong one, else nothing. */
export function didYouMean(wrong: string, known: readonly string[]): string {
  const small = wrong.toLowerCase();
  const ranked = known
    .map((name) => ({ name, steps: distance(small, name.toLowerCase()) }))
    .sort((a, b) => a.steps - b.steps);
  const [best] = ranked;
  if (best === undefined || best.steps > Math.max(1, Math.floor(Math.min(small.length, best.name.length) / 3)))
    return "";
  return `; did you mean "${best.name}"?`;
}

/** Least number of letters inserted, left out, changed or swapped with a neighbour (Levenshtein's distance with swaps). */
function distance(a: string, b: string): number {
  let before: readonly number[] = [];
  let row: readonly number[] = Array.from({ length: b.length + 1 }, (_, k) => k);
  for (let i = 0; i < a.length; i++) {
    const next = [i + 1];
    for (let j = 0; j < b.length; j++) {
      const change = (row[j] as number) + (a[i] === b[j] ? 0 : 1);
      const swap = i > 0 && j > 0 && a[i] === b[j - 1] && a[i - 1] === b[j] ? (before[j - 1] as number) + 1 : change;
      next.push(Math.min(change, swap, (row[j + 1] as number) + 1, (next[j] as number) + 1));
    }
    before = row;
    row = next;
  }
  return row[b.length] as number;
}

/**
 * Refuses fields that are not known, which would be passed over in silence.
 *
 * @param whose - what has the fields, at the beginning of the message
 * @param given - the object
 * @param known - the fields that it may have
 * @throws GoodBasisError `option`
 */
export function requireKnown(whose: string, given: object, known: readonly string[]): void {
  const unknown = Object.keys(given).find((name) => !known.includes(name));
  if (unknown === undefined) return;
  const guess = didYouMean(unknown, known);
  const message = `${whose} has no field "${unknown}"${guess === "" ? ";" : guess} there are ${known.join(", ")}`;
  throw new GoodBasisError("option", message, { field: unknown, known });
}

/**
 * Refuses options that are no object, have a name that is not known, or hold null, a bigint or a symbol: only what is left out or
 * undefined takes its default.
 *
 * @param verb - the function, for the message
 * @param known - the names of its options
 * @throws GoodBasisError `option`
 */
export function requireOptions(verb: string, options: unknown, known: readonly string[]): void {
  if (typeof options !== "object" || options === null || Array.isArray(options)) {
    const message = `${verb}: options is ${shown(options)}; give an object such as {}, or leave it out`;
    throw new GoodBasisError("option", message, { options });
  }
  for (const [name, value] of Object.entries(options)) {
    if (!known.includes(name)) {
      const guess = didYouMean(name, known);
      const next = `the options are ${known.join(", ")}`;
      const message = `${verb}: there is no option "${name}"${guess === "" ? ";" : guess} ${next}`;
      throw new GoodBasisError("option", message, { option: name });
    }
    if (value === null || typeof value === "bigint" || typeof value === "symbol") {
      const message = `${verb}: the option ${name} is ${shown(value)}; give a value, or leave it out for its default`;
      throw new GoodBasisError("option", message, { option: name });
    }
  }
}

/**
 * Refuses an argument that is not what the caller's types would have demanded.
 *
 * @param good - whether it is
 * @param verb - the function, for the message
 * @param expected - a phrase that follows "expected"
 * @param came - the argument
 * @param next - what to do
 * @throws GoodBasisError `option`
 */
export function requireArgument(good: boolean, verb: string, expected: string, came: unknown, next: string): void {
  if (good) return;
  throw new GoodBasisError("option", `${verb}: expected ${expected}, got ${shown(came)}; ${next}`, { came });
}

/** A non-null object, of any kind. */
export function isObject(value: unknown): value is object {
  return typeof value === "object" && value !== null;
}
