import { readFileSync } from "node:fs";
import { isBuiltin } from "node:module";
import { join, relative } from "node:path";
import { fileURLToPath } from "node:url";
import ts from "typescript";
import { describe, expect, it } from "vitest";
import { filesBelow } from "./docs/snippets.js";

interface Import {
  /** A path below src such as "numerics/csr.ts", or the name of a package. */
  readonly target: string;
  readonly local: boolean;
  readonly typeOnly: boolean;
}

/** The imports of every file, by its path below src. */
type Graph = ReadonlyMap<string, readonly Import[]>;

/** What each folder may import besides itself; src/errors.ts and src/misuse.ts are open to all, and cli and index.ts to everything. */
const BELOW: Readonly<Record<string, readonly string[]>> = {
  "errors.ts": [],
  "misuse.ts": [],
  "version.ts": [],
  numerics: [],
  exact: ["numerics"],
  operator: ["numerics", "exact"],
  audit: ["numerics", "exact", "operator"],
  models: ["numerics", "exact", "operator"],
  problem: ["exact", "operator", "models"],
  refine: ["numerics", "exact", "operator", "audit"],
  prove: ["numerics", "exact", "operator", "audit", "refine"],
  certify: ["version.ts", "numerics", "exact", "operator", "audit", "refine", "prove"],
  perturb: ["numerics", "exact", "operator", "audit", "refine", "certify"],
  report: ["numerics", "exact", "operator", "audit", "refine", "certify", "perturb"],
};
/** What a folder may import beyond that, as types alone: no code comes with them. */
const TYPES_BELOW: Readonly<Record<string, readonly string[]>> = { problem: ["numerics", "audit", "certify"] };
const RECHECKER = /^certify\/recheck/;
const RECHECKER_MAY_READ =
  /^(operator\/|(errors|misuse)\.ts$|audit\/(problem|label-family)\.ts$|numerics\/(rounding|csr)\.ts$|certify\/(recheck|seal\.ts$))/;
/** What checks an exact proof again reads its form and the arithmetic, and nothing that found it. */
const VERIFIER = /^prove\/(verify|value-text)/;
const VERIFIER_MAY_READ =
  /^(errors\.ts$|exact\/(operator|surd|vector)\.ts$|prove\/(problem|value-text|verify[a-z-]*)\.ts$)/;
const MOST_LINES = 450;

const src = fileURLToPath(new URL("../src/", import.meta.url));
const texts = new Map(
  filesBelow(src, ".ts").map((path) => [relative(src, path).replaceAll("\\", "/"), readFileSync(path, "utf8")]),
);

function importsOf(file: string, text: string): Import[] {
  const imports: Import[] = [];
  const add = (specifier: string, typeOnly: boolean): void => {
    const local = specifier.startsWith(".");
    const target = local ? join(file, "..", specifier).replaceAll("\\", "/").replace(/\.js$/, ".ts") : specifier;
    imports.push({ target, local, typeOnly });
  };
  const visit = (node: ts.Node): void => {
    if (ts.isImportDeclaration(node) && ts.isStringLiteral(node.moduleSpecifier)) {
      add(node.moduleSpecifier.text, node.importClause?.phaseModifier === ts.SyntaxKind.TypeKeyword);
    } else if (ts.isExportDeclaration(node) && node.moduleSpecifier && ts.isStringLiteral(node.moduleSpecifier)) {
      add(node.moduleSpecifier.text, node.isTypeOnly);
    } else if (ts.isImportTypeNode(node) && ts.isLiteralTypeNode(node.argument)) {
      if (ts.isStringLiteral(node.argument.literal)) add(node.argument.literal.text, true);
    } else if (ts.isCallExpression(node) && node.expression.kind === ts.SyntaxKind.ImportKeyword) {
      const [argument] = node.arguments;
      if (argument && ts.isStringLiteralLike(argument)) add(argument.text, false);
    }
    ts.forEachChild(node, visit);
  };
  visit(ts.createSourceFile(file, text, ts.ScriptTarget.Latest, true));
  return imports;
}

