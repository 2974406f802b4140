import type { Audit, CandidateFinding } from "../audit/audit.js";
import { isObject, requireArgument, requireOptions } from "../misuse.js";
import { visible, wrapProse } from "./characters.js";
import { grid } from "./grid.js";
import { commutatorSentence, commutatorText, counted, reasons, useText } from "./sentences.js";

/** Options of {@link formatAudit}. */
export interface FormatAuditOptions {
  /** Longest line of prose, in characters. Default 100. Tables are broken only where a cell may be. */
  readonly width?: number;
}

const DEFAULT_WIDTH = 100;

/**
 * The audit as text to read: every candidate with its commutators, why candidates were dropped, and which can be used
 * together.
 *
 * @param audit - from {@link auditCommutators}, or `outcome.audit`
 * @returns lines without a final line break
 * @throws GoodBasisError `option` for something that is no audit, or an option that there is not
 *
 * @example
 * ```ts
 * import { auditCommutators, formatAudit } from "goodbasis";
 *
 * const audit = auditCommutators({
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] }, B: { diagonal: [1, 1, 0] } },
 * });
 * console.log(formatAudit(audit));
 * ```
 */
export function formatAudit(audit: Audit, options: FormatAuditOptions = {}): string {
  requireArgument(
    isAudit(audit),
    "formatAudit",
    "an audit",
    audit,
    "pass what auditCommutators returns, or outcome.audit",
  );
  requireOptions("formatAudit", options, ["width"]);
  const width = requireCount("formatAudit", "width", options.width ?? DEFAULT_WIDTH);
  const kept = audit.candidates.filter((candidate) => candidate.conserved).length;
  const heading = `AUDIT: ${kept} of ${counted(audit.candidates.length, "candidate")} conserved`;
  const sets =
    audit.sets.length > 1
      ? [
          "",
          "Sets that commute",
          ...audit.sets.map((set) => `  ${set.map(visible).join(", ")}`),
          ...(audit.setsComplete ? [] : ["  … and others: the search stopped at its budget"]),
        ]
      : [];
  return [heading, "", ...auditLines(audit, width), ...sets].join("\n");
}

/** The candidates as a table, the reasons below it, and conserved pairs that do not commute. */
export function auditLines(audit: Audit, width: number): string[] {
  if (audit.candidates.length === 0) return ["  none given: nothing but H0 and V is there to label states"];
  const perturbations = audit.candidates[0]?.withPerturbations.map((finding) => finding.right) ?? [];
  const lines = grid(
    [
      { title: "candidate", align: "left" },
      { title: "kind", align: "left" },
      { title: "with H0", align: "left" },
      ...perturbations.map((name) => ({ title: `with ${visible(name)}`, align: "left" as const })),
      { title: "verdict", align: "left" },
    ],
    audit.candidates.map((candidate) => [
      visible(candidate.name),
      kindText(candidate),
      commutatorText(candidate.withH0),
      ...candidate.withPerturbations.map(commutatorText),
      useText(candidate),
    ]),
    { indent: "  " },
  );
  const sentence = (text: string): string[] => wrapProse(text, width - 2, "    ").map((line) => `  ${line}`);
  const dropped = audit.candidates.flatMap(reasons);
  if (dropped.length > 0) lines.push("", ...dropped.flatMap(sentence));
  const pairs = audit.pairs.filter((pair) => pair.verdict !== "commutes");
  if (pairs.length > 0) {
    lines.push("", "Conserved, but not together", ...pairs.map(commutatorSentence).flatMap(sentence));
  }
  return lines;
}

function kindText(candidate: CandidateFinding): string {
  switch (candidate.kind) {
    case "hermitian":
      return "Hermitian";
    case "unitary":
      return "unitary";
    case "normal":
      return "normal";
    default:
      return candidate.kind satisfies never;
  }
}

/** Whether a value is built as an audit is. */
export function isAudit(value: unknown): boolean {
  return isObject(value) && ["candidates", "pairs", "sets"].every((name) => Array.isArray(Reflect.get(value, name)));
}

/**
 * Refuses an option that is no number from 1 on.
 *
 * @throws GoodBasisError `option`
 */
export function requireCount(verb: string, name: string, value: unknown): number {
  requireArgument(
    typeof value === "number" && value >= 1,
    verb,
    `as ${name} a number from 1 on`,
    value,
    "or leave it out",
  );
  return Number(value);
}
