import type { Bounded } from "../perturb/bounded.js";
import type { StateLabel } from "../refine/label.js";

/** A term of an expansion: a coefficient and the name of its ket. */
export interface ExpansionTerm {
  /** Real part of the coefficient. */
  readonly re: number;
  /** Imaginary part of the coefficient. */
  readonly im: number;
  /** Name of the ket. */
  readonly ket: string;
}

/** A state in the caller's kets, the largest coefficients first. */
export interface Expansion {
  /** The terms shown, largest first. */
  readonly terms: readonly ExpansionTerm[];
  /** How many terms were left out, and the sum of their squared moduli. */
  readonly leftOut: {
    /** How many. */
    readonly terms: number;
    /** The sum of their squared moduli. */
    readonly weight: number;
  };
}

/** A cell of a {@link Table}; branch on `kind`. */
export type Cell =
  | { readonly kind: "none" }
  | { readonly kind: "number"; readonly value: number }
  | ({ readonly kind: "bounded" } & Bounded)
  | { readonly kind: "label"; readonly label: StateLabel }
  | { readonly kind: "text"; readonly text: string }
  | ({ readonly kind: "expansion" } & Expansion);

/** A column of a {@link Table}. */
export interface TableColumn {
  /** Unique: `"level"`, `"E0"`, `"label:Jz"`, `"E1:V"`, `"E2:V·V"`, `"expansion"` and so on. */
  readonly key: string;
  /** What stands at its head, without remark and unit. */
  readonly title: string;
  /** For labels that are no evidence: `descriptive` or `broken`. */
  readonly remark: "" | "descriptive" | "broken";
  /** Empty where the column has none. */
  readonly unit: string;
  /** The kind of its cells; any of them may be `none`. */
  readonly kind: Exclude<Cell["kind"], "none">;
  /** Whether formats for the eye show the ± (a column may carry one without showing it). */
  readonly showsPlusMinus: boolean;
  /** Whether formats for the eye leave out what the row above in the same level says already. */
  readonly perLevel: boolean;
  /** Whether the label is a complex number. */
  readonly complex: boolean;
}

/** A row of a {@link Table}: one state. */
export interface TableRow {
  /** Index of the state among all states studied. */
  readonly state: number;
  /** Index of its level among the levels studied. */
  readonly level: number;
  /** One cell a column. */
  readonly cells: readonly Cell[];
}

/** A table of states, ready for {@link formatTable} or for a program. */
export interface Table {
  /** Unit of all energies. */
  readonly unit: string;
  /** The columns, in order. */
  readonly columns: readonly TableColumn[];
  /** Level by level, in the order of the states. */
  readonly rows: readonly TableRow[];
  /** What a reader must know of the columns, one sentence each. */
  readonly notes: readonly string[];
}
