import type { LevelResult, Study } from "../certify/outcome.js";
import { type GridColumn, grid } from "./grid.js";
import { boundText, NOTHING, numberText, roughText, supportedText } from "./numbers.js";
import { counted, withUnit } from "./sentences.js";

/** One line a level: energy, verdict, what tells its states apart, the largest |V| bound, the guard, the safe orders. */
export function levelLines(study: Study, most: number): string[] {
  const shown = chooseShown(study.levels, most);
  const head = (title: string): string => (study.unit === "" ? title : `${title} [${study.unit}]`);
  const several = study.perturbations.length > 1;
  const columns: GridColumn[] = [
    { title: "level", align: "right" },
    { title: head("E0"), align: "point" },
    { title: "states", align: "right" },
    { title: "verdict", align: "left" },
    { title: "told apart by", align: "left" },
    ...study.perturbations.map(
      (name): GridColumn => ({ title: head(several ? `|${name}| ≤` : `|${name}_μν| ≤`), align: "right" }),
    ),
    { title: "guard", align: "right" },
    { title: "safe E", align: "right" },
    { title: "safe ψ", align: "right" },
  ];
  const rows = shown.map((level) => [
    String(level.place),
    energyText(study, level),
    String(level.degeneracy),
    level.verdict,
    toldApart(level),
    ...study.perturbations.map((_, p) => couplingText(level, p)),
    roughText(Math.max(level.guard.outside, level.guard.inside)),
    String(level.safe.energies),
    String(level.safe.states),
  ]);
  const lines = grid(columns, rows, { indent: "  " });
  const hidden = study.levels.length - shown.length;
  if (hidden > 0) lines.push(`  … ${counted(hidden, "more level")} (${verdictCounts(study.levels, shown)})`);
  return lines;
}

/** What the columns mean, in one sentence each. */
export function levelLegend(study: Study): string[] {
  const guard = study.levels[0]?.guard;
  if (guard === undefined) return [];
  const lambda = `λ\u00a0=\u00a0${numberText(guard.lambda, 4)}${guard.stated ? "" : " (not stated)"}`;
  const radii = study.levels.flatMap((level) => level.guard.radius.flatMap((radius) => radius ?? []));
  const radius =
    radii.length === 0
      ? ""
      : ` Kato's bound: the series of these levels, each taken as a whole, converge at least for |λ|\u00a0<\u00a0${numberText(
          roundedDown(Math.min(...radii)),
          2,
        )}.`;
  return [
    `guard: largest ratio of coupling to distance in energy, over other levels and inside the level, at ${lambda}; refused ` +
      `above ${numberText(guard.refuseAbove)}.${radius}`,
    "safe: the short formulas hold through this order, for energies (E) and for states (ψ).",
  ];
}

/** The energy as far as its enclosure and the width of the level allow. */
function energyText(study: Study, level: LevelResult): string {
  return supportedText(level.energy, study.whole.energyEnclosure + level.spread, 10);
}

/** The largest bound on an element inside the level; with more digits where it is an element and not mere rounding. */
function couplingText({ degeneracy, evidence, couplings }: LevelResult, p: number): string {
  if (degeneracy === 1) return NOTHING;
  return boundText(evidence.largest[p] ?? 0, couplings.length > 0 ? 3 : undefined);
}

/** Two digits, never more than was proved. */
function roundedDown(bound: number): number {
  const near = Number(bound.toPrecision(2));
  return near <= bound ? near : Number((bound - (near - bound)).toPrecision(2));
}

function toldApart(level: LevelResult): string {
  if (level.degeneracy === 1) return NOTHING;
  const names = [...new Set(level.evidence.nodes.map((node) => node.operator))];
  return names.length === 0 ? "nothing" : names.join(", ");
}

const BY_NEED = ["not good", "undecided", "good"] as const;

/** The levels that need looking at, then good ones, up to the number wanted; in order of energy. */
function chooseShown(levels: readonly LevelResult[], most: number): readonly LevelResult[] {
  if (levels.length <= most) return levels;
  const byNeed = BY_NEED.flatMap((verdict) => levels.filter((level) => level.verdict === verdict));
  return byNeed.slice(0, most).sort((a, b) => a.index - b.index);
}

function verdictCounts(levels: readonly LevelResult[], shown: readonly LevelResult[]): string {
  const visibleOnes = new Set(shown);
  const rest = levels.filter((level) => !visibleOnes.has(level));
  return BY_NEED.map((verdict) => ({ verdict, count: rest.filter((level) => level.verdict === verdict).length }))
    .filter(({ count }) => count > 0)
    .map(({ verdict, count }) => `${count} ${verdict}`)
    .join(", ");
}

/** A level by its place and energy. */
export function levelName(study: Study, index: number): string {
  const level = study.levels[index];
  if (level === undefined) return `level ${index}`;
  return `level ${level.place} (E0 = ${withUnit(energyText(study, level), study.unit)})`;
}
