import { Operator } from "../../src/operator/operator.js";
import { generator } from "../numerics/eigen/matrices.js";
import { type FixedMatrix, adjoint as fixedAdjoint, product as fixedProduct } from "./fixed.js";
import { fixedOperator } from "./oracle.js";

/** How V looks between states of one level and one sector. */
export type Inside = "full" | "close" | "scalar" | "zero";

/** How a problem is made. */
export interface ExactPlan {
  readonly seed: number;
  readonly n: number;
  readonly complex: boolean;
  /** Energies that states draw from; whole multiples of 2^−20 below 2^12. */
  readonly energies: readonly number[];
  /** Number of values of each label. */
  readonly labels: readonly number[];
  /** Whether the labels are handed over as powers of i instead of whole numbers. */
  readonly unitary: boolean;
  readonly inside: Inside;
  readonly perturbations: number;
  /** V between sectors: 0, or a power of two. */
  readonly breaking: number;
  /** All matrices but unitary labels are multiplied by 2^scale. */
  readonly scale: number;
  readonly uncertainty: "exact" | "default";
}

/** A problem whose levels are degenerate to the last bit, with its solution. */
export interface ExactProblem {
  readonly plan: ExactPlan;
  readonly n: number;
  readonly h0: Operator;
  readonly perturbations: readonly Operator[];
  readonly labels: readonly Operator[];
  /** The exact unitary matrix that hides it: its columns are the exact eigenvectors. */
  readonly frame: FixedMatrix;
  /** Energy of each column, unscaled. */
  readonly energies: readonly number[];
  /** Sector of each column. */
  readonly sectors: readonly string[];
  /** Each perturbation over the exact eigenvectors, unscaled, exactly. */
  readonly inner: readonly FixedMatrix[];
}

interface Grid {
  readonly re: number[][];
  readonly im: number[][];
}

/** Makes the problem of a plan; the same plan gives the same problem. */
export function exactProblem(plan: ExactPlan): ExactProblem {
  const random = generator(plan.seed);
  const { n } = plan;
  const whole = (count: number): number => Math.min(count - 1, Math.floor((random() + 0.5) * count));
  const energies = Array.from({ length: n }, () => plan.energies[whole(plan.energies.length)] ?? 0);
  const values = plan.labels.map((count) => Array.from({ length: n }, () => whole(count)));
  const sectors = energies.map((_, i) => values.map((list) => list[i]).join(","));
  const u = reflectors(n, plan.complex, random);
  const dyadic = (): number => Math.round(random() * 2 ** 15) / 2 ** 14;
  const inners = Array.from({ length: plan.perturbations }, () => {
    const diagonal = dyadic();
    return hermitian(n, plan.complex, (i, j) => {
      const x: [number, number] = [dyadic(), i === j ? 0 : dyadic()];
      if (sectors[i] !== sectors[j]) return [x[0] * plan.breaking, x[1] * plan.breaking];
      if (energies[i] !== energies[j] || plan.inside === "full") return x;
      if (plan.inside === "zero") return [0, 0];
      const own = i === j ? diagonal : 0;
      if (plan.inside === "scalar") return [own, 0];
      return [own + Math.round(x[0] * 16) / 2 ** 16, Math.round(x[1] * 16) / 2 ** 16];
    });
  });
  const diagonal = (entry: (i: number) => [number, number]): Grid => ({
    re: square(n, (i, j) => (i === j ? entry(i)[0] : 0)),
    im: square(n, (i, j) => (i === j ? entry(i)[1] : 0)),
  });
  const hidden = (grid: Grid, scale: number, symmetric = true): Operator => {
    const moved = multiply(multiply(u, grid), star(u));
    const back = star(moved);
    const mean = (a: number[][], b: number[][]): number[][] =>
      a.map((row, i) => row.map((x, j) => (x + (b[i]?.[j] ?? 0)) / 2));
    const turned = symmetric ? { re: mean(moved.re, back.re), im: mean(moved.im, back.im) } : moved;
    const scaled = (rows: number[][]): number[][] => rows.map((row) => row.map((x) => x * 2 ** scale));
    const given = { re: scaled(turned.re), im: scaled(turned.im) };
    return Operator.from(given, plan.uncertainty === "exact" ? { uncertainty: "exact" } : {});
  };
  const i4 = [1, 0, -1, 0];
  const h0 = hidden(
    diagonal((i) => [energies[i] ?? 0, 0]),
    plan.scale,
  );
  const perturbations = inners.map((grid) => hidden(grid, plan.scale));
  const frame = fixedOperator(Operator.from(u, { uncertainty: "exact" }));
  return {
    plan,
    n,
    h0,
    perturbations,
    labels: values.map((list) =>
      plan.unitary
        ? hidden(
            diagonal((i) => [i4[(list[i] ?? 0) % 4] ?? 0, i4[((list[i] ?? 0) + 3) % 4] ?? 0]),
            0,
            false,
          )
        : hidden(
            diagonal((i) => [list[i] ?? 0, 0]),
            0,
          ),
    ),
    frame,
    energies,
    sectors,
    inner: perturbations.map((v) =>
      fixedProduct(fixedProduct(fixedAdjoint(frame), fixedOperator(v, -plan.scale)), frame),
    ),
  };
}

