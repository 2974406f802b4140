import type { ExactOperator } from "../exact/operator.js";

/** The connected parts of a matrix's pattern: indices ascending within a part, parts by their first index. */
export function connectedParts(matrix: ExactOperator): number[][] {
  const parent = Array.from({ length: matrix.n }, (_, k) => k);
  const find = (index: number): number => {
    let k = index;
    while (parent[k] !== k) {
      parent[k] = parent[parent[k] as number] as number;
      k = parent[k] as number;
    }
    return k;
  };
  const { ptr, col } = matrix.rows;
  for (let row = 0; row < matrix.n; row++) {
    for (let e = ptr[row] as number; e < (ptr[row + 1] as number); e++) {
      const [a, b] = [find(row), find(col[e] as number)];
      parent[Math.max(a, b)] = Math.min(a, b);
    }
  }
  const parts = new Map<number, number[]>();
  for (let k = 0; k < matrix.n; k++) {
    const root = find(k);
    const list = parts.get(root);
    if (list === undefined) parts.set(root, [k]);
    else list.push(k);
  }
  return [...parts.values()];
}
