import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { sumOfProducts } from "../../src/exact/accumulate.js";
import { Meter } from "../../src/exact/budget.js";
import { Entries } from "../../src/exact/entries.js";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { denseOf, denseProduct, matrix } from "./matrices.js";

const meter = (): Meter => new Meter("test");
const usesMachineIntegers = (a: ExactOperator): boolean => a.rows.entries.whole !== undefined;

describe("products in machine integers", () => {
  it("are used for integers and fractions, and not for roots", () => {
    const a = ExactOperator.from([
      ["1/2", "i/3"],
      [0, 4],
    ]);
    expect(a.rows.entries.whole).toEqual({
      re: Float64Array.from([3, 0, 24]),
      im: Float64Array.from([0, 2, 0]),
      den: 6,
    });
    expect(usesMachineIntegers(a.times(a))).toBe(true);
    expect(a.times(a).rows.entries.whole?.den).toBe(4);
    expect(usesMachineIntegers(ExactOperator.diagonal(["sqrt(2)"]))).toBe(false);
    expect(usesMachineIntegers(ExactOperator.diagonal(["1/1000003", "1/1000033"]))).toBe(false);
    expect(usesMachineIntegers(ExactOperator.diagonal(["10^20"]))).toBe(false);
    // 2^52 thirds over the common denominator 6 leave the safe integers
    expect(usesMachineIntegers(ExactOperator.diagonal([`${2 ** 52}/3`, "1/2"]))).toBe(false);
  });

  it("give way where a product or a partial sum outgrows them, though the result would fit", () => {
    const big = 2 ** 52 + 1;
    // partial sums 2^52 + 1, 2^53 + 2, 3 · 2^52 + 3 …, then back
    const row = ExactOperator.fromTriplets(
      5,
      [0, 1, 2, 3, 4].map((k) => [0, k, k < 3 ? 1 : -1] as const),
    );
    const column = ExactOperator.fromTriplets(
      5,
      [0, 1, 2, 3, 4].map((k) => [k, 0, big] as const),
    );
    expect(row.times(column).entry(0, 0).text()).toBe(`${big}`);
    const near = 94906267;
    const square = ExactOperator.from([
      [near, near],
      [0, 0],
    ]).times(
      ExactOperator.from([
        [near, 0],
        [-near, 1],
      ]),
    );
    expect(square.entry(0, 0).isZero).toBe(true);
    expect(square.entry(0, 1).text()).toBe(`${near}`);
    const complex = ExactOperator.diagonal([`${near}+${near}*i`]);
    expect(complex.times(complex).entry(0, 0).text()).toBe(`${2n * BigInt(near) ** 2n}i`);
    // 94906267² is beyond 2^53, its difference to 20000² is not
    const edge = ExactOperator.diagonal([`${near}+20000i`]);
    expect(edge.times(edge).entry(0, 0).re.text()).toBe(`${BigInt(near) ** 2n - 20000n ** 2n}`);
    const mixed = ExactOperator.diagonal([`${near}+i`]);
    expect(mixed.times(mixed).entry(0, 0).text()).toBe(`${BigInt(near) ** 2n - 1n}+${2 * near}i`);
  });

  it("of different denominators are brought together", () => {
    const [a, b] = [ExactOperator.diagonal(["1/2"]).rows, ExactOperator.diagonal(["1/3"]).rows];
    const sum = sumOfProducts(
      1,
      [
        { left: a, right: a, sign: 1 },
        { left: b, right: b, sign: -1 },
      ],
      meter(),
    );
    expect(sum.entries.at(0).text()).toBe("5/36");
  });

  it("agree with dense ones for numbers of any size", () => {
    const entry = fc
      .tuple(
        fc.oneof(fc.integer({ min: -9, max: 9 }), fc.maxSafeInteger()),
        fc.integer({ min: 1, max: 3 }),
        fc.boolean(),
      )
      .map(([n, d, imaginary]) =>
        Surd.from(n)
          .over(d)
          .times(imaginary ? Surd.i : 1),
      );
    fc.assert(
      fc.property(matrix(4, entry), matrix(4, entry), (a, b) =>
        a.times(b).equals(ExactOperator.from(denseProduct(denseOf(a), denseOf(b)))),
      ),
      { seed: 211, numRuns: 150 },
    );
  });
});

describe("lists of exact numbers", () => {
  it("are gathered alike in both forms", () => {
    const numbers = ["1/2", "-i/3", "2+i"].map((x) => Surd.from(x));
    const asSurds = Entries.ofSurds(numbers);
    const asWhole = Entries.ofWhole(
      Entries.ofSurds(numbers).whole ?? { re: new Float64Array(0), im: undefined, den: 1 },
    );
    for (const list of [asSurds, asWhole]) {
      expect(list.gather([2, 0, 1], true).surds.map(String)).toEqual(["2-i", "1/2", "i/3"]);
      expect(list.gather([1, 1], false).surds.map(String)).toEqual(["-i/3", "-i/3"]);
      expect([list.length, list.at(2).text()]).toEqual([3, "2+i"]);
    }
  });
});
