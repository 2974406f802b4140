import * as v from "valibot";
import type { Uncertainty } from "../operator/read.js";
import type { MatrixForms, TermFile } from "./problem-file.js";
import {
  about,
  anyList,
  bond,
  closed,
  fileNumber,
  index,
  notNegative,
  numberOrText,
  positiveWhole,
  type Shape,
  someText,
} from "./schema-parts.js";

const uncertainty: Shape<Uncertainty> = v.pipe(
  v.union(
    [v.literal("exact"), closed({ relative: v.exactOptional(notNegative), absolute: v.exactOptional(notNegative) })],
    '"exact" or { "relative": number, "absolute": number }',
  ),
  v.description(
    "How well the entries are known: exact, or every stored entry to within relative · |entry| + absolute. When not given, " +
      "half a unit in the last place of each.",
  ),
);

const term: Shape<TermFile> = about(
  closed({
    coefficient: v.exactOptional(about(fileNumber, "1 when not given.")),
    product: v.exactOptional(
      about(
        v.array(someText),
        'Operators by name, the last one applied first: "L.x", "ring[3].z", "x.x^4", "atom.|e><g|", or a defined one. An ' +
          "empty list is the identity.",
      ),
    ),
    dot: v.exactOptional(
      about(
        v.strictTuple([someText, someText], "a pair of angular momenta"),
        'The scalar product of two angular momenta, each a factor, a site or a sum: ["L", "S"], ["L + S", "L + S"].',
      ),
    ),
    bonds: v.exactOptional(
      about(
        v.array(bond),
        'Repeats the term for every pair [i, j] of sites; in the names "ring[i].z" and "ring[j].z" are its two ends.',
      ),
    ),
  }),
  "coefficient times either a product of operators or a scalar product.",
);

/** The schema of every form of a matrix object. */
export type MatrixSchemas = { readonly [K in keyof MatrixForms]: Shape<MatrixForms[K]> };

/**
 * @param checked - whether to look into long lists too; otherwise plain loops will
 */
export function matrixSchemas(checked: boolean): MatrixSchemas {
  const list = <T>(item: Shape<T>): Shape<unknown[]> => (checked ? v.array(item) : anyList);
  const shared = {
    on: v.exactOptional(
      about(someText, 'The factor or site that it acts on: "L", "ring", "ring[2]"; the whole space when not given.'),
    ),
    uncertainty: v.exactOptional(uncertainty),
  };
  return {
    rows: closed({ rows: list(v.array(fileNumber)), ...shared }),
    triplets: closed({
      triplets: about(
        list(
          v.union([
            v.strictTuple([index, index, numberOrText]),
            v.strictTuple([index, index, numberOrText, numberOrText]),
          ]),
        ),
        "[row, column, re] or [row, column, re, im], counted from 0; every place at most once. Where one entry is text such as " +
          '"sqrt(2/3)", all are exact.',
      ),
      n: v.exactOptional(about(positiveWhole, "Number of kets, where nothing else tells it.")),
      exact: v.exactOptional(
        about(list(numberOrText), "What each triplet is exactly, within its radius, where the triplets are not text."),
      ),
      radii: v.exactOptional(about(list(notNegative), "A bound on the error of each triplet.")),
      ...shared,
    }),
    diagonal: closed({ diagonal: list(fileNumber), ...shared }),
    permutation: closed({
      permutation: about(list(index), "Ket j goes to ket permutation[j], times phases[j]."),
      phases: v.exactOptional(list(fileNumber)),
      ...shared,
    }),
    matrixMarket: closed({
      matrixMarket: about(someText, "A Matrix Market file; its path is taken from the folder of the problem file."),
      ...shared,
    }),
    terms: closed({ terms: v.array(term, "a list of terms"), uncertainty: v.exactOptional(uncertainty) }),
    hopping: closed({
      hopping: about(v.array(bond, "a list of bonds"), "Σ t |i⟩⟨j| + t* |j⟩⟨i| over these bonds."),
      amplitude: v.exactOptional(about(fileNumber, "t of every bond; 1 when not given.")),
      amplitudes: v.exactOptional(about(v.array(fileNumber), "t of each bond.")),
      ...shared,
    }),
    translation: closed({
      translation: about(someText, "The content of site s of this factor moves to site s + 1, the last to site 0."),
    }),
    reflection: closed({
      reflection: about(someText, "The content of site s of this factor moves to site centre − s."),
      centre: v.exactOptional(about(index, "Twice the position of the mirror; sites − 1 when not given.")),
    }),
    sitePermutation: closed({
      sitePermutation: about(
        v.array(index, "a list of sites"),
        "The content of site s moves to site sitePermutation[s].",
      ),
      on: about(someText, "The factor whose sites are moved."),
    }),
    exchange: closed({
      exchange: about(
        v.strictTuple([someText, someText], "a pair of factors or sites"),
        'Exchanges two equal factors or sites: ["x", "y"], ["ring[0]", "ring[3]"].',
      ),
    }),
  };
}

/** A matrix in any form. */
export const anyMatrix: Shape<unknown> = v.pipe(
  v.union([
    about(someText, 'Operators by name, or a sum of them: "Lz", "L.z + S.z".'),
    about(v.array(v.array(fileNumber)), "The rows."),
    ...Object.values(matrixSchemas(true)),
  ]),
  v.title("matrix"),
);
