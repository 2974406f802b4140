/**
 * The connected components of a Hermitian matrix: indices that no chain of entries joins never mix, so each component
 * is an eigenproblem of its own. An entry counts where it is not exactly zero, so that nothing is dropped.
 *
 * A full matrix is recognised after n entries; otherwise O(n²) at most. Breadth-first search, common practice.
 *
 * @param n - dimension
 * @param re - row-major, from index `at` on; only the lower triangle is read
 * @param im - imaginary parts, or absent
 * @param at - where the matrix begins
 * @returns the members of each component, ascending, by smallest member; `undefined` when there is but one
 */
export function components(
  n: number,
  re: Float64Array,
  im: Float64Array | undefined,
  at = 0,
): Int32Array[] | undefined {
  let full = 1;
  while (full < n && (re[at + full * n] !== 0 || (im !== undefined && im[at + full * n] !== 0))) full++;
  if (full >= n) return undefined;
  // Indices not reached yet, ascending; those reached by one index are taken out together.
  const open = new Int32Array(n - 1);
  for (let i = 0; i < n - 1; i++) open[i] = i + 1;
  let left = n - 1;
  const queue = new Int32Array(n);
  const parts: Int32Array[] = [];
  let first = 0;
  for (;;) {
    queue[0] = first;
    let length = 1;
    for (let head = 0; head < length && left > 0; head++) {
      const i = queue[head] as number;
      let remaining = 0;
      for (let k = 0; k < left; k++) {
        const j = open[k] as number;
        const e = at + (i > j ? i * n + j : j * n + i);
        if (re[e] !== 0 || (im !== undefined && im[e] !== 0)) queue[length++] = j;
        else open[remaining++] = j;
      }
      left = remaining;
    }
    if (length === n) return undefined;
    parts.push(queue.slice(0, length).sort());
    if (left === 0) return parts;
    first = open[0] as number;
    open.copyWithin(0, 1, left);
    left--;
  }
}
