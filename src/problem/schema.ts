import * as v from "valibot";
import { COMPLEX_TEXT, type FileNumber } from "./numbers.js";
import { fileError, inside, type Place, showValue } from "./place.js";

/** Version of the problem file format that this library reads and writes. */
export const PROBLEM_FORMAT_VERSION = 1;

const HELP = "the format is described by goodbasis/problem-schema.json";

/** An object without other fields than these. */
function closed<const T extends v.ObjectEntries>(entries: T): v.StrictObjectSchema<T, (issue: v.StrictObjectIssue) => string> {
  const known = Object.keys(entries).join(", ");
  return v.strictObject(entries, (issue) => (issue.expected === "never" ? `one of the fields ${known}` : ""));
}

const count = v.pipe(v.number(), v.safeInteger(), v.minValue(1));
const index = v.pipe(v.number(), v.safeInteger(), v.minValue(0));
const finite = v.pipe(v.number(), v.finite());
const positive = v.pipe(v.number(), v.finite(), v.gtValue(0));
const notNegative = v.pipe(v.number(), v.finite(), v.minValue(0));
const someText = v.pipe(v.string(), v.minLength(1));
const factorName = v.pipe(
  v.string(),
  v.regex(/^[\p{L}_][\p{L}\p{N}_]*$/u, "a name of letters, digits and _"),
  v.description("How terms name the factor: letters, digits and _."),
);
const fileNumber = v.pipe(
  v.union([
    v.number(),
    v.tuple([v.number(), v.number()]),
    v.pipe(v.string(), v.regex(COMPLEX_TEXT)),
  ]),
  v.description('A real number, [re, im], or text such as "1+2i".'),
);
const bond = v.pipe(v.tuple([index, index]), v.description("Two sites, counted from 0."));

const factorForms = [
  v.pipe(
    closed({
      name: factorName,
      spin: v.pipe(
        v.union([v.number(), v.string()]),
        v.description('The angular momentum: 1, 0.5, "1/2", "3/2". Operators: x, y, z, plus, minus, squared.'),
      ),
      count: v.exactOptional(v.pipe(count, v.description("Number of equal sites, named spin[0], spin[1], …"))),
      kets: v.exactOptional(v.pipe(v.array(someText), v.description("Names of the kets of one site, m descending."))),
    }),
    v.title("angular momentum"),
  ),
  v.pipe(
    closed({
      name: factorName,
      oscillator: v.pipe(
        count,
        v.description("Number of kets |0⟩, |1⟩, … Operators: a, adagger, number, x, p, parity, and exact powers x^k."),
      ),
      count: v.exactOptional(count),
      kets: v.exactOptional(v.array(someText)),
    }),
    v.title("oscillator"),
  ),
  v.pipe(
    closed({
      name: factorName,
      dimension: v.pipe(count, v.description("Number of kets. Operators: |a><b| by the names of its kets.")),
      count: v.exactOptional(count),
      kets: v.exactOptional(v.array(someText)),
    }),
    v.title("any finite space"),
  ),
];
const factorKeys = ["spin", "oscillator", "dimension"];

const uncertainty = v.pipe(
  v.union([
    v.literal("exact"),
    closed({ relative: v.exactOptional(notNegative), absolute: v.exactOptional(notNegative) }),
  ]),
  v.description(
    "How well the entries are known: exact, or every stored entry to within relative · |entry| + absolute. When not given, " +
      "half a unit in the last place of each.",
  ),
);
const on = v.pipe(
  someText,
  v.description('The factor that the matrix acts on ("L", "ring", "ring[2]"); the whole space when not given.'),
);

const operatorNames = v.pipe(
  v.array(someText),
  v.description('Operators by name, applied from the right: "L.x", "ring[3].z", "x.x^4", "atom.|e><g|", or a defined one.'),
);

