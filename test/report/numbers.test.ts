import fc from "fast-check";
import { describe, expect, test } from "vitest";
import {
  boundedText,
  boundText,
  commonBound,
  complexText,
  numberText,
  roughText,
  supportedText,
} from "../../src/report/numbers.js";

const SEED = { seed: 20240611, numRuns: 2000 };
const ascii = (text: string): number => Number(text.replaceAll("−", "-"));
const size = fc.tuple(fc.double({ min: 1, max: 10, noNaN: true }), fc.integer({ min: -40, max: 12 }));
const positive = size.map(([mantissa, exponent]) => mantissa * 10 ** exponent);
const signed = fc.tuple(positive, fc.boolean()).map(([x, minus]) => (minus ? -x : x));

describe("numberText", () => {
  test.each([
    [0, "0"],
    [-0, "0"],
    [-3, "−3"],
    [1 / 3, "0.333333"],
    [-1.2e-9, "−1.2e−9"],
    [12816.5453, "12816.5"],
    [0.00012, "0.00012"],
    [1e20, "1e20"],
    [0.9999999, "1"],
    [Number.POSITIVE_INFINITY, "∞"],
    [Number.NEGATIVE_INFINITY, "−∞"],
    [Number.NaN, "—"],
  ])("%d is %s", (x, text) => expect(numberText(x)).toBe(text));

  test("reads back to six digits", () => {
    fc.assert(
      fc.property(signed, (x) => Math.abs(ascii(numberText(x)) - x) <= 5.0001e-6 * Math.abs(x)),
      SEED,
    );
  });
});

describe("boundText", () => {
  test.each([
    [0, "0"],
    [4e-15, "4e−15"],
    [4.01e-15, "5e−15"],
    [1.21e-15, "1.3e−15"],
    [1.99e-15, "2e−15"],
    [9.5e-15, "1e−14"],
    [0.021, "0.03"],
    [3.2, "4"],
    [2e7, "2e7"],
    [Number.POSITIVE_INFINITY, "∞"],
    [Number.NaN, "—"],
  ])("%d is %s", (x, text) => expect(boundText(x)).toBe(text));

  test("never prints less than was proved, nor twice as much", () => {
    fc.assert(
      fc.property(positive, fc.constantFrom(undefined, 1, 2, 3), (x, digits) => {
        const printed = ascii(boundText(x, digits));
        return printed >= x && printed <= 2 * x;
      }),
      SEED,
    );
  });
});

describe("boundedText", () => {
  test.each([
    [2 / 3, 4e-15, "0.666666666666667 ± 5e−15"],
    [2 / 3, 1.2e-15, "0.6666666666666666 ± 1.2e−15"],
    [0.5, 4e-15, "0.5 ± 4e−15"],
    [-1e-17, 4e-15, "0 ± 5e−15"],
    [3, 0, "3 ± 0"],
    [1.5, 0.03, "1.50 ± 0.03"],
    [12345, 200, "12300 ± 300"],
    [7, 40, "10 ± 50"],
    [-3.0000000000000004, 2e-14, "−3 ± 3e−14"],
    [1.234567e-7, 3e-12, "1.23457e−7 ± 4e−12"],
    [0.25, Number.POSITIVE_INFINITY, "0.25 ± ∞"],
    [Number.NaN, 1, "— ± ∞"],
  ])("%d with %d is %s", (value, bound, text) => {
    const printed = boundedText(value, bound);
    expect(`${printed.value} ± ${printed.plusMinus}`).toBe(text);
  });

  test("what is printed contains what was proved, whatever the digits", () => {
    fc.assert(
      fc.property(signed, positive, fc.integer({ min: 1, max: 17 }), (value, bound, digits) => {
        const { value: shown, plusMinus } = boundedText(value, bound, digits);
        return Math.abs(ascii(shown) - value) + bound <= ascii(plusMinus) * (1 + 1e-15);
      }),
      SEED,
    );
  });

  test("no digit stands far below the ±", () => {
    fc.assert(
      fc.property(signed, positive, (value, bound) => {
        const shown = boundedText(value, bound).value;
        const [mantissa = "", exponent = "0"] = shown.split("e");
        const decimals = mantissa.includes(".") ? mantissa.length - mantissa.indexOf(".") - 1 : 0;
        return decimals === 0 || 10 ** (ascii(exponent) - decimals) >= bound / 25;
      }),
      SEED,
    );
  });
});

describe("commonBound", () => {
  const bounded = fc.record({
    value: fc.double({ min: -1e6, max: 1e6, noNaN: true }),
    plusMinus: fc.double({ min: 0, max: 1e-5, noNaN: true }),
  });

  test("what is printed contains what was proved, in every row", () => {
    let shared = 0;
    fc.assert(
      fc.property(fc.array(bounded, { maxLength: 6 }), fc.integer({ min: 1, max: 17 }), (numbers, digits) => {
        const found = commonBound(numbers, digits);
        if (found === undefined) return;
        shared++;
        const bound = ascii(found.plusMinus);
        expect(found.values).toHaveLength(numbers.length);
        numbers.forEach(({ value, plusMinus }, k) => {
          const printed = ascii(found.values[k] ?? "");
          expect(Math.abs(printed - value) + plusMinus).toBeLessThanOrEqual(bound * (1 + 1e-15));
        });
      }),
      { seed: 11, numRuns: 2000 },
    );
    expect(shared).toBeGreaterThan(100);
  });

  test("is refused where the ± would cost digits, and for a single number", () => {
    const numbers = [
      { value: 3, plusMinus: 4e-9 },
      { value: 1, plusMinus: 1e-15 },
    ];
    expect(commonBound(numbers, 10)).toBeUndefined();
    expect(commonBound([{ value: 3, plusMinus: 0 }], 10)).toBeUndefined();
    expect(commonBound([...numbers, { value: 1e9, plusMinus: Number.POSITIVE_INFINITY }], 10)).toBeUndefined();
    expect(commonBound([...numbers, { value: Number.NaN, plusMinus: 0 }], 10)).toBeUndefined();
  });
});

test("supportedText leaves out what the ± does not support", () => {
  expect(supportedText(5.730000000000002, 3e-14)).toBe("5.73");
  expect(supportedText(1e-17, 3e-14)).toBe("0");
  expect(supportedText(12816.545301, 0.02)).toBe("12816.55");
  expect(supportedText(1 / 3, 0)).toBe("0.333333333333");
});

test("complex numbers are rounded at one place, and lose parts that are rounding", () => {
  expect(complexText(0.5, -0.5)).toBe("0.5−0.5i");
  expect(complexText(1e-17, 1)).toBe("i");
  expect(complexText(0, -Math.SQRT1_2)).toBe("−0.707107i");
  expect(complexText(-0.25, 1e-12)).toBe("−0.25");
  expect(complexText(1, 0.0000123)).toBe("1+1e−5i");
  expect(complexText(0, 0)).toBe("0");
});

test("roughText", () => {
  expect([0.0134, 12345678, 0].map(roughText)).toEqual(["0.013", "1.2e7", "0"]);
});
