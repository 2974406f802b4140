import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { Csr } from "../../src/numerics/csr.js";
import { secondOrder } from "../../src/refine/second-order.js";
import { distance, type Naive } from "../operator/naive.js";
import { csr, hermitian, naive, naiveOfCsr, random } from "./support.js";

/** The level of each vector, one energy a level; vectors of a level may be displaced a little. */
interface Scene {
  readonly v: Naive;
  readonly levelOf: readonly number[];
  readonly energies: readonly number[];
  readonly levelEnergies: readonly number[];
}

const run = ({ v, levelOf, energies, levelEnergies }: Scene, level: number, matrix: Csr = csr(v)) => {
  const indices = Int32Array.from(levelOf.flatMap((l, i) => (l === level ? [i] : [])));
  const e0 = levelEnergies[level] ?? Number.NaN;
  return secondOrder(
    Float64Array.from(energies),
    matrix,
    indices,
    Int32Array.from(levelOf),
    level,
    e0,
    Float64Array.from(levelEnergies),
  );
};

/** The formulas, index by index. */
function bruteForce({ v, levelOf, energies, levelEnergies }: Scene, level: number) {
  const own = levelOf.flatMap((l, i) => (l === level ? [i] : []));
  const outside = levelOf.flatMap((l, i) => (l === level ? [] : [i]));
  const e0 = levelEnergies[level] as number;
  const at = (i: number, j: number) => v[i]?.[j] ?? { re: 0, im: 0 };
  const through = (i: number, j: number) => {
    let re = 0;
    let im = 0;
    for (const k of outside) {
      const weight = 1 / (e0 - (energies[k] as number));
      const a = at(i, k);
      const b = at(k, j);
      re += weight * (a.re * b.re - a.im * b.im);
      im += weight * (a.re * b.im + a.im * b.re);
    }
    return { re, im };
  };
  const shift = own.reduce((sum, i) => sum + at(i, i).re, 0) / own.length;
  const shifted = (i: number, k: number) => {
    const { re, im } = through(i, k);
    const weight = shift / (e0 - (energies[k] as number));
    return { re: re - weight * at(i, k).re, im: im - weight * at(i, k).im };
  };
  const norm = (list: readonly { re: number; im: number }[]): number =>
    Math.hypot(...list.flatMap((z) => [z.re, z.im]));
  const ratios = (element: typeof at) =>
    levelEnergies.map((energy, l) => {
      if (l === level) return 0;
      const block = own.flatMap((i) => outside.filter((k) => levelOf[k] === l).map((k) => element(i, k)));
      return norm(block) / Math.abs(energy - e0);
    });
  return {
    w: own.map((i) => own.map((j) => through(i, j))),
    scale: Math.max(
      0,
      ...own.map(
        (i) =>
          norm(outside.map((k) => at(i, k))) *
          norm(
            outside.map((k) => ({
              re: at(i, k).re / (e0 - (energies[k] as number)),
              im: at(i, k).im / (e0 - (energies[k] as number)),
            })),
          ),
      ),
    ),
    first: ratios(at),
    second: ratios(shifted),
  };
}

const scenes = fc
  .record({
    levelOf: fc.array(fc.integer({ min: 0, max: 3 }), { minLength: 2, maxLength: 7 }),
    seed: fc.integer(),
    complex: fc.boolean(),
    sparse: fc.boolean(),
  })
  .map(({ levelOf, seed, complex, sparse }): Scene => {
    const next = random(seed);
    const levelEnergies = [0.3, -1, 2.5, 0.8];
    const v = hermitian(levelOf.length, next, complex);
    if (sparse) {
      v.forEach((row, i) => {
        row.forEach((_, j) => {
          if ((i + j) % 3 === 1) row[j] = { re: 0, im: 0 };
        });
      });
    }
    return { v, levelOf, energies: levelOf.map((l) => (levelEnergies[l] as number) + 1e-3 * next()), levelEnergies };
  });

