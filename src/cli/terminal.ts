import { randomUUID } from "node:crypto";
import { existsSync, readFileSync, renameSync, rmSync, statSync, writeFileSync } from "node:fs";
import { basename, dirname, join } from "node:path";

/** A file to be written. */
export interface FileToWrite {
  readonly path: string;
  readonly text: string;
}

/** Everything outside the program that it touches; tests bring their own. */
export interface Terminal {
  /** The text of a file; "-" is standard input. Throws what the platform throws. */
  readonly read: (path: string) => string;
  readonly exists: (path: string) => boolean;
  /** Writes all files or none. Throws what the platform throws. */
  readonly write: (files: readonly FileToWrite[]) => void;
  readonly print: (text: string) => void;
  readonly complain: (text: string) => void;
  /** Whether what is printed, and what is complained, goes to a screen with colours. */
  readonly colours: { readonly print: boolean; readonly complain: boolean };
  /** Whether complaints go to a screen, so that progress may be shown there. */
  readonly interactive: boolean;
  /** A clock, in milliseconds. */
  readonly now: () => number;
}

/** The terminal of this process. */
export function processTerminal(): Terminal {
  const { stdout, stderr } = process;
  return {
    read: (path) => readFileSync(path === "-" ? 0 : path, "utf8"),
    exists: existsSync,
    write: writeFiles,
    print: (text) => {
      stdout.write(text);
    },
    complain: (text) => {
      stderr.write(text);
    },
    colours: { print: hasColours(stdout), complain: hasColours(stderr) },
    interactive: stderr.isTTY === true,
    now: () => performance.now(),
  };
}

/** True for a screen with colours, unless NO_COLOR or its relatives are set. */
function hasColours(stream: NodeJS.WriteStream): boolean {
  return stream.isTTY === true && stream.hasColors();
}

/** Every file is written in full under another name beside its own before the first one takes its place. */
function writeFiles(files: readonly FileToWrite[]): void {
  const staged: { readonly temporary: string; readonly path: string }[] = [];
  try {
    for (const { path, text } of files) {
      if (existsSync(path) && statSync(path).isDirectory()) throw new Error(`EISDIR: ${path} is a folder`);
      const temporary = join(dirname(path), `.${basename(path)}.${randomUUID()}.tmp`);
      staged.push({ temporary, path });
      writeFileSync(temporary, text, { flag: "wx" });
    }
    for (const { temporary, path } of staged) renameSync(temporary, path);
  } finally {
    for (const { temporary } of staged) rmSync(temporary, { force: true });
  }
}
