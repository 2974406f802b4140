import { existsSync, readFileSync } from "node:fs";
import { dirname, join, relative } from "node:path";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { markdownFiles } from "./snippets.js";

const root = fileURLToPath(new URL("../../", import.meta.url));

/** Links of a Markdown text that lead to this repository, with their lines; code is left out. */
function localLinks(text: string): { line: number; target: string }[] {
  const blank = (code: string): string => code.replace(/[^\n]/g, " ");
  const prose = text.replace(/^\s*(`{3,})[^\n]*\n[\s\S]*?^\s*\1\s*$/gm, blank).replace(/`[^`\n]*`/g, blank);
  return prose
    .split("\n")
    .flatMap((content, i) =>
      [...content.matchAll(/\]\(<?([^)\s>]+)>?[^)]*\)|^\s*\[[^\]]+\]:\s*(\S+)/g)]
        .map((match) => ({ line: i + 1, target: match[1] ?? match[2] ?? "" }))
        .filter(({ target }) => !/^[a-z][a-z0-9+.-]*:/i.test(target)),
    );
}

/** The anchors that the headings of a Markdown text get: lower case, punctuation dropped, spaces as hyphens. */
function anchors(text: string): string[] {
  return [...text.matchAll(/^#{1,6}\s+(.+?)\s*#*$/gm)].map((match) =>
    (match[1] ?? "")
      .toLowerCase()
      .replace(/[^\p{L}\p{N}\s_-]/gu, "")
      .replaceAll(" ", "-"),
  );
}

function brokenLinks(path: string, text: string): string[] {
  return localLinks(text).flatMap(({ line, target }) => {
    const [place = "", anchor] = target.split("#");
    const file = place === "" ? path : join(dirname(path), decodeURIComponent(place));
    const from = `${relative(root, path)}:${line}: ${target}`;
    if (file !== path && !existsSync(file)) return [`${from}: no such file`];
    if (anchor === undefined || !file.endsWith(".md")) return [];
    const headings = anchors(file === path ? text : readFileSync(file, "utf8"));
    return headings.includes(anchor) ? [] : [`${from}: no such heading`];
  });
}

describe("links in README, DEVELOPERS and guides", () => {
  it("lead to files and headings that exist", () => {
    const broken = markdownFiles(root).flatMap((path) => brokenLinks(path, readFileSync(path, "utf8")));
    expect(broken).toEqual([]);
  });

  it("are seen when broken, with file and line", () => {
    const text = "# One two\n\n[ok](#one-two) [site](https://example.org) [gone](gone.md)\n`[code](x)`\n[no](#three)\n";
    expect(brokenLinks(join(root, "docs/a.md"), text)).toEqual([
      "docs/a.md:3: gone.md: no such file",
      "docs/a.md:5: #three: no such heading",
    ]);
  });
});
