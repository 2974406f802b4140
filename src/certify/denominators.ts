import type { PreparedProblem } from "../audit/problem.js";
import type { Csr } from "../numerics/csr.js";
import { add, frobenius, fromTriplets, multiply } from "../numerics/sparse.js";
import { images } from "../operator/images.js";
import type { Operator } from "../operator/operator.js";
import { secondOrder } from "../refine/second-order.js";
import type { GuardSetting } from "./guard.js";
import { elementErrorBound, forEachProduct } from "./products.js";
import { short } from "./short.js";

/** A level of a basis that somebody brings. */
interface ColumnLevel {
  readonly energy: number;
  readonly columns: readonly number[];
}

/** The largest ratio found so far: columns of one part, between two levels. */
interface Worst {
  readonly ratio: number;
  readonly levels: readonly [number, number];
}

/**
 * The blockwise denominators guard between the levels of a complete basis, ‖P_k V P_n‖_F/|E_k − E_n| and the same at second order,
 * one sentence for each perturbation that exceeds the threshold. Columns that V does not connect, directly or through others, are parts
 * of their own, as symmetry sectors are.
 */
export function denominatorRemarks(
  problem: PreparedProblem,
  vectors: Csr,
  levels: readonly ColumnLevel[],
  setting: GuardSetting,
): string[] {
  const levelOf = new Int32Array(vectors.rows);
  levels.forEach(({ columns }, l) => {
    for (const column of columns) levelOf[column] = l;
  });
  return problem.perturbations.flatMap(({ name, operator }) => {
    let worst: Worst = { ratio: 0, levels: [0, 0] };
    for (const part of partsOf(operator, vectors)) {
      const found = largestRatio(part, levels, levelOf, setting);
      if (found.ratio > worst.ratio) worst = found;
    }
    if (worst.ratio <= setting.refuseAbove) return [];
    const energy = (l: number): string => short(levels[l]?.energy ?? 0);
    return [
      `at λ = ${short(setting.lambda)}${setting.stated ? "" : " (not stated)"}, ${name} couples the levels at ` +
        `${energy(worst.levels[0])} and ${energy(worst.levels[1])} ${short(worst.ratio)} times as strongly as they are apart; ` +
        "merge them with levelWidth or state a smaller lambda",
    ];
  });
}

/**
 * The guard of one level of an incomplete basis, from above: V reaches out of it by ‖(1 − P) V P‖_F at most, to levels that are at least
 * `gap` away, and from there on by at most 2‖V‖.
 *
 * @param own - the level's columns as rows
 */
export function reachRemarks(
  { perturbations }: PreparedProblem,
  own: Csr,
  energy: number,
  gap: number,
  { lambda, stated, refuseAbove }: GuardSetting,
): string[] {
  if (gap === Number.POSITIVE_INFINITY) return [];
  return perturbations.flatMap(({ name, operator }) => {
    const reach = frobenius(outOf(own, operator));
    const first = (lambda * reach) / gap;
    const most = Math.max(first, (first * 2 * lambda * operator.norm) / gap);
    if (most <= refuseAbove) return [];
    return [
      `at λ = ${short(lambda)}${stated ? "" : " (not stated)"}, ${name} reaches out of the level at ${short(energy)} by ` +
        `${short(reach)}, and the next level is ${short(gap)} away: without its states the denominators may be unsafe; bring the whole ` +
        "basis, or state a smaller lambda",
    ];
  });
}

/** (1 − P) V q for every row q: the images without their parts along the rows. */
function outOf(own: Csr, operator: Operator): Csr {
  const reached = images(own, operator);
  const elements: Element[] = [];
  forEachProduct(own, reached, (r, c, re, im) => {
    elements.push([c, r, re, im]);
    if (r !== c) elements.push([r, c, re, -im]);
  });
  return add(1, reached, -1, multiply(matrixOf(own.rows, elements), own));
}

/** Columns that a perturbation connects, and its elements between them. */
interface Part {
  readonly columns: readonly number[];
  readonly v: Csr;
}

/** The perturbation between the columns, taken apart into what it connects; elements within their own error do not connect. */
function partsOf(operator: Operator, vectors: Csr): Part[] {
  const error = elementErrorBound(operator, vectors);
  const root = Int32Array.from({ length: vectors.rows }, (_, k) => k);
  const find = (k: number): number => {
    let at = k;
    while (root[at] !== at) {
      root[at] = root[root[at] as number] as number;
      at = root[at] as number;
    }
    return at;
  };
  const elements: Element[] = [];
  forEachProduct(vectors, images(vectors, operator), (r, c, re, im) => {
    if (Math.hypot(re, im) <= error) return;
    elements.push([r, c, re, im]);
    root[find(r)] = find(c);
  });
  const members = new Map<number, number[]>();
  const place = Int32Array.from({ length: vectors.rows }, (_, k) => {
    const list = members.get(find(k));
    if (list === undefined) members.set(find(k), [k]);
    else list.push(k);
    return (list?.length ?? 1) - 1;
  });
  const own = new Map<number, Element[]>();
  for (const [r, c, re, im] of elements) {
    const list = own.get(find(r)) ?? [];
    own.set(find(r), list);
    const [i, j] = [place[r] as number, place[c] as number];
    list.push([i, j, re, im]);
    if (i !== j) list.push([j, i, re, -im]);
  }
  return [...members].map(([key, columns]): Part => ({ columns, v: matrixOf(columns.length, own.get(key) ?? []) }));
}

/** Row, column, real and imaginary part. */
type Element = readonly [number, number, number, number];

function matrixOf(size: number, elements: readonly Element[]): Csr {
  const part = (k: 0 | 1 | 2 | 3): number[] => elements.map((element) => element[k]);
  return fromTriplets(size, size, part(0), part(1), part(2), part(3));
}

function largestRatio(
  { columns, v }: Part,
  levels: readonly ColumnLevel[],
  levelOf: Int32Array,
  setting: GuardSetting,
): Worst {
  const own = Int32Array.from(columns, (column) => levelOf[column] as number);
  const levelEnergies = Float64Array.from(levels, ({ energy }) => energy);
  const energies = Float64Array.from(own, (l) => levelEnergies[l] as number);
  const { lambda } = setting;
  let worst: Worst = { ratio: 0, levels: [0, 0] };
  for (const l of new Set(own)) {
    const indices = Int32Array.from([...own.keys()].filter((k) => own[k] === l));
    const energy = levelEnergies[l] as number;
    const { first, second } = secondOrder(energies, v, indices, own, l, energy, levelEnergies);
    for (const { ratio, level } of [
      { ...first, ratio: lambda * first.ratio },
      { ...second, ratio: lambda * lambda * second.ratio },
    ]) {
      if (ratio > worst.ratio) worst = { ratio, levels: [l, level] };
    }
  }
  return worst;
}
