import type { LabelDeclaration } from "../audit/label-family.js";
import type { FindOptions } from "../certify/find.js";
import type { Uncertainty } from "../operator/read.js";
import type { FileNumber } from "./numbers.js";

/** A factor of the space, or `count` equal ones; exactly one of `spin`, `oscillator` and `dimension`. */
export interface FactorFile {
  readonly name: string;
  /** An angular momentum, 1, 0.5, "1/2" …: 2j + 1 kets, m descending. */
  readonly spin?: number | string;
  /** A truncated oscillator with this many kets. */
  readonly oscillator?: number;
  /** Any space with this many kets. */
  readonly dimension?: number;
  /** Number of equal sites; one factor without sites when absent. */
  readonly count?: number;
  /** Names of the kets of one site. */
  readonly kets?: readonly string[];
}

/** coefficient × product of named operators, or coefficient × scalar product; once, or once for every bond. */
export interface TermFile {
  readonly coefficient?: FileNumber;
  readonly product?: readonly string[];
  readonly dot?: readonly [string, string];
  readonly bonds?: readonly (readonly [number, number])[];
}

interface Shared {
  readonly on?: string;
  readonly uncertainty?: Uncertainty;
}

/** The forms of a matrix as an object, by the key that tells them apart; long lists are not looked into. */
export interface MatrixForms {
  readonly rows: Shared & { readonly rows: readonly unknown[] };
  readonly triplets: Shared & {
    readonly triplets: readonly unknown[];
    readonly n?: number;
    readonly radii?: readonly unknown[];
    readonly exact?: readonly unknown[];
  };
  readonly diagonal: Shared & { readonly diagonal: readonly unknown[] };
  readonly permutation: Shared & { readonly permutation: readonly unknown[]; readonly phases?: readonly unknown[] };
  readonly matrixMarket: Shared & { readonly matrixMarket: string };
  readonly terms: { readonly terms: readonly TermFile[]; readonly uncertainty?: Uncertainty };
  readonly hopping: Shared & {
    readonly hopping: readonly (readonly [number, number])[];
    readonly amplitude?: FileNumber;
    readonly amplitudes?: readonly FileNumber[];
  };
  readonly translation: { readonly translation: string };
  readonly reflection: { readonly reflection: string; readonly centre?: number };
  readonly sitePermutation: { readonly sitePermutation: readonly number[]; readonly on: string };
  readonly exchange: { readonly exchange: readonly [string, string] };
}

/** A candidate with what is known of it; matrices are not looked into. */
export interface CandidateFile {
  readonly operator: unknown;
  readonly label?: LabelDeclaration;
  readonly ladder?: unknown;
}

/** Options of the main job that a problem file may hold. */
export type ProblemOptions = Omit<FindOptions, "onProgress">;

/** The outline of a problem file; matrices and factors are not looked into. */
export interface ProblemOutline {
  readonly format: "goodbasis-problem";
  readonly formatVersion: 1;
  readonly title?: string;
  readonly invented?: boolean;
  readonly note?: string;
  readonly unit?: string;
  readonly n?: number;
  readonly space?: readonly unknown[];
  readonly kets?: readonly string[];
  readonly define?: Readonly<Record<string, unknown>>;
  readonly h0: unknown;
  readonly v: unknown;
  readonly candidates?: Readonly<Record<string, unknown>>;
  readonly options?: ProblemOptions;
}
