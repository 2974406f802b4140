import type { Plugin } from "vitest/config";
import { snippetById } from "./snippets.js";

/** Serves every snippet of the documentation as a module under the path in its `id`, without writing a file. */
export function snippetModules(root: string): Plugin {
  return {
    name: "snippet-modules",
    enforce: "pre",
    resolveId(id: string): string | undefined {
      return snippetById(root, id)?.id;
    },
    load(id: string): string | undefined {
      return snippetById(root, id)?.code;
    },
  };
}
