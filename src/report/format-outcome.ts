import type { Coupling, Outcome, Question, Study } from "../certify/outcome.js";
import { isObject, requireArgument, requireOptions } from "../misuse.js";
import { visible, wrapProse } from "./characters.js";
import { auditLines, isAudit, requireCount } from "./format-audit.js";
import { grid } from "./grid.js";
import { boundedText, boundText, numberText } from "./numbers.js";
import { levelLegend, levelLines, levelName } from "./outcome-levels.js";
import { counted, typesetMessage, withUnit } from "./sentences.js";

/** Options of {@link formatOutcome}. */
export interface FormatOutcomeOptions {
  /** Longest line of prose, in characters. Default 100. */
  readonly width?: number;
  /** Most levels listed; those that are not good come first. Default 40. */
  readonly levels?: number;
  /** Most couplings, and most questions, listed. Default 10. */
  readonly findings?: number;
}

const DEFAULTS = { width: 100, levels: 40, findings: 10 } as const;

/**
 * The outcome of the main job as text to read: the verdict, what became of every candidate, every level with its evidence, and
 * what stands in the way where the basis is not good.
 *
 * @param outcome - from {@link findGoodBasis}
 * @param options - widths and lengths
 * @returns lines without a final line break
 * @throws GoodBasisError `option` for something that is no outcome, or an option that there is not
 *
 * @example
 * ```ts
 * import { findGoodBasis, formatOutcome } from "goodbasis";
 *
 * const outcome = findGoodBasis({
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] } },
 * });
 * console.log(formatOutcome(outcome).split("\n")[0]);
 * ```
 */
export function formatOutcome(outcome: Outcome, options: FormatOutcomeOptions = {}): string {
  const next = "pass what findGoodBasis returns, not a part of it";
  requireArgument(isOutcome(outcome), "formatOutcome", "an outcome", outcome, next);
  requireOptions("formatOutcome", options, Object.keys(DEFAULTS));
  const count = (name: keyof typeof DEFAULTS): number =>
    requireCount("formatOutcome", name, options[name] ?? DEFAULTS[name]);
  const [width, levels, findings] = [count("width"), count("levels"), count("findings")];
  const prose = (text: string): string[] => wrapProse(text, width - 2, "  ").map((line) => `  ${line}`);
  const lines = [
    heading(outcome),
    ...wrapProse(setting(outcome), width),
    "",
    "Candidates",
    ...auditLines(outcome.audit, width),
    ...setLines(outcome),
    "",
    "Levels",
    ...levelLines(outcome, levels),
    ...levelLegend(outcome).flatMap(prose),
  ];
  switch (outcome.verdict) {
    case "good":
      break;
    case "not good":
      lines.push("", "What spoils it", ...couplingLines(outcome, outcome.couplings, findings));
      lines.push(...prose(help(outcome)));
      lines.push(...questionLines(outcome, outcome.questions, findings, prose));
      break;
    case "undecided":
      lines.push(...questionLines(outcome, outcome.questions, findings, prose));
      break;
    default:
      outcome satisfies never;
  }
  lines.push("", "What it is worth", ...worth(outcome).flatMap(prose));
  return lines.join("\n");
}

function isOutcome(value: unknown): boolean {
  if (!isObject(value) || !("verdict" in value) || !("audit" in value) || !isAudit(value.audit)) return false;
  const verdicts: readonly unknown[] = ["good", "not good", "undecided"];
  const lists = ["levels", "states", "sets"].every((name) => Array.isArray(Reflect.get(value, name)));
  return verdicts.includes(value.verdict) && lists && "whole" in value && isObject(value.whole);
}

function heading(outcome: Outcome): string {
  switch (outcome.verdict) {
    case "good":
      return outcome.levels.every((level) => level.degeneracy === 1)
        ? "GOOD: no level studied is degenerate"
        : `GOOD: ${nothingCouples(outcome)} inside any level studied`;
    case "not good": {
      const spoiled = new Set(outcome.couplings.map((coupling) => coupling.level)).size;
      const largest = outcome.couplings[0];
      const size = largest === undefined ? "" : `, by up to ${withUnit(numberText(largest.size), outcome.unit)}`;
      const by = largest?.perturbation ?? "V";
      return `NOT GOOD: ${by} couples states inside ${spoiled} of ${counted(outcome.levels.length, "level")}${size}`;
    }
    case "undecided": {
      const open = new Set(outcome.questions.map((question) => question.level)).size;
      return `UNDECIDED: ${counted(outcome.questions.length, "question")} open at ${open} of ${counted(
        outcome.levels.length,
        "level",
      )}`;
    }
    default:
      return outcome satisfies never;
  }
}

