import type { Audit } from "../audit/audit.js";
import type { PreparedProblem } from "../audit/problem.js";
import { buildSectors } from "../refine/sectors.js";
import { TreeBuilder } from "../refine/tree.js";
import type { SetReport } from "./findings.js";

/** The commuting set that carries the basis, and the conserved candidates outside it. */
export interface Backbone {
  /** Places among the problem's candidates. */
  readonly members: readonly number[];
  readonly others: readonly number[];
  readonly reports: readonly SetReport[];
}

/** At most this many sets are compared, the largest first; the audit lists all it found. */
const SETS_COMPARED = 256;

/**
 * Picks the maximal commuting set that leaves the fewest pairs of states together; the first listed among equals.
 *
 * Each set is tried by refining the whole space by its labels alone, which needs no eigensolver for diagonal and monomial
 * candidates.
 */
export function chooseBackbone(problem: PreparedProblem, audit: Audit): Backbone {
  const place = new Map(problem.candidates.map((candidate, k) => [candidate.name, k]));
  const conserved = audit.candidates.flatMap((finding, k) => (finding.conserved ? [k] : []));
  const sets = [...audit.sets]
    .sort((a, b) => b.length - a.length)
    .slice(0, SETS_COMPARED)
    .map((names) => names.map((name) => place.get(name) as number));
  const only = sets[0];
  if (sets.length <= 1) return { members: only ?? [], others: [], reports: [] };
  const tried = sets.map((members) => {
    const { sectors } = buildSectors(problem, members, [], new TreeBuilder(), false);
    const sizes = sectors.map((sector) => sector.frame.rows);
    return {
      members,
      sectors: sizes.length,
      largest: Math.max(...sizes),
      pairsTogether: sizes.reduce((sum, d) => sum + (d * (d - 1)) / 2, 0),
    };
  });
  const best = tried.reduce((a, b) => (b.pairsTogether < a.pairsTogether ? b : a));
  return {
    members: best.members,
    others: conserved.filter((k) => !best.members.includes(k)),
    reports: tried.map(({ members, sectors, largest, pairsTogether }) => ({
      names: members.map((k) => problem.candidates[k]?.name ?? ""),
      sectors,
      largest,
      pairsTogether,
      chosen: members === best.members,
    })),
  };
}
