import type { PreparedProblem } from "../audit/problem.js";
import { buildSectors } from "../refine/sectors.js";
import { TreeBuilder } from "../refine/tree.js";
import { wholeEvidence } from "./whole.js";

/** All eigenvalues of H0. */
export interface Spectrum {
  /** Ascending, each as often as it occurs. */
  readonly energies: Float64Array;
  /** Every exact eigenvalue lies within this of the one in its place. */
  readonly enclosure: number;
}

/** Diagonalises H0 alone, connected part by connected part: what a basis that is not complete is held against. */
export function spectrumOf(problem: PreparedProblem): Spectrum {
  const bare = { ...problem, perturbations: [], candidates: [] };
  const tree = new TreeBuilder();
  const sectors = buildSectors(bare, [], [], tree);
  const energies = new Float64Array(problem.n);
  let at = 0;
  for (const sector of sectors.sectors) {
    energies.set(sector.energies, at);
    at += sector.energies.length;
  }
  return { energies: energies.sort(), enclosure: wholeEvidence(bare, sectors, tree.nodes).energyEnclosure };
}

/** The eigenvalues within `width` of a level, and the distance from it to the nearest other one, both to within the enclosure. */
export function around(
  { energies, enclosure }: Spectrum,
  bottom: number,
  top: number,
  width: number,
): { count: number; gap: number } {
  let count = 0;
  let gap = Number.POSITIVE_INFINITY;
  for (const energy of energies) {
    const off = Math.max(bottom - energy, energy - top, 0);
    if (off <= width + enclosure) count++;
    else gap = Math.min(gap, off - enclosure);
  }
  return { count, gap };
}
