import { describe, expect, it } from "vitest";
import { labelFamily, numberText, sharpLabel, vagueLabel } from "../../src/refine/label.js";

const real = (re: number): { re: number; im: number } => ({ re, im: 0 });

describe("labelFamily", () => {
  it("takes the declared family, whatever the numbers say", () => {
    expect(labelFamily("m", [real(0.123)], 1e-12)).toEqual({ family: "m", declared: true });
    expect(labelFamily({ root: 6 }, [], 1e-12)).toEqual({ family: { root: 6 }, declared: true });
  });

  it("else proposes one that all numbers fit, or none", () => {
    expect(labelFamily(undefined, [real(1), real(-1)], 1e-12)).toEqual({ family: "parity", declared: false });
    expect(labelFamily(undefined, [real(1), real(-1)], 1e-12, false)).toEqual({ family: "m", declared: false });
    expect(labelFamily(undefined, [real(0.75), real(3.75)], 1e-12)).toEqual({ family: "j", declared: false });
    expect(labelFamily(undefined, [real(Math.SQRT2)], 1e-12)).toEqual({ family: undefined, declared: false });
  });
});

describe("sharpLabel", () => {
  it("is declared or proposed where one member fits, and keeps the measured numbers", () => {
    const value = { re: 3.7500000000001, im: 1e-14 };
    expect(sharpLabel({ family: "j", declared: true }, value, 1e-12, "conserved")).toEqual({
      re: 3.7500000000001,
      im: 1e-14,
      radius: 1e-12,
      text: "3/2",
      status: "declared",
      role: "conserved",
    });
    expect(sharpLabel({ family: "m", declared: false }, real(-0.5), 1e-12, "descriptive")).toMatchObject({
      text: "−1/2",
      status: "proposed",
      role: "descriptive",
    });
  });

  it("stays a number where none fits, or none is known", () => {
    const outside = sharpLabel({ family: "m", declared: true }, real(0.5001), 1e-5, "conserved");
    expect(outside).toMatchObject({ text: "0.5001", status: "measured", radius: 1e-5 });
    expect(sharpLabel({ family: "m", declared: true }, real(0.5), 0.1, "conserved")).toMatchObject({
      text: "0.5",
      status: "measured",
    });
    expect(sharpLabel({ family: "number", declared: true }, real(1), 0, "conserved")).toMatchObject({
      text: "1",
      status: "measured",
    });
    expect(sharpLabel({ family: undefined, declared: false }, real(1), 0, "broken")).toMatchObject({
      text: "1",
      status: "measured",
      role: "broken",
    });
  });
});

describe("vagueLabel", () => {
  it("is an expectation value in angle brackets with its deviation", () => {
    expect(vagueLabel({ re: -0.25, im: 0 }, 0.4330127, "descriptive")).toEqual({
      re: -0.25,
      im: 0,
      radius: 0.4330127,
      text: "⟨−0.25⟩",
      status: "not sharp",
      role: "descriptive",
    });
  });
});

describe("numberText", () => {
  it("writes six digits with the trade's minus sign, in exponents as well", () => {
    const cases: [number, number, string][] = [
      [0, 0, "0"],
      [-0, 0, "0"],
      [1, 0, "1"],
      [-1.5, 0, "−1.5"],
      [Math.SQRT2, 0, "1.41421"],
      [-1234567, 0, "−1234570"],
      [1e-7, 0, "1e−7"],
      [-2.5e-9, 0, "−2.5e−9"],
      [0, 1, "1i"],
      [0, -0.5, "−0.5i"],
      [1, -2, "1−2i"],
      [-1, 2, "−1+2i"],
      [-1e-8, -1e-9, "−1e−8−1e−9i"],
    ];
    for (const [re, im, text] of cases) {
      expect(numberText({ re, im })).toBe(text);
      expect(numberText({ re, im })).not.toContain("-");
    }
  });

  it("drops a part that is rounding beside the other", () => {
    expect(numberText({ re: 2, im: 1e-13 })).toBe("2");
    expect(numberText({ re: -1e-13, im: 2 })).toBe("2i");
    expect(numberText({ re: 2, im: 1e-11 })).toBe("2+1e−11i");
  });
});
