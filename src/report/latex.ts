import { visible } from "./characters.js";
import { type ExpansionStyle, expansionText } from "./expansion.js";
import { labelText } from "./labels.js";
import type { Cell, Table, TableColumn } from "./table.js";
import { bodyText, cellText, headText, levelStarts } from "./typeset-cell.js";

const LATEX_EXPANSION: ExpansionStyle = {
  ket: (name) => `|${mathName(name)}\\rangle`,
  number: mathNumber,
  dots: "\\ldots",
};

/** A plain LaTeX `tabular`, without packages; specials are escaped, kets stand as $|…\rangle$. */
export function latexTable(table: Table, digits: number, notes: boolean): string {
  const places = table.columns.map((column) => (column.kind === "text" || column.kind === "expansion" ? "l" : "r"));
  const plain = bodyText(table, digits);
  const starts = levelStarts(table);
  const body = table.rows.flatMap((row, r) => {
    const cells = table.columns.map((column, c) =>
      plain[r]?.[c] === "" ? "" : latexCell(row.cells[c] ?? { kind: "none" }, column, digits),
    );
    return [...(starts.has(r) ? ["\\hline"] : []), `${cells.join(" & ")} \\\\`];
  });
  const heads = table.columns.map((column) => latexText(headText(column)));
  const lines = [`\\begin{tabular}{${places.join("")}}`, "\\hline", `${heads.join(" & ")} \\\\`, "\\hline"];
  lines.push(...body, "\\hline", "\\end{tabular}");
  if (notes) lines.push(...table.notes.map((note) => `\\par ${latexText(note)}`));
  return lines.join("\n");
}

function latexCell(cell: Cell, column: TableColumn, digits: number): string {
  switch (cell.kind) {
    case "none":
      return "---";
    case "number":
    case "bounded":
      return `$${mathNumber(cellText(cell, column, digits))}$`;
    case "label":
      return `$${mathLabel(labelText(cell.label))}$`;
    case "text":
      return latexText(cell.text);
    case "expansion": {
      const { terms, leftOut } = cell;
      const math = expansionText({ terms, leftOut: { terms: 0, weight: 0 } }, LATEX_EXPANSION);
      if (leftOut.terms === 0) return `$${math}$`;
      const shown = terms.length === 0 ? "" : `${math} `;
      const rest = expansionText({ terms: [], leftOut }, LATEX_EXPANSION).replace("weight ", "\\mbox{weight }");
      return `$${shown}${rest}$`;
    }
    default:
      return cell satisfies never;
  }
}

/** `1.2e−9` as `1.2\times 10^{-9}`, ± as `\pm`. */
function mathNumber(text: string): string {
  return text
    .replace(/(^|[^\d.])1e([−\d]+)/gu, "$110^{$2}")
    .replace(/e(−?\d+)/gu, "\\times 10^{$1}")
    .replaceAll("−", "-")
    .replaceAll("±", "\\pm")
    .replaceAll("∞", "\\infty");
}

function mathLabel(text: string): string {
  const root = /^exp\(2πi·(.+)\)$/u.exec(text);
  if (root !== null) return `e^{2\\pi i\\cdot ${root[1] ?? ""}}`;
  const mean = /^⟨(.*)⟩$/u.exec(text);
  if (mean !== null) return `\\langle ${mathNumber(mean[1] ?? "")}\\rangle`;
  return mathNumber(text);
}

/** Names of kets with letters stand upright, others as the numbers they are. */
function mathName(name: string): string {
  const escaped = [...visible(name)]
    .map((character) => MATH[character] ?? TEXT_SCRIPTS[character] ?? character)
    .join("");
  return /\p{L}/u.test(name) ? `\\mathrm{${escaped}}` : escaped;
}

