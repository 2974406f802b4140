import type { Settings } from "./arguments.js";
import type { VerbHelp } from "./help.js";
import type { Terminal } from "./terminal.js";

/** 0 good, 1 not good or undecided. */
export type Status = 0 | 1;

/** One of the program's verbs. */
export interface Verb extends VerbHelp {
  /** Number of files that it takes. */
  readonly files: number;
  /**
   * Does the job and delivers the result.
   *
   * @param paths - the files, as many as it takes
   * @throws GoodBasisError whatever is wrong with the input
   */
  readonly run: (terminal: Terminal, settings: Settings, paths: readonly string[]) => Status;
}