function graphOf(files: ReadonlyMap<string, string>): Graph {
  return new Map([...files].map(([file, text]) => [file, importsOf(file, text)]));
}

const folderOf = (file: string): string => file.split("/")[0] ?? file;

function upwardImports(graph: Graph): string[] {
  return [...graph].flatMap(([file, imports]) => {
    const folder = folderOf(file);
    if (folder === "cli" || file === "index.ts") return [];
    const below = BELOW[folder];
    if (below === undefined) return [`${file}: ${folder} has no place in the order of folders`];
    const allowed = [...below, folder, "errors.ts", "misuse.ts"];
    const types = TYPES_BELOW[folder] ?? [];
    return imports
      .filter(({ local, target }) => local && !allowed.includes(folderOf(target)))
      .filter(({ target, typeOnly }) => !(typeOnly && types.includes(folderOf(target))))
      .map(({ target }) => `${file} imports ${target}`);
  });
}

function recheckerImports(graph: Graph): string[] {
  return [...graph]
    .filter(([file]) => RECHECKER.test(file))
    .flatMap(([file, imports]) =>
      imports
        .filter(({ local, target }) => local && !RECHECKER_MAY_READ.test(target))
        // The layout of a certificate is shared as a type; no code comes with it.
        .filter(({ target, typeOnly }) => !(typeOnly && folderOf(target) === "certify"))
        .map(({ target }) => `${file} imports ${target}`),
    );
}

function verifierImports(graph: Graph): string[] {
  return [...graph]
    .filter(([file]) => VERIFIER.test(file))
    .flatMap(([file, imports]) =>
      imports
        .filter(({ local, target, typeOnly }) => local && !typeOnly && !VERIFIER_MAY_READ.test(target))
        .map(({ target }) => `${file} imports ${target}`),
    );
}

function nodeImports(graph: Graph): string[] {
  return [...graph]
    .filter(([file]) => folderOf(file) !== "cli")
    .flatMap(([file, imports]) =>
      imports
        .filter(({ target, local }) => !local && isBuiltin(target))
        .map(({ target }) => `${file} imports ${target}`),
    );
}

/** One cycle a strongly connected knot, as "a.ts -> b.ts -> a.ts"; type imports count too. */
function cycles(graph: Graph): string[] {
  const found: string[] = [];
  const done = new Set<string>();
  const walk = (file: string, path: readonly string[]): void => {
    const start = path.indexOf(file);
    if (start >= 0) {
      found.push([...path.slice(start), file].join(" -> "));
      return;
    }
    if (done.has(file)) return;
    for (const { target, local } of graph.get(file) ?? []) if (local) walk(target, [...path, file]);
    done.add(file);
  };
  for (const file of graph.keys()) walk(file, []);
  return found;
}

/** Names that an entry exports, one for each time; `export *` hides names and counts as a fault of its own. */
function exportedNames(text: string): string[] {
  return ts.createSourceFile("index.ts", text, ts.ScriptTarget.Latest, true).statements.flatMap((statement) => {
    if (!ts.isExportDeclaration(statement)) return [`not a list of exports: ${statement.getText().split("\n")[0]}`];
    const clause = statement.exportClause;
    if (clause === undefined || !ts.isNamedExports(clause)) return [`not a list of exports: ${statement.getText()}`];
    return clause.elements.map((element) => element.name.text);
  });
}

const twice = (names: readonly string[]): string[] => names.filter((name, i) => names.indexOf(name) !== i);

