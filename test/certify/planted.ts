import { Operator } from "../../src/operator/operator.js";
import { generator } from "../numerics/eigen/matrices.js";

/** How a planted problem is made. */
export interface Plan {
  readonly seed: number;
  /** Dimension of each symmetry block. */
  readonly blocks: readonly number[];
  /** Number of different energies; every block draws its own from them. */
  readonly levels: number;
  /** How the structure is hidden: the kets permuted, or turned by a random unitary matrix. */
  readonly hidden: "permutation" | "unitary";
  readonly complex: boolean;
  /** Whether the label is a Hermitian or a unitary operator. */
  readonly label: "hermitian" | "unitary";
  /** Whether V is 0.3 times the identity inside each level of a block, so that only the second order can part its states. */
  readonly scalar: boolean;
  /** Size of what breaks the symmetry of V between blocks, relative to V; 0 for none. */
  readonly breaking: number;
}

/** A problem with a hidden symmetry. */
export interface Planted {
  readonly n: number;
  readonly h0: Operator;
  readonly v: Operator;
  readonly label: Operator;
  /** Largest planted element of V between different blocks inside one level. */
  readonly coupling: number;
}

interface Pair {
  readonly re: number;
  readonly im: number;
}

type Grid = Pair[][];

const ZERO: Pair = { re: 0, im: 0 };
const times = (a: Pair, b: Pair): Pair => ({ re: a.re * b.re - a.im * b.im, im: a.re * b.im + a.im * b.re });
const plus = (a: Pair, b: Pair): Pair => ({ re: a.re + b.re, im: a.im + b.im });
const star = (a: Pair): Pair => ({ re: a.re, im: -a.im });

/** Makes the problem of a plan; the same plan gives the same problem. */
export function plant(plan: Plan): Planted {
  const random = generator(plan.seed);
  const blockOf = plan.blocks.flatMap((size, block) => new Array<number>(size).fill(block));
  const n = blockOf.length;
  const levelOf = blockOf.map(() => Math.floor((random() + 0.5) * plan.levels));
  const draw = (): Pair => ({ re: random(), im: plan.complex ? random() : 0 });
  let coupling = 0;
  const v = hermitian(n, (i, j) => {
    const sameBlock = blockOf[i] === blockOf[j];
    const sameLevel = levelOf[i] === levelOf[j];
    const x = i === j ? { re: random(), im: 0 } : draw();
    if (sameBlock) return plan.scalar && sameLevel ? { re: i === j ? 0.3 : 0, im: 0 } : x;
    const small = { re: plan.breaking * x.re, im: plan.breaking * x.im };
    if (sameLevel) coupling = Math.max(coupling, Math.hypot(small.re, small.im));
    return small;
  });
  const h0 = hermitian(n, (i, j) => (i === j ? { re: 1 + 2 * (levelOf[i] ?? 0), im: 0 } : ZERO));
  const angle = (block: number): number => (2 * Math.PI * block) / plan.blocks.length;
  const label = hermitian(n, (i, j) => {
    if (i !== j) return ZERO;
    const block = blockOf[i] ?? 0;
    return plan.label === "hermitian"
      ? { re: block, im: 0 }
      : { re: Math.cos(angle(block)), im: Math.sin(angle(block)) };
  });
  if (plan.hidden === "permutation") {
    const order = shuffled(n, random);
    const moved = (grid: Grid): Operator => operator(order.map((i) => order.map((j) => grid[i]?.[j] ?? ZERO)));
    return { n, h0: moved(h0), v: moved(v), label: moved(label), coupling };
  }
  const u = unitary(n, plan.complex, random);
  return {
    n,
    h0: operator(symmetrised(turned(u, h0))),
    v: operator(symmetrised(turned(u, v))),
    label: operator(plan.label === "hermitian" ? symmetrised(turned(u, label)) : turned(u, label)),
    coupling,
  };
}

/** The grid of a rule for the lower triangle; the diagonal as it comes. */
function hermitian(n: number, entry: (i: number, j: number) => Pair): Grid {
  const grid: Grid = Array.from({ length: n }, () => new Array<Pair>(n).fill(ZERO));
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const x = entry(i, j);
      (grid[i] as Pair[])[j] = x;
      if (i !== j) (grid[j] as Pair[])[i] = star(x);
    }
  }
  return grid;
}

/** (G + G†)/2, which is Hermitian to the last bit. */
function symmetrised(grid: Grid): Grid {
  return grid.map((row, i) =>
    row.map((x, j) => {
      const y = star(grid[j]?.[i] ?? ZERO);
      return { re: (x.re + y.re) / 2, im: (x.im + y.im) / 2 };
    }),
  );
}

/** U G U†. */
function turned(u: Grid, grid: Grid): Grid {
  const product = (a: Grid, b: Grid): Grid =>
    a.map((row) => (b[0] ?? []).map((_, j) => row.reduce((sum, x, k) => plus(sum, times(x, b[k]?.[j] ?? ZERO)), ZERO)));
  const adjoint = u.map((_, i) => u.map((row) => star(row[i] ?? ZERO)));
  return product(product(u, grid), adjoint);
}

/** Orthonormal rows from random ones (Gram and Schmidt, twice). */
function unitary(n: number, complex: boolean, random: () => number): Grid {
  const rows: Grid = [];
  while (rows.length < n) {
    let row = Array.from({ length: n }, (): Pair => ({ re: random(), im: complex ? random() : 0 }));
    for (let pass = 0; pass < 2; pass++) {
      for (const other of rows) {
        const overlap = other.reduce((sum, x, k) => plus(sum, times(star(x), row[k] ?? ZERO)), ZERO);
        row = row.map((x, k) => plus(x, times({ re: -overlap.re, im: -overlap.im }, other[k] ?? ZERO)));
      }
    }
    const norm = Math.sqrt(row.reduce((sum, x) => sum + x.re * x.re + x.im * x.im, 0));
    if (norm > 1e-3) rows.push(row.map((x) => ({ re: x.re / norm, im: x.im / norm })));
  }
  return rows;
}

function shuffled(n: number, random: () => number): number[] {
  const order = Array.from({ length: n }, (_, k) => k);
  for (let k = n - 1; k > 0; k--) {
    const other = Math.floor((random() + 0.5) * (k + 1));
    const here = order[k] ?? 0;
    order[k] = order[other] ?? 0;
    order[other] = here;
  }
  return order;
}

function operator(grid: Grid): Operator {
  const re = grid.map((row) => row.map((x) => x.re));
  if (grid.every((row) => row.every((x) => x.im === 0))) return Operator.from(re);
  return Operator.from({ re, im: grid.map((row) => row.map((x) => x.im)) });
}
