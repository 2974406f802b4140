import { existsSync, readdirSync, readFileSync } from "node:fs";
import { join, relative } from "node:path";

/** What a fence asks for: `ts` runs, `ts no-run` is type-checked only, `ts no-check` is left alone. */
type SnippetMode = "run" | "no-run" | "no-check";

/** One `ts` fence of a guide or a docstring, as a module of its own. */
export interface Snippet {
  /** Path below the repository root, with forward slashes. */
  readonly file: string;
  /** Line of the first line of code, counted from 1. */
  readonly line: number;
  readonly mode: SnippetMode;
  /** The code after as many empty lines as precede it in its file, so that every reported line is the file's own. */
  readonly code: string;
  /** Absolute path that the module would have; nothing is written there. */
  readonly id: string;
}

const SUFFIX = ".snippet.ts";
const MODES: Readonly<Record<string, SnippetMode>> = { "": "run", "no-run": "no-run", "no-check": "no-check" };

/** README.md, DEVELOPERS.md and every Markdown file under docs, below `root`. */
export function markdownFiles(root: string): string[] {
  const top = ["README.md", "DEVELOPERS.md"].map((name) => join(root, name)).filter((path) => existsSync(path));
  return [...top, ...filesBelow(join(root, "docs"), ".md")];
}

/** Every file below `directory` whose name ends in `extension`, sorted. */
export function filesBelow(directory: string, extension: string): string[] {
  if (!existsSync(directory)) return [];
  return readdirSync(directory, { recursive: true, withFileTypes: true })
    .filter((entry) => entry.isFile() && entry.name.endsWith(extension))
    .map((entry) => join(entry.parentPath, entry.name))
    .sort();
}

/** All snippets of the guides and of the docstrings under src. */
export function allSnippets(root: string): Snippet[] {
  const files = [...markdownFiles(root), ...filesBelow(join(root, "src"), ".ts")];
  return files.flatMap((path) =>
    snippetsOf(root, relative(root, path).replaceAll("\\", "/"), readFileSync(path, "utf8")),
  );
}

/** The snippet whose module has this path, or nothing when the path names none. */
export function snippetById(root: string, id: string): Snippet | undefined {
  if (!id.endsWith(SUFFIX)) return undefined;
  const path = id.slice(0, -SUFFIX.length).replace(/\.L\d+$/, "");
  if (!existsSync(path)) return undefined;
  const file = relative(root, path).replaceAll("\\", "/");
  return snippetsOf(root, file, readFileSync(path, "utf8")).find((snippet) => snippet.id === id);
}

/** The snippets of one file: Markdown as it stands, TypeScript by its docstrings. */
export function snippetsOf(root: string, file: string, text: string): Snippet[] {
  const raw = text.split(/\r?\n/);
  const lines = file.endsWith(".ts") ? docstringLines(raw) : raw;
  const snippets: Snippet[] = [];
  for (let i = 0; i < lines.length; i++) {
    const opening = /^(\s*)(`{3,})(.*)$/.exec(lines[i] ?? "");
    if (opening === null) continue;
    const [, indent = "", fence = "", info = ""] = opening;
    const start = i + 1;
    i = start;
    while (i < lines.length && lines[i]?.trim() !== fence) i++;
    if (i === lines.length) throw new Error(`${file}:${start}: this code fence is never closed`);
    const [language, ...rest] = info.trim().split(/\s+/);
    if (language !== "ts") continue;
    const mode = MODES[rest.join(" ")];
    if (mode === undefined)
      throw new Error(`${file}:${start}: unknown fence "${info}"; use ts, ts no-run or ts no-check`);
    const body = lines.slice(start, i).map((line) => (line.startsWith(indent) ? line.slice(indent.length) : line));
    snippets.push({
      file,
      line: start + 1,
      mode,
      code: `${"\n".repeat(start)}${body.join("\n")}\n`,
      id: `${join(root, file)}.L${start + 1}${SUFFIX}`,
    });
  }
  return snippets;
}

/** The text of the docstrings, line for line; every other line is blank. */
function docstringLines(lines: readonly string[]): string[] {
  let inside = false;
  return lines.map((line) => {
    if (!inside) {
      inside = line.trimStart().startsWith("/**") && !line.includes("*/");
      return "";
    }
    if (line.includes("*/")) {
      inside = false;
      return "";
    }
    return line.replace(/^\s*\* ?/, "");
  });
}
