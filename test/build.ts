import { spawnSync } from "node:child_process";
import { existsSync, rmSync, statSync } from "node:fs";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import { filesBelow } from "./docs/snippets.js";

const root = fileURLToPath(new URL("../", import.meta.url));

/** Where the package stands built for tests that start a process of their own, e.g. `join(builtPackage, "cli/main.js")`. */
export const builtPackage: string = join(root, ".test-build");

/** Builds the package once before the tests, unless the last build is newer than every source. */
export default function build(): void {
  const entry = join(builtPackage, "index.js");
  const sources = [
    ...filesBelow(join(root, "src"), ".ts"),
    ...["tsconfig.json", "tsconfig.build.json"].map((f) => join(root, f)),
  ];
  const newest = Math.max(...sources.map((path) => statSync(path).mtimeMs));
  if (existsSync(entry) && statSync(entry).mtimeMs > newest) return;
  rmSync(builtPackage, { recursive: true, force: true });
  const compiler = join(root, "node_modules/typescript/lib/tsc.js");
  const options = [compiler, "-p", join(root, "tsconfig.build.json"), "--outDir", builtPackage];
  const { stdout, status } = spawnSync(process.execPath, options, { encoding: "utf8" });
  // Type errors belong to the type-check; the tests run on what the compiler wrote.
  if (status !== 0) console.error(stdout);
}
