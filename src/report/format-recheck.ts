import type { RecheckReport } from "../certify/recheck-report.js";
import { isObject, requireArgument, requireOptions } from "../misuse.js";
import { visible, wrapProse } from "./characters.js";
import { requireCount } from "./format-audit.js";
import { counted } from "./sentences.js";

/**
 * The report of a re-check as text to read: whether the certificate stands, what was not checked, and otherwise where it fails.
 *
 * @param report - from {@link recheck}
 * @param options - `width`: longest line, default 100; `findings`: most findings listed, default 20
 * @returns lines without a final line break
 * @throws GoodBasisError `option` for something that is no report, or an option that there is not
 *
 * @example
 * ```ts
 * import { formatRecheck } from "goodbasis";
 *
 * console.log(formatRecheck({ ok: true, checked: 128, findings: [], notChecked: [] }));
 * ```
 */
export function formatRecheck(
  report: RecheckReport,
  options: { readonly width?: number; readonly findings?: number } = {},
): string {
  requireArgument(isReport(report), "formatRecheck", "a report of a re-check", report, "pass what recheck returns");
  requireOptions("formatRecheck", options, ["width", "findings"]);
  const width = requireCount("formatRecheck", "width", options.width ?? 100);
  const most = requireCount("formatRecheck", "findings", options.findings ?? 20);
  const { ok, checked, findings, notChecked } = report;
  const statements = counted(checked, "statement");
  if (ok) {
    const all = notChecked.length === 0;
    const holds = `${all ? "VERIFIED: all" : "VERIFIED IN PART:"} ${statements} of the certificate hold for these operators`;
    const lines = wrapProse(visible(`${holds}${verdictOf(report)}`), width);
    if (!all) lines.push("", "Not checked against the operators:");
    for (const sentence of notChecked)
      lines.push(...wrapProse(visible(sentence), width - 2).map((line) => `  ${line}`));
    return lines.join("\n");
  }
  const lines = [`REFUSED: ${counted(findings.length, "finding")} among ${statements}`, ""];
  for (const { path, message } of findings.slice(0, most)) {
    lines.push(`  ${visible(path)}`);
    lines.push(...wrapProse(visible(message), width - 4).map((line) => `    ${line}`));
  }
  if (findings.length > most) lines.push(`  … ${counted(findings.length - most, "more finding")}`);
  return lines.join("\n");
}

/** The verdict, and what it is relative to. */
function verdictOf({ verdict, relativeTo }: RecheckReport): string {
  if (verdict === undefined) return "";
  const claim = `; its verdict is ${verdict.toUpperCase()}`;
  if (relativeTo === undefined) return claim;
  const { resolution, lambda, stated, refuseAbove } = relativeTo;
  const number = (x: number): string => `${Number(x.toPrecision(3))}`;
  const at = stated ? `λ = ${number(lambda)}` : `a λ that nobody stated (at least ${number(lambda)})`;
  return `${claim}, relative to the resolution ${number(resolution)}, ${at} and the threshold ${number(refuseAbove)} as the certificate states them`;
}

function isReport(value: unknown): boolean {
  if (!isObject(value) || !("ok" in value) || !("checked" in value)) return false;
  if (!("findings" in value) || !("notChecked" in value)) return false;
  const { ok, checked, findings, notChecked } = value;
  if (typeof ok !== "boolean" || typeof checked !== "number") return false;
  if (!Array.isArray(findings) || !findings.every(isObject)) return false;
  return Array.isArray(notChecked) && notChecked.every((sentence) => typeof sentence === "string");
}