describe("secondOrder", () => {
  it("W, its scale and both guard ratios are those of the formulas", () => {
    fc.assert(
      fc.property(scenes, fc.nat(), (scene, pick) => {
        const level = scene.levelOf[pick % scene.levelOf.length] as number;
        const found = run(scene, level);
        const truth = bruteForce(scene, level);
        expect(distance(naiveOfCsr(found.w), truth.w)).toBeLessThan(1e-13);
        expect(Math.abs(found.scale - truth.scale)).toBeLessThan(1e-13 * (1 + truth.scale));
        for (const kind of ["first", "second"] as const) {
          const largest = Math.max(...truth[kind]);
          expect(Math.abs(found[kind].ratio - largest)).toBeLessThan(1e-13 * (1 + largest));
          if (largest > 0) expect(truth[kind][found[kind].level]).toBeCloseTo(largest, 12);
          else expect(found[kind]).toEqual({ ratio: 0, level: -1 });
        }
      }),
      { seed: 61, numRuns: 150 },
    );
  });

  it("large sectors with many levels, then small ones again: nothing is left over from call to call", () => {
    for (const n of [150, 3, 80, 200, 2]) {
      const next = random(n);
      const levelEnergies = Array.from({ length: Math.ceil(n / 2) }, (_, l) => l + 0.3 * next());
      const levelOf = Array.from({ length: n }, (_, i) => Math.floor(i / 2));
      const v = hermitian(n, next, n % 4 === 0).map((row, i) =>
        row.map((x, j) => ((i * j) % 7 < 2 ? x : { re: 0, im: 0 })),
      );
      const scene: Scene = { v, levelOf, energies: levelOf.map((l) => levelEnergies[l] as number), levelEnergies };
      const level = Math.floor(levelEnergies.length / 2);
      const [found, again, truth] = [run(scene, level), run(scene, level), bruteForce(scene, level)];
      expect(again).toEqual(found);
      expect(distance(naiveOfCsr(found.w), truth.w)).toBeLessThan(1e-11);
      for (const kind of ["first", "second"] as const) {
        const largest = Math.max(...truth[kind]);
        expect(Math.abs(found[kind].ratio - largest)).toBeLessThan(1e-12 * (1 + largest));
      }
    }
  });

  it("leaves the whole level out of the resolvent, also where V couples inside it", () => {
    const scene: Scene = {
      v: naive([
        [5, 7, 1],
        [7, 5, 2],
        [1, 2, 0],
      ]),
      levelOf: [0, 0, 1],
      energies: [0, 1e-9, 4],
      levelEnergies: [0, 4],
    };
    const { w, first, second, scale } = run(scene, 0);
    expect(naiveOfCsr(w).map((row) => row.map((x) => x.re))).toEqual([
      [-0.25, -0.5],
      [-0.5, -1],
    ]);
    expect(first).toEqual({ ratio: Math.sqrt(5) / 4, level: 1 });
    // P_k V R V P_n goes through level 1 only, whose V inside is zero; what is left is the mean shift 5 of the level itself
    expect(second.level).toBe(1);
    expect(second.ratio).toBeCloseTo((5 * Math.sqrt(5)) / 16, 14);
    expect(scale).toBe(1);
  });

  it("an offset of V changes neither ratio", () => {
    const plain = hermitian(6, random(5), true);
    const levelOf = [0, 1, 1, 2, 2, 0];
    const scene = { levelOf, energies: levelOf.map((l) => [0, 1, 2.5][l] as number), levelEnergies: [0, 1, 2.5] };
    const moved = plain.map((row, i) => row.map((x, j) => (i === j ? { re: x.re + 64, im: x.im } : x)));
    const [here, there] = [run({ ...scene, v: plain }, 1), run({ ...scene, v: moved }, 1)];
    expect(there.first).toEqual(here.first);
    expect(there.second.ratio).toBeCloseTo(here.second.ratio, 10);
  });

  it("takes blocks, not single elements: many small couplings add up", () => {
    const n = 9;
    const v = Array.from({ length: n }, (_, i) =>
      Array.from({ length: n }, (__, j) => ((i === 0) !== (j === 0) ? 0.1 : 0)),
    );
    const energies = [0, ...new Array<number>(n - 1).fill(1)];
    const { first } = run({ v: naive(v), levelOf: energies, energies, levelEnergies: [0, 1] }, 0);
    expect(first.ratio).toBeCloseTo(0.1 * Math.sqrt(8), 14);
  });

  it("a near level shows in (b) although no single ratio is large", () => {
    // H0 = diag(0, 1e-9, 1), V_13 = V_23 = 0.1
    const v = naive([
      [0, 0, 0.1],
      [0, 0, 0.1],
      [0.1, 0.1, 0],
    ]);
    const { first, second } = run({ v, levelOf: [0, 1, 2], energies: [0, 1e-9, 1], levelEnergies: [0, 1e-9, 1] }, 0);
    expect(first).toMatchObject({ level: 2 });
    expect(first.ratio).toBeCloseTo(0.1, 12);
    expect(second.level).toBe(1);
    expect(second.ratio).toBeCloseTo(1e7, 0);
  });

  it("of equal ratios the first level counts", () => {
    const v = naive([
      [0, 1, 1],
      [1, 0, 0],
      [1, 0, 0],
    ]);
    const { first } = run({ v, levelOf: [1, 0, 2], energies: [0, -2, 2], levelEnergies: [-2, 0, 2] }, 1);
    expect(first).toEqual({ ratio: 0.5, level: 0 });
  });

  it("keeps the scale of W where fourth powers of V vanish", () => {
    const tiny = 2 ** -300;
    const scene: Scene = {
      v: naive([
        [0, tiny],
        [tiny, 0],
      ]),
      levelOf: [0, 1],
      energies: [0, 1],
      levelEnergies: [0, 1],
    };
    const { w, scale } = run(scene, 0);
    expect(naiveOfCsr(w)[0]?.[0]?.re).toBe(-(2 ** -600));
    expect(scale).toBe(2 ** -600);
  });

  it("nothing outside, or nothing coupled: W = 0 and no ratio", () => {
    const alone = run(
      {
        v: naive([
          [1, 2],
          [2, 1],
        ]),
        levelOf: [0, 0],
        energies: [0, 0],
        levelEnergies: [0],
      },
      0,
    );
    expect(
      naiveOfCsr(alone.w)
        .flat()
        .every((x) => x.re === 0 && x.im === 0),
    ).toBe(true);
    expect([alone.w.rows, alone.w.cols, alone.scale, alone.first.level, alone.second.level]).toEqual([2, 2, 0, -1, -1]);
  });
});
