import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Sector } from "./sectors.js";

/**
 * Which levels are studied.
 *
 * `"all"`; the `lowest` k; the `count` (default 1) levels `nearest` an energy; or all levels in the window `from`..`to`,
 * ends included. Energies in the problem's unit.
 */
export type LevelChoice =
  | "all"
  | { readonly lowest: number }
  | { readonly nearest: number; readonly count?: number }
  | { readonly from: number; readonly to: number };

/** The vectors of one sector that belong to one level. */
export interface LevelPart {
  readonly sector: number;
  /** Places of the vectors within the sector, ascending. */
  readonly indices: Int32Array;
}

/** A level of H0: states of all sectors whose energies are not told apart. */
export interface Level {
  /** Place among all levels, by ascending energy. */
  readonly place: number;
  /** Middle of the energies. */
  readonly energy: number;
  /** Highest minus lowest energy. */
  readonly spread: number;
  readonly degeneracy: number;
  /** Distance to the next energy below; Infinity for the lowest level. */
  readonly gapBelow: number;
  /** Distance to the next energy above; Infinity for the highest level. */
  readonly gapAbove: number;
  readonly parts: readonly LevelPart[];
}

/** All levels and which of them were asked for. */
export interface Levels {
  readonly count: number;
  /** Level number of each vector of each sector. */
  readonly of: readonly Int32Array[];
  /** Energy of each level, ascending. */
  readonly energies: Float64Array;
  readonly studied: readonly Level[];
}

/**
 * Clusters the energies of all sectors by their gaps and picks the levels that were asked for.
 *
 * @param width - neighbouring energies up to this far apart are one level
 * @throws GoodBasisError `option` for a malformed choice, `no-level` for one that matches nothing
 */
export function formLevels(sectors: readonly Sector[], width: number, choice: LevelChoice): Levels {
  const levelOf = new Map<number, number>();
  for (const { energies } of sectors) for (let i = 0; i < energies.length; i++) levelOf.set(energies[i] as number, 0);
  const sorted = new Float64Array([...levelOf.keys()]).sort();
  const low: number[] = [];
  const high: number[] = [];
  for (let k = 0; k < sorted.length; k++) {
    const energy = sorted[k] as number;
    if (k === 0 || energy - (sorted[k - 1] as number) > width) low.push(energy);
    high[low.length - 1] = energy;
    levelOf.set(energy, low.length - 1);
  }
  const energies = new Float64Array(low.map((bottom, k) => bottom + ((high[k] as number) - bottom) / 2));
  const of = sectors.map((sector) => {
    const levels = new Int32Array(sector.energies.length);
    for (let i = 0; i < levels.length; i++) levels[i] = levelOf.get(sector.energies[i] as number) ?? 0;
    return levels;
  });
  const chosen = new Set(choose(choice, energies, low, high));
  const parts = new Map<number, Map<number, number[]>>();
  of.forEach((levels, sector) => {
    for (let i = 0; i < levels.length; i++) {
      const level = levels[i] as number;
      if (!chosen.has(level)) continue;
      let bySector = parts.get(level);
      if (bySector === undefined) {
        bySector = new Map();
        parts.set(level, bySector);
      }
      const list = bySector.get(sector);
      if (list === undefined) bySector.set(sector, [i]);
      else list.push(i);
    }
  });
  const studied = [...chosen]
    .sort((a, b) => a - b)
    .map((place): Level => {
      const own = [...(parts.get(place) ?? new Map<number, number[]>())].map(
        ([sector, indices]): LevelPart => ({ sector, indices: new Int32Array(indices) }),
      );
      return {
        place,
        energy: energies[place] as number,
        spread: (high[place] as number) - (low[place] as number),
        degeneracy: own.reduce((sum, part) => sum + part.indices.length, 0),
        gapBelow: place === 0 ? Number.POSITIVE_INFINITY : (low[place] as number) - (high[place - 1] as number),
        gapAbove:
          place === low.length - 1 ? Number.POSITIVE_INFINITY : (low[place + 1] as number) - (high[place] as number),
        parts: own,
      };
    });
  return { count: low.length, of, energies, studied };
}

function choose(
  choice: LevelChoice,
  energies: Float64Array,
  low: readonly number[],
  high: readonly number[],
): number[] {
  const all = Array.from(energies, (_, place) => place);
  if (choice === "all") return all;
  if (typeof choice !== "object" || choice === null) throw malformed(choice);
  const fields = "lowest" in choice ? ["lowest"] : "nearest" in choice ? ["nearest", "count"] : ["from", "to"];
  if (Object.keys(choice).some((name) => !fields.includes(name))) throw malformed(choice);
  if ("lowest" in choice) {
    if (!Number.isInteger(choice.lowest) || choice.lowest < 1) throw malformed(choice);
    return all.slice(0, choice.lowest);
  }
  if ("nearest" in choice) {
    const count = choice.count === undefined ? 1 : choice.count;
    if (!Number.isFinite(choice.nearest) || !Number.isInteger(count) || count < 1) throw malformed(choice);
    const distance = (place: number): number => Math.abs((energies[place] as number) - choice.nearest);
    return all.sort((a, b) => distance(a) - distance(b) || a - b).slice(0, count);
  }
  if (!("from" in choice) || !("to" in choice)) throw malformed(choice);
  const { from, to } = choice;
  if (typeof from !== "number" || typeof to !== "number" || !(from <= to)) throw malformed(choice);
  const found = all.filter((place) => (high[place] as number) >= from && (low[place] as number) <= to);
  if (found.length > 0) return found;
  const outside = (place: number): number => Math.max(from - (high[place] as number), (low[place] as number) - to);
  const near = all.sort((a, b) => outside(a) - outside(b))[0] as number;
  throw new GoodBasisError(
    "no-level",
    `no level lies between ${from} and ${to}; ` +
      (energies.length === 1
        ? `the only level is at ${energies[0]}`
        : `the ${energies.length} levels run from ${energies[0]} to ${energies[energies.length - 1]}, and the nearest is at ` +
          `${energies[near]}`),
    { from, to, lowest: energies[0], highest: energies[energies.length - 1], nearest: energies[near] },
  );
}

function malformed(choice: unknown): GoodBasisError {
  return new GoodBasisError(
    "option",
    `levels is ${shown(choice)}; give "all", { lowest: k }, { nearest: energy, count: k } or ` +
      "{ from: energy, to: energy } with whole k ≥ 1 and from ≤ to",
    { levels: choice },
  );
}
