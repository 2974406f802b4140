import type { Complex } from "../numerics/complex.js";

/** How values are gathered. */
export interface GroupOptions {
  /** True for a Hermitian operator: real eigenvalues. */
  readonly hermitian: boolean;
  /** Neighbouring eigenvalues up to this far apart belong to one eigenspace. */
  readonly cluster: number;
  /** True for eigenvalues of a Hermitian operator in ascending order. */
  readonly ascending?: boolean;
}

/** A group of pairs that share an eigenvalue. */
export interface Group {
  readonly value: Complex;
  readonly spread: number;
  readonly pairs: number[];
}

/**
 * Gathers values into groups by their gaps, in the order that eigenspaces come in.
 *
 * @param re - real parts
 * @param im - imaginary parts; not looked at for a Hermitian operator
 */
export function sortedGroups(re: Float64Array, im: Float64Array, options: GroupOptions): Group[] {
  const all = Array.from(re.keys());
  const byRe = chain(all, re, options.cluster);
  if (options.hermitian) {
    const groups = byRe.map((c) => ({ value: { re: c.middle, im: 0 }, spread: c.spread, pairs: c.members }));
    return options.ascending === true ? groups : groups.reverse();
  }
  const angle = (z: Complex): number => {
    if (Math.abs(z.im) <= options.cluster) return z.re < 0 ? Math.PI : 0;
    const a = Math.atan2(z.im, z.re);
    return a < 0 ? a + 2 * Math.PI : a;
  };
  return byRe
    .flatMap((c) => resolved(c, re, im, options.cluster, false))
    .sort((a, b) => angle(a.value) - angle(b.value) || b.value.re - a.value.re);
}

/**
 * Takes a chain of real parts apart by imaginary parts, what is left by real ones again, and so on until neither divides it:
 * values that only others in between had linked are told apart, and each group has its own middle.
 */
function resolved(by: Chain, own: Float64Array, other: Float64Array, tolerance: number, swapped: boolean): Group[] {
  const parts = chain(by.members, other, tolerance);
  const [only] = parts;
  if (parts.length > 1 || only === undefined) {
    return parts.flatMap((part) => resolved(part, other, own, tolerance, !swapped));
  }
  const value = swapped ? { re: only.middle, im: by.middle } : { re: by.middle, im: only.middle };
  return [{ value, spread: by.spread + only.spread, pairs: by.members }];
}

/** Values linked by gaps. */
interface Chain {
  readonly middle: number;
  readonly spread: number;
  /** Ascending. */
  readonly members: number[];
}

/** Clusters members by the gaps between their values, ascending. */
function chain(members: readonly number[], values: Float64Array, tolerance: number): Chain[] {
  const sorted = new Float64Array(members.length);
  for (let k = 0; k < sorted.length; k++) sorted[k] = values[members[k] as number] as number;
  sorted.sort();
  const chains: Chain[] = [];
  const lows: number[] = [];
  for (let from = 0, to = 1; from < sorted.length; from = to, to++) {
    while (to < sorted.length && (sorted[to] as number) - (sorted[to - 1] as number) <= tolerance) to++;
    const low = sorted[from] as number;
    const high = sorted[to - 1] as number;
    const middle = low === high ? low : low + (high - low) / 2;
    lows.push(low);
    chains.push({ middle, spread: Math.max(middle - low, high - middle), members: [] });
  }
  for (const k of members) chains[lastAtMost(lows, values[k] as number)]?.members.push(k);
  return chains;
}

/** The last place of an ascending list with a number not above x. */
function lastAtMost(list: readonly number[], x: number): number {
  let low = 0;
  let high = list.length;
  while (high - low > 1) {
    const middle = (low + high) >> 1;
    if ((list[middle] as number) <= x) low = middle;
    else high = middle;
  }
  return low;
}
