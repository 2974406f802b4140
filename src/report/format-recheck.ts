import type { RecheckReport } from "../certify/recheck-report.js";
import { isObject, requireArgument, requireOptions } from "../misuse.js";
import { visible, wrapProse } from "./characters.js";
import { requireCount } from "./format-audit.js";
import { counted } from "./sentences.js";

/**
 * The report of a re-check as text to read: whether the certificate stands, and otherwise where it fails.
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
 * console.log(formatRecheck({ ok: true, checked: 128, findings: [] }));
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
  const { ok, checked, findings } = report;
  const statements = counted(checked, "statement");
  const claim = report.verdict === undefined ? "" : `; its verdict is ${report.verdict.toUpperCase()}`;
  if (ok) return `VERIFIED: all ${statements} of the certificate hold for these operators${claim}`;
  const lines = [`REFUSED: ${counted(findings.length, "finding")} among ${statements}`, ""];
  for (const { path, message } of findings.slice(0, most)) {
    lines.push(`  ${visible(path)}`);
    lines.push(...wrapProse(visible(message), width - 4).map((line) => `    ${line}`));
  }
  if (findings.length > most) lines.push(`  … ${counted(findings.length - most, "more finding")}`);
  return lines.join("\n");
}

function isReport(value: unknown): boolean {
  if (!isObject(value) || !("ok" in value) || !("checked" in value) || !("findings" in value)) return false;
  const { ok, checked, findings } = value;
  return typeof ok === "boolean" && typeof checked === "number" && Array.isArray(findings) && findings.every(isObject);
}