/** A product of three reflectors 1 − 2vv†/|v|² whose entries are whole multiples of 1/2. */
function reflectors(n: number, complex: boolean, random: () => number): Grid {
  const units: readonly [number, number][] = complex
    ? [
        [1, 0],
        [-1, 0],
        [0, 1],
        [0, -1],
      ]
    : [
        [1, 0],
        [-1, 0],
      ];
  const pick = <T>(list: readonly T[]): T =>
    list[Math.min(list.length - 1, Math.floor((random() + 0.5) * list.length))] as T;
  let u: Grid = { re: square(n, (i, j) => Number(i === j)), im: square(n, () => 0) };
  for (let k = 0; k < 3; k++) {
    const count = n >= 4 ? 4 : n >= 2 ? 2 : 0;
    if (count === 0) continue;
    const places = new Set<number>();
    while (places.size < count) places.add(Math.floor((random() + 0.5) * n) % n);
    const v = Array.from({ length: n }, (_, i): [number, number] => (places.has(i) ? pick(units) : [0, 0]));
    const part = (i: number, j: number): [number, number] => {
      const [a, b] = v[i] ?? [0, 0];
      const [c, d] = v[j] ?? [0, 0];
      return [a * c + b * d, b * c - a * d];
    };
    u = multiply(u, {
      re: square(n, (i, j) => Number(i === j) - (2 / count) * part(i, j)[0]),
      im: square(n, (i, j) => -(2 / count) * part(i, j)[1]),
    });
  }
  return u;
}

function square(n: number, entry: (i: number, j: number) => number): number[][] {
  return Array.from({ length: n }, (_, i) => Array.from({ length: n }, (_, j) => entry(i, j)));
}

function hermitian(n: number, complex: boolean, entry: (i: number, j: number) => [number, number]): Grid {
  const re = square(n, () => 0);
  const im = square(n, () => 0);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j <= i; j++) {
      const [x, y] = entry(i, j);
      const z = complex && i !== j ? y : 0;
      (re[i] as number[])[j] = x;
      (re[j] as number[])[i] = x;
      (im[i] as number[])[j] = z;
      (im[j] as number[])[i] = z === 0 ? 0 : -z;
    }
  }
  return { re, im };
}

/** Exact as long as every entry fits into 53 bits, which the plans see to. */
function multiply(a: Grid, b: Grid): Grid {
  const n = a.re.length;
  const sum = (x: number[][], y: number[][], i: number, j: number): number => {
    let s = 0;
    for (let k = 0; k < n; k++) s += (x[i]?.[k] ?? 0) * (y[k]?.[j] ?? 0);
    return s;
  };
  return {
    re: square(n, (i, j) => sum(a.re, b.re, i, j) - sum(a.im, b.im, i, j)),
    im: square(n, (i, j) => sum(a.re, b.im, i, j) + sum(a.im, b.re, i, j)),
  };
}

function star(a: Grid): Grid {
  const n = a.re.length;
  return { re: square(n, (i, j) => a.re[j]?.[i] ?? 0), im: square(n, (i, j) => -(a.im[j]?.[i] ?? 0)) };
}
