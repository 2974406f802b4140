import * as v from "valibot";
import { type FileNumber, NUMBER_TEXT } from "./numbers.js";

/** A schema for values of one type, whatever it is made of. */
export type Shape<T> = v.GenericSchema<unknown, T>;

/** How the refusal of an unknown field begins; the known ones follow, by commas. */
export const NO_OTHER_FIELDS = "no other fields than ";

/**
 * An object with these fields and no others; what is wrong with it is said in terms of its fields.
 *
 * Custom messages of all schemas here are phrases that follow "expected".
 */
export function closed<const T extends v.ObjectEntries>(
  entries: T,
): v.StrictObjectSchema<T, (issue: v.StrictObjectIssue) => string> {
  const known = Object.keys(entries).join(", ");
  return v.strictObject(entries, (issue) => {
    if (issue.expected === "never") return `${NO_OTHER_FIELDS}${known}`;
    return issue.expected === "Object" ? `an object with the fields ${known}` : `the field ${issue.expected}`;
  });
}

/** A field that says what it is for. */
export function about<T>(schema: Shape<T>, description: string): Shape<T> {
  return v.pipe(schema, v.description(description));
}

/** 1, 2, 3, … */
export const positiveWhole: Shape<number> = v.pipe(
  v.number("a whole number from 1 on"),
  v.integer("a whole number from 1 on"),
  v.minValue(1, "a whole number from 1 on"),
);

/** 0, 1, 2, … */
export const index: Shape<number> = v.pipe(
  v.number("a whole number from 0 on"),
  v.integer("a whole number from 0 on"),
  v.minValue(0, "a whole number from 0 on"),
);

/** A finite number. */
export const finite: Shape<number> = v.pipe(v.number("a finite number"), v.finite("a finite number"));

/** A finite number above 0. */
export const positive: Shape<number> = v.pipe(
  v.number("a number above 0"),
  v.finite("a number above 0"),
  v.gtValue(0, "a number above 0"),
);

/** A finite number from 0 on. */
export const notNegative: Shape<number> = v.pipe(
  v.number("a number from 0 on"),
  v.finite("a number from 0 on"),
  v.minValue(0, "a number from 0 on"),
);

/** Text that is not empty. */
export const someText: Shape<string> = v.pipe(
  v.string("text in double quotes"),
  v.minLength(1, "text that is not empty"),
);

const NUMBER_FORM = 'a number, [re, im] or text such as "1+2i" or "sqrt(2/3)"';

/** The text of a number. */
const numberText: Shape<string> = v.pipe(v.string(), v.regex(NUMBER_TEXT, NUMBER_FORM));

/** A real number, or any number as text. */
export const numberOrText: Shape<number | string> = v.union([v.number(), numberText], NUMBER_FORM);

/** A real or complex number. */
export const fileNumber: Shape<FileNumber> = v.pipe(
  v.union([v.number(NUMBER_FORM), v.strictTuple([v.number(), v.number()]), numberText], NUMBER_FORM),
  v.description(
    'A real number, [re, im], or text such as "1+2i" or "sqrt(2/3)". Decimals are as well known as their digits say. A text ' +
      "with a fraction, a root or a product is exact; where one entry of a matrix is, all its texts are exact, and its numbers " +
      "count as the doubles that they are.",
  ),
);

/** Two sites. */
export const bond: Shape<[number, number]> = v.strictTuple([index, index], "a pair [i, j] of sites, counted from 0");

/** An object whose keys are the caller's; its values are not looked into. */
export const namedThings: Shape<Record<string, unknown>> = v.custom<Record<string, unknown>>(
  (value) => typeof value === "object" && value !== null && !Array.isArray(value),
  "an object of named entries",
);

/** A list that a plain loop will look into. */
export const anyList: Shape<unknown[]> = v.custom<unknown[]>(Array.isArray, "a list [ … ]");
