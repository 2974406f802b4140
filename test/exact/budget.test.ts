import { describe, expect, it } from "vitest";
import { Meter } from "../../src/exact/budget.js";
import { Surd } from "../../src/exact/surd.js";

const terms = (text: string) => Surd.from(text).largeTerms;

describe("the budget", () => {
  it("counts steps to the limit and not beyond", () => {
    const meter = new Meter("test", { steps: 10 });
    meter.spend(4);
    meter.spend(6);
    expect(() => meter.spend(1)).toThrow(
      expect.objectContaining({ code: "budget", details: { kind: "steps", most: 10 } }),
    );
  });

  it("counts a product of exact numbers for twenty of machine integers", () => {
    const meter = new Meter("test", { steps: 40 });
    meter.spendProducts(2);
    expect(() => meter.spend(1)).toThrow(expect.objectContaining({ code: "budget" }));
  });

  it("weighs roots and digits, of numerators and denominators alike", () => {
    const meter = new Meter("test", { roots: 3, digits: 30 });
    for (const fine of ["5", "1+sqrt(2)+sqrt(3)", "10^29", "1/10^29+sqrt(2)"]) meter.weigh(terms(fine));
    for (const large of ["1+sqrt(2)+sqrt(3)+i*sqrt(5)"]) {
      expect(() => meter.weigh(terms(large))).toThrow(expect.objectContaining({ details: { kind: "roots", most: 3 } }));
    }
    for (const long of ["10^31", "1/10^31", "i*10^31", "1+10^31*sqrt(2)"]) {
      expect(() => meter.weigh(terms(long))).toThrow(
        expect.objectContaining({ details: { kind: "digits", most: 30 } }),
      );
    }
  });

  it("says what to do", () => {
    expect(() => new Meter("exactKernel", { steps: 1 }).spend(2)).toThrow(/exactKernel: .*raise budget\.steps/);
  });

  it("is made of positive numbers", () => {
    for (const budget of [{ steps: 0 }, { digits: -1 }, { roots: Number.NaN }]) {
      expect(() => new Meter("test", budget)).toThrow(expect.objectContaining({ code: "option" }));
    }
  });

  it("also ends single products of far too many roots", () => {
    const primes = [2, 3, 5, 7, 11, 13, 17, 19, 23, 29];
    const product = (list: readonly number[]): Surd =>
      list.reduce((x, p) => x.times(Surd.one.plus(Surd.sqrt(p) ?? 0)), Surd.one);
    const [left, right] = [product(primes), product(primes)];
    expect(left.parts()).toHaveLength(1024);
    expect(() => left.times(right)).toThrow(expect.objectContaining({ code: "budget" }));
  });
});