describe("the house", () => {
  const graph = graphOf(texts);

  it("has only imports that lead to a file", () => {
    const lost = [...graph].flatMap(([file, imports]) =>
      imports
        .filter(({ local, target }) => local && !texts.has(target))
        .map(({ target }) => `${file} imports ${target}`),
    );
    expect(lost).toEqual([]);
    expect(graph.size).toBeGreaterThan(0);
  });

  it("imports downwards only", () => {
    expect(upwardImports(graph)).toEqual([]);
  });

  it("has no import cycles", () => {
    expect(cycles(graph)).toEqual([]);
  });

  it("keeps the re-checker apart from the code it checks", () => {
    expect(recheckerImports(graph)).toEqual([]);
  });

  it("keeps what checks exact proofs apart from what finds them", () => {
    expect(verifierImports(graph)).toEqual([]);
    expect([...graph.keys()].filter((file) => VERIFIER.test(file)).length).toBeGreaterThan(1);
  });

  it("uses the platform in cli alone", () => {
    expect(nodeImports(graph)).toEqual([]);
  });

  it(`has no file longer than ${MOST_LINES} lines`, () => {
    const long = [...texts].filter(([, text]) => text.trimEnd().split("\n").length > MOST_LINES).map(([file]) => file);
    expect(long).toEqual([]);
  });

  it("lists every public name once, by name", () => {
    const names = exportedNames(texts.get("index.ts") ?? "");
    expect(names).toContain("GoodBasisError");
    expect(names.filter((name) => name.startsWith("not a list"))).toEqual([]);
    expect(twice(names)).toEqual([]);
  });
});

describe("the rules of the house say no", () => {
  const graph = graphOf(
    new Map([
      ["numerics/eigen.ts", 'import type { Operator } from "../operator/operator.js";'],
      ["operator/operator.ts", 'export { eigen } from "../numerics/eigen.js";\nimport "node:fs";'],
      [
        "certify/recheck.ts",
        'import { eigen } from "../numerics/eigen.js";\nimport type { C } from "./certificate.js";',
      ],
      [
        "certify/recheck-hash.ts",
        'import { C } from "./certificate.js";\nconst later = await import("../refine/tree.js");',
      ],
      [
        "certify/recheck-labels.ts",
        'import { p } from "../audit/problem.js";\nimport { s } from "./seal.js";\n' +
          'import { r } from "../audit/resolution.js";\nimport { S } from "../exact/surd.js";',
      ],
      ["prove/verify.ts", 'import { s } from "./split.js";\nimport type { R } from "./roots.js";'],
      ["prove/split.ts", 'import { v } from "./verify.js";'],
      ["problem/read.ts", 'let x: import("../refine/tree.js").Tree;'],
      ["problem/write.ts", 'import type { O } from "../certify/find.js";\nimport { f } from "../certify/find.js";'],
      ["attic/old.ts", ""],
    ]),
  );

  it("to an upward import and to a folder without a place", () => {
    expect(upwardImports(graph)).toEqual([
      "numerics/eigen.ts imports operator/operator.ts",
      "problem/read.ts imports refine/tree.ts",
      "problem/write.ts imports certify/find.ts",
      "attic/old.ts: attic has no place in the order of folders",
    ]);
  });

  it("to a cycle", () => {
    expect(cycles(graph)).toEqual([
      "numerics/eigen.ts -> operator/operator.ts -> numerics/eigen.ts",
      "prove/verify.ts -> prove/split.ts -> prove/verify.ts",
    ]);
  });

  it("to a re-checker that reads kernels, refine or the certificate's code", () => {
    expect(recheckerImports(graph)).toEqual([
      "certify/recheck.ts imports numerics/eigen.ts",
      "certify/recheck-hash.ts imports certify/certificate.ts",
      "certify/recheck-hash.ts imports refine/tree.ts",
      "certify/recheck-labels.ts imports audit/resolution.ts",
      "certify/recheck-labels.ts imports exact/surd.ts",
    ]);
  });

  it("to a verifier of proofs that reads what finds them", () => {
    expect(verifierImports(graph)).toEqual(["prove/verify.ts imports prove/split.ts"]);
  });

  it("to a platform module outside cli", () => {
    expect(nodeImports(graph)).toEqual(["operator/operator.ts imports node:fs"]);
  });

  it("to a name listed twice and to a wildcard", () => {
    const names = exportedNames(
      'export { a, type B } from "./a.js";\nexport { a } from "./c.js";\nexport * from "./d.js";',
    );
    expect(names).toEqual(["a", "B", "a", 'not a list of exports: export * from "./d.js";']);
    expect(twice(names)).toEqual(["a"]);
  });
});