/** Text outside of mathematics: specials escaped, signs of the trade translated. */
export function latexText(text: string): string {
  return visible(text).replace(
    /([⁻⁺⁰¹²³⁴-⁹]+)|([₀-₉₋₊]+)|\b(E)(\d)\b|([\s\S])/gu,
    (_, up, down, letter, digit, single) => {
      if (up !== undefined) return `$^{${scripts(up)}}$`;
      if (down !== undefined) return `$_{${scripts(down)}}$`;
      if (letter !== undefined) return `$${letter}_${digit}$`;
      return TEXT[single] ?? (single === " " || MATH[single] === undefined ? single : `$${MATH[single].trim()}$`);
    },
  );
}

function scripts(run: string): string {
  return [...run].map((character) => PLAIN_SCRIPTS[character] ?? character).join("");
}

const PLAIN_SCRIPTS: Readonly<Record<string, string>> = Object.fromEntries([
  ...[..."⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺"].map((character, k) => [character, "0123456789-+"[k] ?? ""]),
  ...[..."₀₁₂₃₄₅₆₇₈₉₋₊"].map((character, k) => [character, "0123456789-+"[k] ?? ""]),
]);

const TEXT_SCRIPTS: Readonly<Record<string, string>> = Object.fromEntries([
  ...[..."⁰¹²³⁴⁵⁶⁷⁸⁹⁻⁺"].map((character) => [character, `{}^{${PLAIN_SCRIPTS[character] ?? ""}}`]),
  ...[..."₀₁₂₃₄₅₆₇₈₉₋₊"].map((character) => [character, `{}_{${PLAIN_SCRIPTS[character] ?? ""}}`]),
]);

/** Signs outside of mathematics. */
const TEXT: Readonly<Record<string, string>> = {
  "\\": "\\textbackslash{}",
  "{": "\\{",
  "}": "\\}",
  "#": "\\#",
  $: "\\$",
  "%": "\\%",
  "&": "\\&",
  _: "\\_",
  "^": "\\textasciicircum{}",
  "~": "\\textasciitilde{}",
  "[": "{[}",
  "]": "{]}",
  "*": "{*}",
  "|": "$|$",
  "<": "$<$",
  ">": "$>$",
  "—": "---",
  "…": "\\ldots{}",
};

/** Signs inside of mathematics. */
const MATH: Readonly<Record<string, string>> = {
  "\\": "\\backslash ",
  "{": "\\{",
  "}": "\\}",
  "#": "\\#",
  $: "\\$",
  "%": "\\%",
  "&": "\\&",
  _: "\\_",
  "^": "{\\wedge}",
  "~": "{\\sim}",
  " ": "\\ ",
  "−": "-",
  "±": "\\pm ",
  "·": "\\cdot ",
  "×": "\\times ",
  "≤": "\\le ",
  "≥": "\\ge ",
  "∞": "\\infty ",
  "⟨": "\\langle ",
  "⟩": "\\rangle ",
  "↑": "{\\uparrow}",
  "↓": "{\\downarrow}",
  "→": "{\\rightarrow}",
  "√": "\\surd ",
  "′": "'",
  "†": "{\\dagger}",
  "‖": "\\| ",
  α: "\\alpha ",
  β: "\\beta ",
  γ: "\\gamma ",
  δ: "\\delta ",
  ε: "\\epsilon ",
  ζ: "\\zeta ",
  η: "\\eta ",
  θ: "\\theta ",
  κ: "\\kappa ",
  λ: "\\lambda ",
  μ: "\\mu ",
  ν: "\\nu ",
  ξ: "\\xi ",
  π: "\\pi ",
  ρ: "\\rho ",
  σ: "\\sigma ",
  τ: "\\tau ",
  φ: "\\phi ",
  χ: "\\chi ",
  ψ: "\\psi ",
  ω: "\\omega ",
  Γ: "\\Gamma ",
  Δ: "\\Delta ",
  Θ: "\\Theta ",
  Λ: "\\Lambda ",
  Ξ: "\\Xi ",
  Π: "\\Pi ",
  Σ: "\\Sigma ",
  Φ: "\\Phi ",
  Ψ: "\\Psi ",
  Ω: "\\Omega ",
};
