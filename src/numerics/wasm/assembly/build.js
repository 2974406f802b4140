// Compiles the kernels of this folder into ../kernels.ts, the module that travels in the package.
//
//   node build.js           writes ../kernels.ts
//   node build.js --check   fails where ../kernels.ts is not what the sources compile to

import { readFileSync, writeFileSync } from "node:fs";
import { join } from "node:path";
import { fileURLToPath } from "node:url";
import asc from "assemblyscript/asc";

const target = fileURLToPath(new URL("../kernels.ts", import.meta.url));
const OPTIONS = ["--enable", "simd", "-O3", "--runtime", "stub", "--noAssert", "--disableWarning", "112"];

/** The TypeScript module that the sources compile to; the same text on every machine. */
export async function compileKernels() {
  const folder = fileURLToPath(new URL(".", import.meta.url));
  let binary;
  const { error, stderr } = await asc.main(["index.ts", "--baseDir", folder, "--outFile", "kernels.wasm", ...OPTIONS], {
    // Imports name the file with its extension; the compiler appends one to every name.
    readFile: (name) => {
      try {
        return readFileSync(join(folder, name.replace(/\.ts\.ts$/, ".ts")), "utf8");
      } catch {
        return null;
      }
    },
    writeFile: (name, contents) => {
      if (name === "kernels.wasm") binary = contents;
    },
  });
  if (error || binary === undefined)
    throw new Error(`the kernels do not compile:\n${stderr.toString()}`, { cause: error });
  const base64 = Buffer.from(binary).toString("base64");
  return `/**
 * The WebAssembly kernels, compiled from the sources in ./assembly by \`npm run build:kernels\`, as base64.
 *
 * @internal
 */
export const KERNELS: string =
  "${base64}";
`;
}

if (process.argv[1] === fileURLToPath(import.meta.url)) {
  const text = await compileKernels();
  if (!process.argv.includes("--check")) writeFileSync(target, text);
  else if (readFileSync(target, "utf8") !== text) {
    console.error("src/numerics/wasm/kernels.ts is not what its sources compile to; run `npm run build:kernels`");
    process.exitCode = 1;
  }
}
