import { recheck } from "../../certify/recheck.js";
import type { RecheckReport } from "../../certify/recheck-report.js";
import { GoodBasisError } from "../../errors.js";
import { parseDocument } from "../../problem/document.js";
import { formatRecheck } from "../../report/format-recheck.js";
import { formatTable } from "../../report/format-table.js";
import type { Settings } from "../arguments.js";
import { markFirstWord } from "../colour.js";
import { loadProblem, nameOf, onProblem, readFile } from "../input.js";
import { checkOutputs, deliver } from "../output.js";
import { plainTable } from "../plain-table.js";
import type { Verb } from "../verb.js";

/** Whether a certificate stands. */
export const recheckVerb: Verb = {
  name: "recheck",
  usage: "recheck CERTIFICATE FILE",
  files: 2,
  summary: "verify a certificate against its problem",
  about:
    "Derives the claims of a certificate again from the operators, with code that shares nothing with the search. A changed\n" +
    "number, label, vector or operator is named, and so is what could not be checked against the operators. Exit status 0\n" +
    "if everything that was checked stands and the certified verdict is good, 1 if not.",
  options: ["format", "out", "force"],
  examples: [
    "goodbasis recheck problem.certificate.json problem.json",
    "goodbasis recheck problem.certificate.json problem.json --format json",
  ],
  run: (terminal, settings, [certificatePath = "", problemPath = ""]) => {
    checkOutputs(terminal, settings);
    if (certificatePath === "-" && problemPath === "-") {
      const message = "certificate and problem cannot both come from standard input; give a path for one of them";
      throw new GoodBasisError("option", message, {});
    }
    const text = readFile(terminal, certificatePath);
    const certificate = parseDocument({ name: nameOf(certificatePath), text }, text);
    const read = loadProblem(terminal, problemPath);
    const report = onProblem(read, settings, () => recheck(certificate, read.problem));
    const colours = terminal.colours.print && settings.out === undefined;
    deliver(terminal, settings, { text: textOf(settings, report, colours) });
    return report.ok && report.verdict === "good" ? 0 : 1;
  },
};

function textOf({ format }: Settings, report: RecheckReport, colours: boolean): string {
  switch (format) {
    case "text":
      return markFirstWord(formatRecheck(report), report.ok ? "good" : "bad", colours);
    case "json":
      return JSON.stringify(report, undefined, 2);
    case "markdown":
    case "csv":
    case "latex":
      return formatTable(
        plainTable(
          "",
          [
            { key: "path", title: "place", kind: "text" },
            { key: "message", title: "finding", kind: "text" },
          ],
          [
            ...report.findings.map(({ path, message }) => [path, message]),
            ...report.notChecked.map((sentence) => ["not checked", sentence]),
          ],
        ),
        format,
      );
    default:
      return format satisfies never;
  }
}
