import type { RecheckReport } from "../certify/recheck-report.js";
import { visible, wrapProse } from "./characters.js";
import { counted } from "./sentences.js";

/**
 * The report of a re-check as text to read: whether the certificate stands, and otherwise where it fails.
 *
 * @param report - from {@link recheck}
 * @param options - `width`: longest line, default 100; `findings`: most findings listed, default 20
 * @returns lines without a final line break
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
  const { width = 100, findings: most = 20 } = options;
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
