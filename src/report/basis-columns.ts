import type { BasisState, LevelResult, Study } from "../certify/outcome.js";
import type { SafeOrders } from "../certify/safe-orders.js";
import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Bounded } from "../perturb/bounded.js";
import type { StateLabel } from "../refine/label.js";
import { expand } from "./expansion.js";
import type { Cell, TableColumn } from "./table.js";

/**
 * A column, or a group of columns, of {@link basisTable}.
 *
 * | name | columns |
 * |---|---|
 * | `"level"` | place of the level among all levels of H0, from 0 by ascending energy |
 * | `"state"` | index of the state among all states studied |
 * | `"E0"` | unperturbed energy, with its ± |
 * | `"degeneracy"` | number of states of the level |
 * | `"labels"` | one column for each candidate |
 * | `` `label:${name}` `` | the column of one candidate |
 * | `"shift"` | first-order shift with its ±, one column for each perturbation |
 * | `"second"` | second-order shift with its ±: the coefficient of λ², or of each product of two λ's |
 * | `"evidence"` | the weakest link to a partner in the level: `labels`, the perturbation, `2nd order`, `none`, or `single` |
 * | `"safe"` | through which order the short formulas are safe, for energies and states |
 * | `"expansion"` | the state in the caller's kets |
 */
export type BasisColumn<K extends string = string> =
  | "level"
  | "state"
  | "E0"
  | "degeneracy"
  | "labels"
  | `label:${K}`
  | "shift"
  | "second"
  | "evidence"
  | "safe"
  | "expansion";

/** Second-order shifts of one state: element [p][q] multiplies λ_p λ_q; undefined where they are not safe. */
export type SecondOrderShifts = readonly (readonly Bounded[])[] | undefined;

/** What the columns are made from. */
export interface ColumnSource<K extends string> {
  readonly study: Study<K>;
  /** Second-order shifts by index of the state; undefined where there is no certified basis. */
  readonly second: ((state: number) => SecondOrderShifts) | undefined;
  readonly terms: number;
  readonly threshold: number;
}

/** A column and how to fill it. */
export interface FilledColumn<K extends string> {
  readonly column: TableColumn;
  readonly cell: (state: BasisState<K>, level: LevelResult) => Cell;
}

const NONE: Cell = { kind: "none" };

const COLUMN_NAMES: readonly string[] = [
  "level",
  "state",
  "E0",
  "degeneracy",
  "labels",
  "label:…",
  "shift",
  "second",
  "evidence",
  "safe",
  "expansion",
];

/**
 * The columns that one name stands for.
 *
 * @throws GoodBasisError `option` for an unknown name, `not-certified` for second-order shifts of a basis that is not good
 */
export function columnsFor<K extends string>(name: string, source: ColumnSource<K>): readonly FilledColumn<K>[] {
  const { study } = source;
  switch (name) {
    case "level":
      return [number("level", "level", (_, level) => level.place, true)];
    case "state":
      return [number("state", "state", (state) => state.index, false)];
    case "degeneracy":
      return [number("degeneracy", "deg.", (_, level) => level.degeneracy, true)];
    case "E0":
      return [
        {
          column: { ...blank("E0", "E0", "bounded"), unit: study.unit, perLevel: true },
          cell: (state) => ({ kind: "bounded", value: state.energy, plusMinus: state.energyPlusMinus }),
        },
      ];
    case "labels":
      return study.candidates.map((candidate) => labelColumn(study, candidate));
    case "shift":
      return study.perturbations.map((perturbation, p) => shiftColumn(study, perturbation, p));
    case "second":
      return secondColumns(source);
    case "evidence":
      return [
        {
          column: blank("evidence", "evidence", "text"),
          cell: (state, level) => ({ kind: "text", text: evidenceText(study, state.safe, level) }),
        },
      ];
    case "safe":
      return [
        {
          column: blank("safe", "safe E/ψ", "text"),
          cell: (state) => ({ kind: "text", text: safeText(state.safe) }),
        },
      ];
    case "expansion":
      return [
        {
          column: blank("expansion", "state", "expansion"),
          cell: (state) => ({
            kind: "expansion",
            ...expand(state.vector, study.ket, source.terms, source.threshold),
          }),
        },
      ];
    default: {
      const candidate = study.candidates.find((own) => name === `label:${own}`);
      if (candidate !== undefined) return [labelColumn(study, candidate)];
      const known = [...COLUMN_NAMES, ...study.candidates.map((own) => `label:${own}`)];
      throw new GoodBasisError(
        "option",
        `basisTable: there is no column ${shown(name)}; give names from ${known
          .filter((own) => own !== "label:…")
          .map((own) => `"${own}"`)
          .join(", ")}`,
        { column: name },
      );
    }
  }
}

