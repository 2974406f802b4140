import { resolve } from "node:path";
import { GoodBasisError } from "../errors.js";
import type { Settings } from "./arguments.js";
import { reasonOf } from "./input.js";
import type { FileToWrite, Terminal } from "./terminal.js";

/**
 * Refuses output paths that exist, before any work is done.
 *
 * @throws GoodBasisError `output`
 */
export function checkOutputs(terminal: Terminal, { out, certificate, force }: Settings): void {
  if (out !== undefined && certificate !== undefined && resolve(out) === resolve(certificate)) {
    throw new GoodBasisError("output", `--out and --certificate both name ${out}; give two paths`, { path: out });
  }
  for (const path of [out, certificate]) {
    if (path === undefined || force || !terminal.exists(path)) continue;
    throw new GoodBasisError("output", `${path} exists already; give another path, or --force to replace it`, { path });
  }
}

/**
 * Prints the result or writes it, together with the certificate where one is asked for; all files are written or none.
 *
 * @throws GoodBasisError `output`
 */
export function deliver(
  terminal: Terminal,
  settings: Settings,
  result: { readonly text: string; readonly certificate?: () => string },
): void {
  checkOutputs(terminal, settings);
  const files: FileToWrite[] = [];
  const text = `${result.text.trimEnd()}\n`;
  if (settings.out !== undefined) files.push({ path: settings.out, text });
  if (settings.certificate !== undefined && result.certificate !== undefined) {
    files.push({ path: settings.certificate, text: `${result.certificate()}\n` });
  }
  if (files.length > 0) writeAll(terminal, files);
  if (settings.out === undefined) terminal.print(text);
}

function writeAll(terminal: Terminal, files: readonly FileToWrite[]): void {
  try {
    terminal.write(files);
  } catch (error) {
    const paths = files.map(({ path }) => path).join(", ");
    throw new GoodBasisError(
      "output",
      `${paths} cannot be written (${reasonOf(error)}); check the folder and the rights to it`,
      {
        paths,
      },
    );
  }
}
