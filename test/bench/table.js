/**
 * A table with a heading, columns aligned: the first one to the left, the others to the right.
 *
 * @param {string} heading
 * @param {readonly string[]} columns - their names
 * @param {readonly (readonly string[])[]} rows
 * @param {readonly string[]} notes - lines below it
 * @returns {string}
 */
export function table(heading, columns, rows, notes) {
  const lines = [columns, ...rows];
  const widths = columns.map((_, c) => Math.max(...lines.map((line) => (line[c] ?? "").length)));
  const written = lines.map((line) =>
    line
      .map((cell, c) => (c === 0 ? cell.padEnd(widths[c] ?? 0) : cell.padStart(widths[c] ?? 0)))
      .join("  ")
      .trimEnd(),
  );
  const rule = widths.map((width) => "-".repeat(width)).join("  ");
  const below = notes.map((note) => `  ${note}`);
  return [`## ${heading}`, "", written[0], rule, ...written.slice(1), ...below, ""].join("\n");
}

/**
 * A time in milliseconds, written in seconds or milliseconds with three digits.
 *
 * @param {number} ms
 * @returns {string}
 */
export function time(ms) {
  return ms < 1000 ? `${digits(ms)} ms` : `${digits(ms / 1000)} s`;
}

/**
 * Three significant digits without an exponent.
 *
 * @param {number} x
 * @returns {string}
 */
export function digits(x) {
  return x >= 100 ? Math.round(x).toLocaleString("en-US") : x.toPrecision(3);
}

/**
 * How a time grows from one dimension to the next: the exponent p of n^p between the two.
 *
 * @param {{ n: number, ms: number } | undefined} before
 * @param {{ n: number, ms: number }} now
 * @returns {string}
 */
export function growth(before, now) {
  if (before === undefined) return "";
  return `n^${(Math.log(now.ms / before.ms) / Math.log(now.n / before.n)).toFixed(2)}`;
}
