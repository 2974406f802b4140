import { fileURLToPath } from "node:url";
import { afterEach, beforeEach, describe, expect, it, vi } from "vitest";
import { allSnippets, snippetsOf } from "./snippets.js";
import { typeErrors } from "./type-check.js";

const root = fileURLToPath(new URL("../../", import.meta.url));
const checked = allSnippets(root).filter((snippet) => snippet.mode !== "no-check");

describe("snippets of README, guides and docstrings", () => {
  beforeEach(() => {
    vi.spyOn(console, "log").mockImplementation(() => undefined);
  });
  afterEach(() => {
    vi.restoreAllMocks();
  });

  it("type-check", () => {
    expect(typeErrors(root, checked)).toEqual([]);
  });

  for (const { id, file, line } of checked.filter((snippet) => snippet.mode === "run")) {
    it(`${file}:${line} runs`, async () => {
      try {
        await import(/* @vite-ignore */ id);
      } catch (error) {
        throw new Error(`the snippet at ${file}:${line} threw: ${String(error)}`, { cause: error });
      }
    });
  }
});

describe("the snippet tests themselves", () => {
  const [fence, broken] = [
    "```",
    'import { nothing } from "goodbasis";\nconst n: number = "one";\nconsole.log(n, nothing);',
  ];

  it("find fences in Markdown and in docstrings, at their own lines", () => {
    const guide = `# Title\n\n- item\n\n  ${fence}ts no-run\n  const a = 1;\n  ${fence}\n\n${fence}sh\nls\n${fence}\n`;
    const source = `/**\n * Doc.\n * ${fence}ts\n * const b = 2;\n * ${fence}\n */\nexport const c = 3;\n`;
    expect(snippetsOf(root, "docs/a.md", guide)).toMatchObject([
      { line: 6, mode: "no-run", code: "\n\n\n\n\nconst a = 1;\n" },
    ]);
    expect(snippetsOf(root, "src/a.ts", source)).toMatchObject([
      { line: 4, mode: "run", code: "\n\n\nconst b = 2;\n" },
    ]);
  });

  it("refuse a fence that is never closed or has an unknown mark", () => {
    expect(() => snippetsOf(root, "docs/a.md", `text\n${fence}ts\ncode`)).toThrow(
      "docs/a.md:2: this code fence is never closed",
    );
    expect(() => snippetsOf(root, "docs/a.md", `${fence}ts norun\n${fence}`)).toThrow(
      'docs/a.md:1: unknown fence "ts norun"',
    );
  });

  it("report a type error with the file and line where it stands", () => {
    const errors = typeErrors(root, snippetsOf(root, "docs/a.md", `text\n${fence}ts\n${broken}\n${fence}\n`));
    expect(errors).toHaveLength(2);
    expect(errors[0]).toMatch(/^docs\/a\.md:3: .*nothing/);
    expect(errors[1]).toMatch(/^docs\/a\.md:4: .*not assignable/);
  });
});
