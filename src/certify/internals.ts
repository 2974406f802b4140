import type { PreparedProblem } from "../audit/problem.js";
import type { Levels } from "../refine/levels.js";
import type { ResolvedLevel } from "../refine/resolve.js";
import type { Sectors } from "../refine/sectors.js";
import type { LevelStates } from "./level-states.js";

/** The working data of a study, kept behind a certified basis for what is computed from it later. */
export interface StudyInternals {
  readonly problem: PreparedProblem;
  readonly sectors: Sectors;
  readonly levels: Levels;
  readonly resolved: readonly ResolvedLevel[];
  readonly states: readonly LevelStates[];
}
