/** The maximal sets of mutually commuting members, each ascending, in lexicographic order. */
export interface CommutingSets {
  readonly sets: readonly (readonly number[])[];
  /** False if the search stopped at its budget, so that further sets may exist. */
  readonly complete: boolean;
}

/** How many search steps {@link maximalCommutingSets} takes before it stops and says so. */
export const SET_BUDGET = 20_000;

/**
 * Maximal sets of mutually commuting operators: the maximal cliques of the graph "commutes".
 *
 * Bron and Kerbosch, Commun. ACM 16, 575 (1973), with a pivot.
 *
 * @param count - number of operators
 * @param commutes - symmetric relation between two different operators
 * @param budget - bound on the number of search steps
 */
export function maximalCommutingSets(
  count: number,
  commutes: (a: number, b: number) => boolean,
  budget: number = SET_BUDGET,
): CommutingSets {
  const sets: number[][] = [];
  let steps = 0;
  const extend = (chosen: number[], open: number[], closed: number[]): void => {
    if (++steps > budget) return;
    if (open.length === 0) {
      if (closed.length === 0 && chosen.length > 0) sets.push([...chosen].sort((a, b) => a - b));
      return;
    }
    let pivot = open[0] as number;
    let most = -1;
    for (const candidate of [...open, ...closed]) {
      const reach = open.filter((other) => other !== candidate && commutes(candidate, other)).length;
      if (reach > most) {
        most = reach;
        pivot = candidate;
      }
    }
    let left = open;
    let done = closed;
    for (const next of open) {
      if (next !== pivot && commutes(pivot, next)) continue;
      const near = (list: number[]): number[] => list.filter((other) => other !== next && commutes(next, other));
      extend([...chosen, next], near(left), near(done));
      left = left.filter((other) => other !== next);
      done = [...done, next];
    }
  };
  extend(
    [],
    Array.from({ length: count }, (_, i) => i),
    [],
  );
  sets.sort((a, b) => compare(a, b));
  return { sets, complete: steps <= budget };
}

function compare(a: readonly number[], b: readonly number[]): number {
  for (let i = 0; i < Math.min(a.length, b.length); i++) {
    const difference = (a[i] as number) - (b[i] as number);
    if (difference !== 0) return difference;
  }
  return b.length - a.length;
}
