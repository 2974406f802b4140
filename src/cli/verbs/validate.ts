import { type Validation, validateBasis } from "../../certify/validate.js";
import { GoodBasisError } from "../../errors.js";
import type { ReadProblem } from "../../problem/read.js";
import { readBasis } from "../../problem/read-basis.js";
import { formatTable } from "../../report/format-table.js";
import type { Settings } from "../arguments.js";
import { markFirstWord } from "../colour.js";
import { headingLines, withHeading } from "../heading.js";
import { loadProblem, onProblem, readFile } from "../input.js";
import { checkOutputs, deliver } from "../output.js";
import { plainTable } from "../plain-table.js";
import { validationText } from "../validation-text.js";
import type { Verb } from "../verb.js";

/** Whether a basis that somebody brings is good. */
export const validateVerb: Verb = {
  name: "validate",
  usage: "validate FILE --basis PATH",
  files: 1,
  summary: "check a basis that you bring",
  about:
    "Checks a basis: orthonormal? eigenvectors of H0? labelled rightly? does V couple states inside a level? Names the worst\n" +
    "pairs and gives the rotation that repairs a level.",
  options: ["basis", "format", "out", "force", "resolution", "lambda"],
  examples: [
    "goodbasis validate problem.json --basis states.json",
    "goodbasis validate problem.json --basis states.mtx --format json --out validation.json",
  ],
  run: (terminal, settings, [path = ""]) => {
    const { basis } = settings;
    if (basis === undefined) {
      throw new GoodBasisError("option", "no basis is given; add --basis PATH (see goodbasis validate --help)");
    }
    checkOutputs(terminal, settings);
    const read = loadProblem(terminal, path);
    const { columns, labels } = readBasis(readFile(terminal, basis), {
      name: basis,
      kets: read.problem.kets,
      n: read.n,
    });
    const { resolution, lambda, refuseAbove, levelWidth } = { ...read.options, ...settings.find };
    const options = {
      ...(resolution === undefined ? {} : { resolution }),
      ...(lambda === undefined ? {} : { lambda }),
      ...(refuseAbove === undefined ? {} : { refuseAbove }),
      ...(levelWidth === undefined ? {} : { levelWidth }),
    };
    const validation = onProblem(read, settings, () => validateBasis(read.problem, columns, labels, options));
    const colours = terminal.colours.print && settings.out === undefined;
    deliver(terminal, settings, { text: textOf(settings, read, validation, colours) });
    return validation.verdict === "good" ? 0 : 1;
  },
};

function textOf(settings: Settings, read: ReadProblem, validation: Validation, colours: boolean): string {
  switch (settings.format) {
    case "text": {
      const mood = { good: "good", "not good": "bad", undecided: "open" } as const;
      const text = markFirstWord(validationText(validation), mood[validation.verdict], colours);
      return [...headingLines(read), text].join("\n");
    }
    case "json":
      return JSON.stringify({ title: read.title ?? null, invented: read.invented, ...validation }, undefined, 2);
    case "markdown":
    case "csv":
    case "latex":
      return formatTable(withHeading(stateTable(validation), read), settings.format);
    default:
      return settings.format satisfies never;
  }
}

/** One row a state. */
function stateTable({ unit, columns, levels, remarks }: Validation): ReturnType<typeof plainTable> {
  const names = Object.keys(columns[0]?.labels ?? {});
  const table = plainTable(
    unit,
    [
      { key: "state", title: "state", kind: "number" },
      { key: "level", title: "level", kind: "number" },
      { key: "E0", title: "E0", kind: "number" },
      { key: "residual", title: "‖H0 q − E q‖ ≤", kind: "number" },
      ...names.map((name) => ({ key: `label:${name}`, title: name, kind: "text" as const })),
      { key: "verdict", title: "level is", kind: "text" },
      { key: "partner", title: "coupled to", kind: "text" },
    ],
    columns.map(({ column, energy, eigenvector, labels }) => {
      const place = levels.findIndex((level) => level.columns.includes(column));
      const level = levels[place];
      const partners = (level?.worst ?? []).filter((pair) => pair.columns.includes(column));
      const partnerText = partners.map(
        ({ perturbation, columns: [a, b], size }) =>
          `${a === column ? b : a} (${perturbation}: ${size.toPrecision(6)})`,
      );
      return [
        column,
        place,
        energy,
        eigenvector.atMost,
        ...names.map((name) => labels[name]?.verdict ?? ""),
        level?.verdict ?? "",
        partnerText.join(", "),
      ];
    }),
  );
  return { ...table, notes: remarks };
}
