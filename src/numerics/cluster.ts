/**
 * Groups an ascending list: neighbours no further apart than the tolerance belong to one cluster.
 *
 * @param values - ascending numbers
 * @param tolerance - largest gap inside a cluster, in the units of the values; not negative
 * @returns the index at which each cluster starts, ascending, and the length of the list as a last entry; `[0]` for an
 * empty list
 */
export function clusterSorted(values: Float64Array | readonly number[], tolerance: number): Int32Array {
  const starts: number[] = [];
  for (let i = 0; i < values.length; i++) {
    if (i === 0 || !((values[i] as number) - (values[i - 1] as number) <= tolerance)) starts.push(i);
  }
  starts.push(values.length);
  return Int32Array.from(starts);
}
