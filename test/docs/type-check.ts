import { dirname, join } from "node:path";
import ts from "typescript";
import type { Snippet } from "./snippets.js";

/** Type-checks all snippets in one program, "goodbasis" being src/index.ts; one message a fault, with file and line. */
export function typeErrors(root: string, snippets: readonly Snippet[]): string[] {
  const codes = new Map(snippets.map((snippet) => [snippet.id, snippet]));
  const options = compilerOptions(root);
  const host = ts.createCompilerHost(options);
  const disk = { fileExists: host.fileExists, readFile: host.readFile, getSourceFile: host.getSourceFile };
  host.fileExists = (path) => codes.has(path) || disk.fileExists(path);
  host.readFile = (path) => codes.get(path)?.code ?? disk.readFile(path);
  host.getSourceFile = (path, language, onError, fresh) => {
    const snippet = codes.get(path);
    return snippet === undefined
      ? disk.getSourceFile(path, language, onError, fresh)
      : ts.createSourceFile(path, snippet.code, language, true);
  };
  const program = ts.createProgram([...codes.keys()], options, host);
  return [...codes.values()].flatMap((snippet) => {
    const source = program.getSourceFile(snippet.id);
    if (source === undefined) return [`${snippet.file}:${snippet.line}: not read by the compiler`];
    const found = [...program.getSyntacticDiagnostics(source), ...program.getSemanticDiagnostics(source)];
    return found.map((fault) => {
      const line = source.getLineAndCharacterOfPosition(fault.start ?? 0).line + 1;
      return `${snippet.file}:${line}: ${ts.flattenDiagnosticMessageText(fault.messageText, "\n  ")}`;
    });
  });
}

function compilerOptions(root: string): ts.CompilerOptions {
  const path = join(root, "tsconfig.json");
  const { config, error } = ts.readConfigFile(path, ts.sys.readFile);
  if (error !== undefined) throw new Error(ts.flattenDiagnosticMessageText(error.messageText, "\n"));
  const { options } = ts.parseJsonConfigFileContent({ ...config, files: [] }, ts.sys, dirname(path));
  return { ...options, declaration: false, isolatedDeclarations: false };
}
