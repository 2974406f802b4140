import type { Checked, ColumnCoupling, Validation } from "../certify/validate.js";
import { wrapProse } from "../report/characters.js";
import { grid } from "../report/grid.js";
import { boundText, numberText } from "../report/numbers.js";
import { counted, typesetMessage, withUnit } from "../report/sentences.js";

const WIDTH = 100;
const MOST_LEVELS = 40;
const MOST_PAIRS = 10;

/** What was found of a basis that somebody brought, as text to read; states are counted from 0. */
export function validationText(validation: Validation): string {
  const { levels, unit, remarks } = validation;
  const pairs = levels.flatMap(({ worst }) => worst).sort((a, b) => b.size - a.size);
  return [
    heading(validation),
    validation.complete
      ? "The basis is complete."
      : "The basis has fewer states than there are kets: a level may lack partners, and denominators are not checked.",
    "",
    ...checkLines(validation),
    "",
    "Levels",
    ...grid(
      [
        { title: "level", align: "right" },
        { title: unit === "" ? "E0" : `E0 [${unit}]`, align: "point" },
        { title: "states", align: "left", wrap: "words" },
        { title: "verdict", align: "left" },
        { title: unit === "" ? "|V_μν| ≤" : `|V_μν| ≤ [${unit}]`, align: "left" },
      ],
      levels
        .slice(0, MOST_LEVELS)
        .map(({ energy, columns, verdict, largest }, k) => [
          String(k),
          numberText(energy, 10),
          columns.join(", "),
          verdict,
          boundText(Math.max(0, ...largest)),
        ]),
      { indent: "  ", maxWidth: WIDTH },
    ),
    ...(levels.length > MOST_LEVELS ? [`  … ${counted(levels.length - MOST_LEVELS, "more level")}`] : []),
    ...pairLines(pairs, unit),
    ...repairLines(validation),
    ...(remarks.length === 0 ? [] : ["", "Remarks"]),
    ...remarks.flatMap((remark) => wrapProse(typesetMessage(remark), WIDTH - 2, "  ").map((line) => `  ${line}`)),
  ].join("\n");
}

function heading({ verdict, columns }: Validation): string {
  const states = counted(columns.length, "state");
  switch (verdict) {
    case "good":
      return `GOOD: ${states}, orthonormal eigenvectors of H0 that V does not couple inside any level`;
    case "not good":
      return `NOT GOOD: the basis of ${states} does not hold what a good basis must`;
    case "undecided":
      return `UNDECIDED: nothing is proved wrong with the basis of ${states}, but not everything is proved right`;
    default:
      return verdict satisfies never;
  }
}

function checkLines({ orthonormality, columns, unit }: Validation): string[] {
  const { worst, size } = orthonormality;
  const place = worst[0] === worst[1] ? `state ${worst[0]}` : `states ${worst[0]} and ${worst[1]}`;
  const lines = [
    `  orthonormal: ${answer(orthonormality)}, ‖Q†Q − 1‖ ≤ ${boundText(orthonormality.atMost)}` +
      (size > 0 ? `, worst ${numberText(size, 3)} at ${place}` : ""),
  ];
  const worstOf = (pick: (k: number) => Checked | undefined): { column: number; checked: Checked } | undefined =>
    columns
      .flatMap(({ column }, k) => {
        const checked = pick(k);
        return checked === undefined ? [] : [{ column, checked }];
      })
      .sort((a, b) => b.checked.atMost - a.checked.atMost)[0];
  const eigenvector = worstOf((k) => columns[k]?.eigenvector);
  if (eigenvector !== undefined) {
    const { column, checked } = eigenvector;
    const bound = withUnit(boundText(checked.atMost), unit);
    lines.push(`  eigenvectors of H0: ${answer(checked)}, ‖H0 q − E q‖ ≤ ${bound}, worst state ${column}`);
  }
  for (const name of Object.keys(columns[0]?.labels ?? {})) {
    const found = worstOf((k) => columns[k]?.labels[name]);
    if (found === undefined) continue;
    const { column, checked } = found;
    lines.push(
      `  label ${name}: ${answer(checked)}, ‖A q − a q‖ ≤ ${boundText(checked.atMost)}, worst state ${column}`,
    );
  }
  return lines;
}

function answer({ verdict }: Checked): string {
  switch (verdict) {
    case "good":
      return "yes";
    case "not good":
      return "no";
    case "undecided":
      return "undecided";
    default:
      return verdict satisfies never;
  }
}

function pairLines(pairs: readonly ColumnCoupling[], unit: string): string[] {
  if (pairs.length === 0) return [];
  const lines = pairs.slice(0, MOST_PAIRS).map(({ perturbation, columns: [a, b], size }) => {
    return `  ${perturbation} couples states ${a} and ${b}: ${withUnit(numberText(size), unit)}`;
  });
  const more = pairs.length > MOST_PAIRS ? [`  … ${counted(pairs.length - MOST_PAIRS, "more pair")}`] : [];
  return ["", "What spoils it", ...lines, ...more];
}

function repairLines({ levels }: Validation): string[] {
  const spoilt = levels.filter(({ verdict, worst }) => verdict === "not good" && worst.length > 0);
  if (spoilt.length === 0) return [];
  const lines = spoilt.slice(0, MOST_PAIRS).flatMap(({ columns, repair }) => {
    const rows = repair.re.map((row, r) => row.map((x, c) => entry(x, repair.im?.[r]?.[c] ?? 0)));
    if (rows.length > 8)
      return [`  states ${columns.join(", ")}: --format json holds the ${rows.length} × ${rows.length} rotation`];
    const titles = columns.map((_, k) => ({ title: `new ${k}`, align: "right" as const }));
    return grid(
      [{ title: "old state", align: "right" }, ...titles],
      rows.map((row, r) => [String(columns[r] ?? ""), ...row]),
      { indent: "  " },
    );
  });
  return ["", "Rotations that repair it (new state k = Σ old state × entry)", ...lines];
}

function entry(re: number, im: number): string {
  const x = numberText(re);
  if (im === 0) return x;
  return `${re === 0 ? "" : x}${im > 0 && re !== 0 ? "+" : ""}${numberText(im)}i`;
}
