import * as v from "valibot";
import type { LabelDeclaration } from "../audit/label-family.js";
import { didYouMean } from "../misuse.js";
import { anyMatrix, type MatrixSchemas, matrixSchemas } from "./matrix-schema.js";
import { fileError, inside, type Place, showValue } from "./place.js";
import type { CandidateFile, FactorFile, MatrixForms, ProblemOptions, ProblemOutline } from "./problem-file.js";
import {
  about,
  anyList,
  closed,
  finite,
  NO_OTHER_FIELDS,
  namedThings,
  notNegative,
  positive,
  positiveWhole,
  type Shape,
  someText,
} from "./schema-parts.js";

const whole = (most: number): Shape<number> =>
  v.pipe(
    v.number(`a whole number from 1 to ${most}`),
    v.integer(`a whole number from 1 to ${most}`),
    v.minValue(1, `a whole number from 1 to ${most}`),
    v.maxValue(most, `a whole number from 1 to ${most}`),
  );

const label: Shape<LabelDeclaration> = v.pipe(
  v.union(
    [
      v.picklist(["j", "m", "parity", "number"]),
      closed({ root: whole(1_000_000) }),
      closed({ rational: whole(1_000_000) }),
    ],
    '"j", "m", "parity", "number", { "root": N } or { "rational": Q }',
  ),
  v.description("The discrete family of the eigenvalues: j(j + 1), m, ±1, e^{2πik/N}, fractions, or any number."),
);

const options: Shape<ProblemOptions> = closed({
  levels: v.exactOptional(
    v.union(
      [
        v.literal("all"),
        closed({ lowest: positiveWhole }),
        closed({ nearest: finite, count: v.exactOptional(positiveWhole) }),
        closed({ from: finite, to: finite }),
      ],
      '"all", { "lowest": k }, { "nearest": energy, "count": k } or { "from": energy, "to": energy }',
    ),
  ),
  depth: v.exactOptional(
    v.picklist(["labels", "first order", "second order", "full"], '"labels", "first order", "second order" or "full"'),
  ),
  resolution: v.exactOptional(about(positive, "An in-level element counts as vanished below this fraction of ‖V‖.")),
  lambda: v.exactOptional(about(positive, "The largest λ at which the basis is to be used.")),
  refuseAbove: v.exactOptional(positive),
  levelWidth: v.exactOptional(about(notNegative, "Energies up to this far apart are one level.")),
});

const factorShared = {
  name: about(
    v.pipe(v.string("the name of a factor"), v.regex(/^[^.,[\]^|+\s]+$/, "a name without spaces and . , [ ] ^ | +")),
    "How terms name the factor.",
  ),
  count: v.exactOptional(about(positiveWhole, 'Number of equal sites, named "ring[0]", "ring[1]", …')),
  kets: v.exactOptional(about(v.array(someText), "Names of the kets of one site.")),
};

/** The schema of every kind of factor, by the key that tells them apart. */
export const factorSchemas: {
  readonly spin: Shape<FactorFile>;
  readonly oscillator: Shape<FactorFile>;
  readonly dimension: Shape<FactorFile>;
} = {
  spin: closed({
    ...factorShared,
    spin: about(
      v.union([v.number(), v.string()], 'an angular momentum such as 1, 0.5 or "3/2"'),
      'The angular momentum: 1, 0.5, "3/2"; kets by descending m. Operators x, y, z, plus, minus, squared.',
    ),
  }),
  oscillator: closed({
    ...factorShared,
    oscillator: about(
      positiveWhole,
      "Number of kets |0⟩, |1⟩, … Operators a, adagger, number, x, p, parity; powers x^k are those of the whole oscillator.",
    ),
  }),
  dimension: closed({
    ...factorShared,
    dimension: about(positiveWhole, "Number of kets. Operators |a><b|, a and b names of kets (any factor has these)."),
  }),
};

/** The forms of a matrix, long lists not looked into. */
export const formSchemas: MatrixSchemas = matrixSchemas(false);

