import { describe, expect, it } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { diagonalCsr } from "../../src/numerics/sparse.js";
import { formLevels, type LevelChoice, type Levels } from "../../src/refine/levels.js";
import type { Sector } from "../../src/refine/sectors.js";

const sector = (...energies: number[]): Sector => {
  const frame = diagonalCsr(energies.map(() => 1));
  return {
    frame,
    energies: Float64Array.from(energies),
    perturbations: [],
    labels: [],
    from: undefined,
    energyNode: 0,
    energyChild: new Int32Array(energies.length),
    rowError: 0,
    labelFrame: frame,
  };
};

const places = (levels: Levels): number[] => levels.studied.map(({ place }) => place);

const refused = (choice: unknown, sectors: readonly Sector[] = [sector(0, 1, 2)]): GoodBasisError => {
  try {
    formLevels(sectors, 0, choice as LevelChoice);
  } catch (error) {
    if (error instanceof GoodBasisError) return error;
    throw error;
  }
  throw new Error("not refused");
};

describe("formLevels clusters by gaps", () => {
  const sectors = [sector(0, 1, 1.25), sector(0.125, 5), sector(1.5, 5)];

  it("across sectors, with every level's own numbers", () => {
    const levels = formLevels(sectors, 0.25, "all");
    expect(levels.count).toBe(3);
    expect([...levels.energies]).toEqual([0.0625, 1.25, 5]);
    expect(levels.of.map((list) => [...list])).toEqual([
      [0, 1, 1],
      [0, 2],
      [1, 2],
    ]);
    expect(
      levels.studied.map(({ parts, ...rest }) => ({ ...rest, parts: parts.map((p) => [p.sector, [...p.indices]]) })),
    ).toEqual([
      {
        place: 0,
        energy: 0.0625,
        spread: 0.125,
        degeneracy: 2,
        gapBelow: Infinity,
        gapAbove: 0.875,
        parts: [
          [0, [0]],
          [1, [0]],
        ],
      },
      {
        place: 1,
        energy: 1.25,
        spread: 0.5,
        degeneracy: 3,
        gapBelow: 0.875,
        gapAbove: 3.5,
        parts: [
          [0, [1, 2]],
          [2, [0]],
        ],
      },
      {
        place: 2,
        energy: 5,
        spread: 0,
        degeneracy: 2,
        gapBelow: 3.5,
        gapAbove: Infinity,
        parts: [
          [1, [1]],
          [2, [1]],
        ],
      },
    ]);
  });

  it("a gap of exactly the width joins, a larger one does not", () => {
    expect(formLevels([sector(0, 0.25)], 0.25, "all").count).toBe(1);
    expect(formLevels([sector(0, 0.25 + 2 ** -54)], 0.25, "all").count).toBe(2);
    expect(formLevels([sector(0, 5e-324)], 0, "all").count).toBe(2);
    expect(formLevels([sector(-0, 0)], 0, "all").count).toBe(1);
  });

  it("a chain of small gaps is one level, however long", () => {
    const chain = formLevels([sector(...Array.from({ length: 50 }, (_, k) => k / 4))], 0.25, "all");
    expect(chain.count).toBe(1);
    expect(chain.studied[0]).toMatchObject({
      energy: 6.125,
      spread: 12.25,
      degeneracy: 50,
      gapBelow: Infinity,
      gapAbove: Infinity,
    });
  });

  it("equal gaps on two scales differ", () => {
    const energies = [-1e16, 1e-300, 1];
    expect([...formLevels([sector(...energies)], 1e-3, "all").energies]).toEqual(energies);
  });
});