function blank(key: string, title: string, kind: TableColumn["kind"]): TableColumn {
  return { key, title, remark: "", unit: "", kind, showsPlusMinus: false, perLevel: false, complex: false };
}

function number<K extends string>(
  key: string,
  title: string,
  value: (state: BasisState<K>, level: LevelResult) => number,
  perLevel: boolean,
): FilledColumn<K> {
  return {
    column: { ...blank(key, title, "number"), perLevel },
    cell: (state, level) => ({ kind: "number", value: value(state, level) }),
  };
}

function labelColumn<K extends string>(study: Study<K>, candidate: K): FilledColumn<K> {
  const finding = study.audit.candidates.find((own) => own.name === candidate);
  const remark = finding === undefined || finding.conserved ? "" : finding.descriptive ? "descriptive" : "broken";
  return {
    column: {
      ...blank(`label:${candidate}`, candidate, "label"),
      remark,
      complex: finding !== undefined && finding.kind !== "hermitian",
    },
    cell: (state) => {
      const label: StateLabel | undefined = state.labels[candidate];
      return label === undefined ? NONE : { kind: "label", label };
    },
  };
}

function shiftColumn<K extends string>(study: Study<K>, perturbation: string, p: number): FilledColumn<K> {
  const title = study.perturbations.length === 1 ? "E1" : `E1 ${perturbation}`;
  return {
    column: { ...blank(`E1:${perturbation}`, title, "bounded"), unit: study.unit, showsPlusMinus: true },
    cell: (state) => {
      const shift = state.shifts[p];
      return shift === undefined ? NONE : { kind: "bounded", value: shift.value, plusMinus: shift.plusMinus };
    },
  };
}

function secondColumns<K extends string>({ study, second }: ColumnSource<K>): FilledColumn<K>[] {
  if (second === undefined) {
    throw new GoodBasisError(
      "not-certified",
      'basisTable: second-order shifts are only given for a certified basis; check that outcome.verdict is "good" and pass ' +
        'outcome.basis, or leave out the column "second"',
      { column: "second" },
    );
  }
  const names = study.perturbations;
  return names.flatMap((first, p) =>
    names.slice(p).map((other, k): FilledColumn<K> => {
      const q = p + k;
      const product = `${first}·${other}`;
      return {
        column: {
          ...blank(`E2:${product}`, names.length === 1 ? "E2" : `E2 ${product}`, "bounded"),
          unit: study.unit,
          showsPlusMinus: true,
        },
        cell: (state) => secondCell(state.safe, second(state.index), p, q),
      };
    }),
  );
}

/** The coefficient of λ_p λ_q; nothing where the second order is not safe, whatever was handed in. */
function secondCell(safe: SafeOrders, shifts: SecondOrderShifts, p: number, q: number): Cell {
  if (safe.energies !== "all" && safe.energies < 2) return NONE;
  const direct = shifts?.[p]?.[q];
  if (direct === undefined) return NONE;
  if (p === q) return { kind: "bounded", value: direct.value, plusMinus: direct.plusMinus };
  const mirrored = shifts?.[q]?.[p];
  if (mirrored === undefined) return NONE;
  const value = direct.value + mirrored.value;
  // the sum rounds by at most half a unit in its last place, each ± sum by one
  const plusMinus =
    (direct.plusMinus + mirrored.plusMinus + Number.EPSILON * Math.abs(value)) * (1 + 4 * Number.EPSILON);
  return { kind: "bounded", value, plusMinus };
}

/** The weakest link between a state and a partner of its level, in a word. */
function evidenceText(study: Study, safe: SafeOrders, level: LevelResult): string {
  if (safe.states === "none") return "none";
  if (safe.energies === "all") return level.degeneracy === 1 ? "single" : "labels";
  if (safe.energies <= 2) return separatorName(study, level);
  return `${ordinal(safe.energies - 1)} order`;
}

/** The perturbation that tells states of the level apart, by name where it is one alone. */
function separatorName({ perturbations }: Study, { evidence }: LevelResult): string {
  const used = new Set(evidence.nodes.filter((node) => node.kind === "perturbation").map((node) => node.operator));
  const names = perturbations.filter((name) => used.has(name));
  return names.length === 1 ? (names[0] ?? "V") : perturbations.length === 1 ? (perturbations[0] ?? "V") : "V";
}

function ordinal(order: number): string {
  return order === 2 ? "2nd" : order === 3 ? "3rd" : `${order}th`;
}

/** Safe orders as printed, energies first: `"2/0"`. */
function safeText(safe: SafeOrders): string {
  return `${safe.energies}/${safe.states}`;
}
