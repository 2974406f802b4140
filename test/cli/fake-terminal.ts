import { run } from "../../src/cli/run.js";
import type { FileToWrite, Terminal } from "../../src/cli/terminal.js";

/** What a run of the program did. */
export interface RunResult {
  readonly status: number;
  readonly out: string;
  readonly err: string;
  /** All files after the run, by path. */
  readonly files: ReadonlyMap<string, string>;
}

/** How the fake terminal behaves. */
export interface FakeOptions {
  readonly files?: Readonly<Record<string, string>>;
  readonly colours?: boolean;
  readonly interactive?: boolean;
  /** Milliseconds that pass between two looks at the clock. */
  readonly tick?: number;
  /** Whether writing fails. */
  readonly full?: boolean;
}

/** Runs the program on files that are in memory only. */
export function runFake(args: readonly string[], options: FakeOptions = {}): RunResult {
  const files = new Map(Object.entries(options.files ?? {}));
  let out = "";
  let err = "";
  let now = 0;
  const terminal: Terminal = {
    read: (path) => {
      const text = files.get(path);
      if (text === undefined) throw new Error("ENOENT: no such file or directory");
      return text;
    },
    exists: (path) => files.has(path),
    write: (written: readonly FileToWrite[]) => {
      if (options.full === true) throw new Error("ENOSPC: no space left on device");
      for (const { path, text } of written) files.set(path, text);
    },
    print: (text) => {
      out += text;
    },
    complain: (text) => {
      err += text;
    },
    colours: { print: options.colours ?? false, complain: options.colours ?? false },
    interactive: options.interactive ?? false,
    now: () => {
      now += options.tick ?? 0;
      return now;
    },
  };
  return { status: run(args, terminal), out, err, files };
}

/** A small problem: a pair of kets that V couples and A tells apart, and one ket by itself. */
export const GOOD: string = JSON.stringify(
  {
    format: "goodbasis-problem",
    formatVersion: 1,
    title: "A pair",
    invented: true,
    unit: "meV",
    kets: ["a", "b", "c"],
    h0: { diagonal: [1, 1, 2] },
    v: [
      [0, 0.5, 0],
      [0.5, 0, 0],
      [0, 0, 0],
    ],
    candidates: { A: { operator: { permutation: [1, 0, 2] }, label: "parity" }, B: { diagonal: [1, 2, 0] } },
  },
  undefined,
  2,
);

/** The same with two perturbations that no basis is good for. */
export const NOT_GOOD: string = JSON.stringify({
  format: "goodbasis-problem",
  formatVersion: 1,
  h0: { diagonal: [1, 1] },
  v: {
    V1: [
      [0, 1],
      [1, 0],
    ],
    V2: [
      [1, 0],
      [0, -1],
    ],
  },
});