describe("formLevels picks", () => {
  const sectors = [sector(0, 4), sector(1, 2, 10)];
  const pick = (choice: LevelChoice): number[] => places(formLevels(sectors, 0, choice));

  it("the lowest", () => {
    expect(pick({ lowest: 1 })).toEqual([0]);
    expect(pick({ lowest: 3 })).toEqual([0, 1, 2]);
    expect(pick({ lowest: 99 })).toEqual([0, 1, 2, 3, 4]);
  });

  it("the nearest, ties to the lower level, listed by ascending energy", () => {
    expect(pick({ nearest: 3.1 })).toEqual([3]);
    expect(pick({ nearest: 3 })).toEqual([2]);
    expect(pick({ nearest: 3, count: 2 })).toEqual([2, 3]);
    expect(pick({ nearest: 9, count: 2 })).toEqual([3, 4]);
    expect(pick({ nearest: -1e9 })).toEqual([0]);
    expect(pick({ nearest: 1, count: 3 })).toEqual([0, 1, 2]);
    expect(pick({ nearest: 1, count: 1000 })).toEqual([0, 1, 2, 3, 4]);
  });

  it("a window, ends included", () => {
    expect(pick({ from: 1, to: 4 })).toEqual([1, 2, 3]);
    expect(pick({ from: 4, to: 4 })).toEqual([3]);
    expect(pick({ from: Number.NEGATIVE_INFINITY, to: 1.5 })).toEqual([0, 1]);
    expect(pick({ from: 2.5, to: Number.POSITIVE_INFINITY })).toEqual([3, 4]);
  });

  it("a level that a window only touches", () => {
    const wide = formLevels([sector(0, 0.5), sector(1, 9)], 0.5, { from: 0.9, to: 2 });
    expect(wide.studied[0]).toMatchObject({ place: 0, degeneracy: 3, gapAbove: 8 });
  });

  it("counts and numbers all levels, whatever is picked", () => {
    const levels = formLevels(sectors, 0, { nearest: 2 });
    expect(levels.count).toBe(5);
    expect([...levels.energies]).toEqual([0, 1, 2, 4, 10]);
    expect(levels.of.map((list) => [...list])).toEqual([
      [0, 3],
      [1, 2, 4],
    ]);
    expect(levels.studied).toMatchObject([{ place: 2, energy: 2, gapBelow: 1, gapAbove: 2, parts: [{ sector: 1 }] }]);
  });
});

describe("formLevels refuses", () => {
  it("a window without levels, naming the nearest one", () => {
    const error = refused({ from: 1.25, to: 1.5 });
    expect(error.code).toBe("no-level");
    expect(error.details).toMatchObject({ from: 1.25, to: 1.5, lowest: 0, highest: 2, nearest: 1 });
    expect(error.message).toContain("the 3 levels run from 0 to 2");
    expect(refused({ from: 1.5, to: 1.75 }).details).toMatchObject({ nearest: 2 });
    expect(refused({ from: 5, to: Number.POSITIVE_INFINITY }).details).toMatchObject({ nearest: 2 });
    expect(refused({ from: Number.NEGATIVE_INFINITY, to: -3 }).details).toMatchObject({ nearest: 0 });
    expect(refused({ from: 100, to: 1e300 }).details).toMatchObject({ nearest: 2 });
    // distances are those of a level's edges: 0.85 to the first, 1.2 to the second
    const wide = (from: number, to: number) => (): Levels =>
      formLevels([sector(0, 0.9), sector(3, 3.9)], 1, { from, to });
    expect(wide(1.75, 1.8)).toThrow(expect.objectContaining({ details: expect.objectContaining({ nearest: 0.45 }) }));
    expect(wide(2.2, 2.25)).toThrow(expect.objectContaining({ details: expect.objectContaining({ nearest: 3.45 }) }));
  });

  it("every malformed choice", () => {
    const bad: unknown[] = [
      undefined,
      null,
      "lowest",
      3,
      {},
      { lowest: 0 },
      { lowest: 1.5 },
      { lowest: Number.NaN },
      { nearest: Number.NaN },
      { nearest: Number.POSITIVE_INFINITY },
      { nearest: 0, count: 0 },
      { nearest: 0, count: 0.5 },
      { from: 1 },
      { to: 1 },
      { from: 2, to: 1 },
      { from: Number.NaN, to: 1 },
      { from: 0, to: Number.NaN },
    ];
    for (const choice of bad) {
      const error = refused(choice);
      expect(error.code, JSON.stringify(choice)).toBe("option");
      expect(error.details).toEqual({ levels: choice });
      expect(error.message).toContain(
        '"all", { lowest: k }, { nearest: energy, count: k } or { from: energy, to: energy }',
      );
    }
  });
});
