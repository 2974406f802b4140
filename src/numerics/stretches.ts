/** Consecutive matrices of a batch, and where their numbers and eigenvalues stand in its arrays. */
export interface Stretch {
  /** Number of the first matrix. */
  readonly first: number;
  /** Their orders. */
  readonly orders: Int32Array;
  /** Index of the first eigenvalue. */
  readonly rowStart: number;
  /** Number of eigenvalues. */
  readonly rows: number;
  /** Index of the first number. */
  readonly start: number;
  /** Index after the last number. */
  readonly end: number;
}

/** Rough nanoseconds for one matrix. */
export function costOf(n: number, complex: boolean): number {
  return (complex ? 3 : 1) * (n ** 3 + 10 * n ** 2);
}

/** Stretches of about the given amount of work each. */
export function split(orders: Int32Array, work: readonly number[], share: number): Stretch[] {
  const tasks: Stretch[] = [];
  let first = 0;
  let rowStart = 0;
  let start = 0;
  let load = 0;
  let row = 0;
  let at = 0;
  orders.forEach((n, k) => {
    load += work[k] as number;
    row += n;
    at += n * n;
    if (load < share && k < orders.length - 1) return;
    tasks.push({ first, orders: orders.slice(first, k + 1), rowStart, rows: row - rowStart, start, end: at });
    first = k + 1;
    rowStart = row;
    start = at;
    load = 0;
  });
  return tasks;
}