const term = v.pipe(
  closed({
    coefficient: v.exactOptional(fileNumber),
    product: v.exactOptional(operatorNames),
    dot: v.exactOptional(
      v.pipe(
        v.tuple([someText, someText]),
        v.description('The scalar product of two angular momenta, each a factor or a sum: ["L", "S"], ["L + S", "L + S"].'),
      ),
    ),
    bonds: v.exactOptional(
      v.pipe(
        v.array(bond),
        v.description('Repeats the term for every pair [i, j]; "ring[i].z" and "ring[j].z" stand for its two sites.'),
      ),
    ),
  }),
  v.description("coefficient (1 when not given) times a product of operators or a scalar product; exactly one of the two."),
);

/**
 * All forms of a matrix by the key that tells them apart. With `checked` false long lists are taken as they are: plain loops
 * read them.
 */
function matrixForms(checked: boolean) {
  const list = <T>(item: v.GenericSchema<T>) => (checked ? v.array(item) : v.custom<T[]>(Array.isArray));
  const shared = { on: v.exactOptional(on), uncertainty: v.exactOptional(uncertainty) };
  return {
    rows: closed({ rows: list(v.array(fileNumber)), ...shared }),
    triplets: closed({
      triplets: v.pipe(
        list(v.union([v.tuple([index, index, v.number()]), v.tuple([index, index, v.number(), v.number()])])),
        v.description("[row, column, re] or [row, column, re, im], counted from 0; repeated places are summed."),
      ),
      n: v.exactOptional(v.pipe(count, v.description("Number of kets, where nothing else tells it."))),
      radii: v.exactOptional(
        v.pipe(list(notNegative), v.description("A bound on the error of each triplet; places must not repeat.")),
      ),
      ...shared,
    }),
    diagonal: closed({ diagonal: list(fileNumber), ...shared }),
    permutation: closed({
      permutation: v.pipe(list(index), v.description("Ket j goes to ket permutation[j], times phases[j].")),
      phases: v.exactOptional(list(fileNumber)),
      ...shared,
    }),
    matrixMarket: closed({
      matrixMarket: v.pipe(someText, v.description("A Matrix Market file, beside the problem file.")),
      ...shared,
    }),
    terms: closed({ terms: v.array(term), uncertainty: v.exactOptional(uncertainty) }),
    hopping: closed({
      hopping: v.pipe(v.array(bond), v.description("Σ t |i⟩⟨j| + t* |j⟩⟨i| over these bonds.")),
      amplitude: v.exactOptional(v.pipe(fileNumber, v.description("t for every bond; 1 when not given."))),
      amplitudes: v.exactOptional(v.pipe(v.array(fileNumber), v.description("t for each bond."))),
      ...shared,
    }),
    translation: closed({
      translation: v.pipe(someText, v.description("The content of site s of this factor moves to site s + 1.")),
    }),
    reflection: closed({
      reflection: v.pipe(someText, v.description("The content of site s of this factor moves to site centre − s.")),
      centre: v.exactOptional(index),
    }),
    sitePermutation: closed({
      sitePermutation: v.pipe(v.array(index), v.description("The content of site s moves to site sitePermutation[s].")),
      on: on,
    }),
    exchange: closed({
      exchange: v.pipe(
        v.tuple([someText, someText]),
        v.description('Exchanges two equal factors or sites: ["x", "y"], ["ring[0]", "ring[3]"].'),
      ),
    }),
  };
}

const checkedForms = matrixForms(true);
const quickForms = matrixForms(false);

/** A matrix as an object, by form. */
export type MatrixObject = {
  readonly [K in keyof typeof FORM_NAMES]: { readonly form: K } & FormFields[K];
}[keyof typeof FORM_NAMES];

/** The form keys, in the order in which messages list them. */
export const FORM_NAMES = {
  rows: true,
  triplets: true,
  diagonal: true,
  permutation: true,
  matrixMarket: true,
  terms: true,
  hopping: true,
  translation: true,
  reflection: true,
  sitePermutation: true,
  exchange: true,
} as const;