/** The names of the forms. */
export const FORMS: readonly (keyof MatrixForms)[] = Object.keys(formSchemas) as (keyof MatrixForms)[];

/** A candidate with a declaration. */
export const candidateSchema: Shape<CandidateFile> = candidateOf(v.unknown());

function candidateOf<T>(matrix: Shape<T>): Shape<CandidateFile> {
  return closed({
    operator: matrix,
    label: v.exactOptional(label),
    ladder: v.exactOptional(matrix),
  });
}

/**
 * The whole problem file.
 *
 * @param checked - whether to look into factors, matrices and candidates too
 */
function problemOf(checked: boolean): Shape<ProblemOutline> {
  const factors: Shape<unknown[]> = checked ? v.array(v.union(Object.values(factorSchemas))) : anyList;
  const matrix: Shape<unknown> = checked ? anyMatrix : v.unknown();
  const named = (item: Shape<unknown>): Shape<Record<string, unknown>> =>
    checked ? v.record(v.string(), item) : namedThings;
  return closed({
    $schema: v.exactOptional(v.string()),
    format: v.literal("goodbasis-problem", '"goodbasis-problem"'),
    formatVersion: v.literal(1, "1, the only version there is"),
    title: v.exactOptional(v.string("text")),
    invented: v.exactOptional(
      about(v.boolean("true or false"), "Whether the numbers are made up, not measured or computed."),
    ),
    note: v.exactOptional(v.string("text")),
    unit: v.exactOptional(about(v.string("text"), "Unit of all energies, for display.")),
    n: v.exactOptional(about(positiveWhole, "Number of kets, where neither space nor kets tell it.")),
    space: v.exactOptional(about(factors, "The factors of the space; the first is the slowest index.")),
    kets: v.exactOptional(
      about(v.array(someText, "a list of names"), "Names of the kets; made from the factors when not given."),
    ),
    define: v.exactOptional(about(named(matrix), "Operators by name, for use in those that follow.")),
    h0: matrix,
    v: checked ? v.union([anyMatrix, v.record(v.string(), anyMatrix)]) : v.unknown(),
    candidates: v.exactOptional(named(checked ? v.union([anyMatrix, candidateOf(anyMatrix)]) : v.unknown())),
    options: v.exactOptional(options),
  });
}

/** The outline of a problem file. */
export const outlineSchema: Shape<ProblemOutline> = problemOf(false);

/** Every detail of a problem file: what the published JSON Schema is made from. */
export const problemSchema: Shape<ProblemOutline> = v.pipe(
  problemOf(true),
  v.title("goodbasis problem file"),
  v.description("H0, one perturbation or several, and candidate conserved operators."),
);

/**
 * Checks a value against a schema.
 *
 * @throws GoodBasisError `file` - with the place of the first fault
 */
export function conform<T>(schema: Shape<T>, place: Place, value: unknown): T {
  const result = v.safeParse(schema, value, { abortEarly: true, abortPipeEarly: true });
  if (result.success) return result.output;
  const [issue] = result.issues;
  const keys = (issue.path ?? []).map(({ key }) => (typeof key === "number" ? key : String(key)));
  const expected = expectation(issue);
  const known = expected.startsWith(NO_OTHER_FIELDS) ? expected.slice(NO_OTHER_FIELDS.length).split(", ") : [];
  const guess = didYouMean(String(keys.at(-1) ?? ""), known).replace(/^; /, "");
  const next = `${guess === "" ? "" : `${guess} `}goodbasis/problem-schema.json describes the format`;
  throw fileError(inside(place, ...keys), expected, showValue(issue.input), next);
}

const PLAIN: Readonly<Record<string, string>> = {
  Array: "a list",
  Object: "an object",
  string: "text",
  number: "a number",
};

/** The custom message, which is a phrase, or what the schema says of itself. */
function expectation({ message, expected }: v.BaseIssue<unknown>): string {
  if (!message.startsWith("Invalid ")) return message;
  return PLAIN[expected ?? ""] ?? expected ?? message;
}
