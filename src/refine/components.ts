import { modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";

/** The connected parts of the pattern of a square matrix, numbered by their first index. */
export interface Components {
  readonly count: number;
  /** Part number of each index. */
  readonly part: Int32Array;
  /** Indices listed part by part, ascending within a part. */
  readonly members: Int32Array;
  /** Start of each part in `members`, length `count + 1`. */
  readonly starts: Int32Array;
}

/**
 * Connected parts of a square matrix, entries of modulus at most `noise` taken as absent.
 *
 * Union by index with path halving (Tarjan, J. ACM 22, 215 (1975)); the result does not depend on the order of unions.
 */
export function connectedComponents(matrix: Csr, noise: number): Components {
  const size = matrix.rows;
  if (isStar(matrix, noise)) {
    const all = { count: 1, part: new Int32Array(size), members: new Int32Array(size), starts: Int32Array.of(0, size) };
    for (let i = 0; i < size; i++) all.members[i] = i;
    return all;
  }
  const parent = new Int32Array(size);
  for (let i = 0; i < size; i++) parent[i] = i;
  const find = (index: number): number => {
    let i = index;
    while (parent[i] !== i) {
      const up = parent[parent[i] as number] as number;
      parent[i] = up;
      i = up;
    }
    return i;
  };
  const { ptr, col, re, im } = matrix;
  for (let i = 0; i < size; i++) {
    for (let p = ptr[i] as number; p < (ptr[i + 1] as number); p++) {
      const j = col[p] as number;
      if (j === i) continue;
      if (modulus(re[p] as number, im === undefined ? 0 : (im[p] as number)) <= noise) continue;
      const a = find(i);
      const b = find(j);
      if (a < b) parent[b] = a;
      else parent[a] = b;
    }
  }
  const part = new Int32Array(size);
  let count = 0;
  for (let i = 0; i < size; i++) {
    const root = find(i);
    part[i] = root === i ? count++ : (part[root] as number);
  }
  const starts = new Int32Array(count + 1);
  for (let i = 0; i < size; i++) starts[(part[i] as number) + 1] = (starts[(part[i] as number) + 1] as number) + 1;
  for (let c = 0; c < count; c++) starts[c + 1] = (starts[c + 1] as number) + (starts[c] as number);
  const next = starts.slice(0, count);
  const members = new Int32Array(size);
  for (let i = 0; i < size; i++) {
    const c = part[i] as number;
    members[next[c] as number] = i;
    next[c] = (next[c] as number) + 1;
  }
  return { count, part, members, starts };
}

/** Whether the first row alone connects everything. */
function isStar({ rows, ptr, re, im }: Csr, noise: number): boolean {
  if (rows === 0 || ptr[1] !== rows) return false;
  for (let p = 1; p < rows; p++) if (modulus(re[p] as number, im?.[p] ?? 0) <= noise) return false;
  return true;
}