function nothingCouples({ perturbations }: Study): string {
  return perturbations.length === 1
    ? `${visible(perturbations[0] ?? "V")} couples no two states`
    : `none of the ${perturbations.length} perturbations couples two states`;
}

function setting(study: Study): string {
  const studied =
    study.levels.length === study.levelCount
      ? `${counted(study.levelCount, "level")} of H0, all studied`
      : `${study.levels.length} of ${counted(study.levelCount, "level")} of H0 studied`;
  const perturbations =
    study.perturbations.length === 1 ? "" : `; perturbations ${study.perturbations.map(visible).join(", ")}`;
  return (
    `${counted(study.n, "ket")}, ${studied}${perturbations}${study.unit === "" ? "" : `; energies in ${study.unit}`}; ` +
    `couplings below ${numberText(study.resolution)} ‖V‖ count as vanished`
  );
}

function setLines(study: Study): string[] {
  if (study.sets.length < 2) return [];
  const rows = study.sets.map((set) => [
    set.names.map(visible).join(", "),
    String(set.sectors),
    String(set.largest),
    String(set.pairsTogether),
    set.chosen ? "used" : "",
  ]);
  const columns = [
    { title: "commuting set", align: "left" },
    { title: "sectors", align: "right" },
    { title: "largest", align: "right" },
    { title: "pairs left together", align: "right" },
    { title: "", align: "left" },
  ] as const;
  return ["", "Sets that commute", ...grid(columns, rows, { indent: "  " })];
}

function couplingLines(study: Study, couplings: readonly Coupling[], most: number): string[] {
  const shown = couplings.slice(0, most);
  const head = study.unit === "" ? "size" : `size [${study.unit}]`;
  const lines = grid(
    [
      { title: "level", align: "right" },
      { title: "by", align: "left" },
      { title: head, align: "point" },
      { title: "between", align: "left" },
      { title: "and", align: "left" },
    ],
    shown.map(({ level, perturbation, states, names, size, atLeast, atMost }) => {
      const { value, plusMinus } = boundedText(size, Math.max(atMost - size, size - atLeast));
      return [
        String(study.levels[level]?.place ?? level),
        visible(perturbation),
        `${value} ± ${plusMinus}`,
        ...names.map((name, k) => visible(names[0] === names[1] ? `state ${states[k]}, ${name}` : name)),
      ];
    }),
    { indent: "  " },
  );
  if (couplings.length > most) lines.push(`  … ${counted(couplings.length - most, "more pair")}`);
  return lines;
}

/** What would turn "not good" into "good". */
function help(study: Study): string {
  if (study.perturbations.length > 1) {
    return (
      "What would help: a conserved candidate that tells these states apart; else no basis is good for all perturbations " +
      "at once: study them one at a time, or along one ray of their strengths."
    );
  }
  const v = study.perturbations[0] ?? "V";
  return (
    `What would help: a conserved candidate that tells these states apart, or let ${v} itself finish the job ` +
    '(depth: "first order" or further), which makes energies safe through the second order only.'
  );
}

function questionLines(
  study: Study,
  questions: readonly Question[],
  most: number,
  prose: (text: string) => string[],
): string[] {
  if (questions.length === 0) return [];
  const lines = ["", "What is open"];
  for (const { code, level, message } of questions.slice(0, most)) {
    lines.push(...prose(`${levelName(study, level)}, ${code}: ${typesetMessage(message)}.`));
  }
  if (questions.length > most) lines.push(`  … ${counted(questions.length - most, "more question")}`);
  return lines;
}

function worth(study: Study): string[] {
  const { eta0, eta } = study.whole.nearby;
  const exact = eta0 === 0 && eta.every((size) => size === 0);
  const unit = (size: number): string => withUnit(boundText(size), study.unit);
  const distances = [
    `‖H0 − H0′‖ ≤ ${unit(eta0)}`,
    ...study.perturbations.map((name, p) => `‖${name} − ${name}′‖ ≤ ${unit(eta[p] ?? 0)}`),
  ].join(", ");
  const labelled = study.audit.candidates.some((candidate) => candidate.conserved);
  return [
    !labelled
      ? "No label is used."
      : exact
        ? "The labels used are conserved exactly by the given matrices."
        : `The labels used are exact for a nearby model: ${distances}.`,
    "Every bound is rigorous for the given matrices, rounding and stated entry uncertainty included. The certificate carries " +
      "them all as plain JSON with a hash of every operator, and recheck verifies it with code of its own.",
  ];
}
