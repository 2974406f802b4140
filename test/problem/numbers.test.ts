import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { complexOf, isExactText, NUMBER_TEXT, readExact, readNumber } from "../../src/problem/numbers.js";
import { errorOf } from "./files.js";

const place = { document: { name: "p.json", text: undefined }, path: [] };

describe("numbers of a problem file", () => {
  it("are read in every form", () => {
    expect(complexOf(1.5)).toEqual({ re: 1.5, im: 0 });
    expect(complexOf([1, -2])).toEqual({ re: 1, im: -2 });
    expect(complexOf("1+2i")).toEqual({ re: 1, im: 2 });
    expect(complexOf("-1.5e-3-2.5E+2i")).toEqual({ re: -0.0015, im: -250 });
    expect(complexOf("i")).toEqual({ re: 0, im: 1 });
    expect(complexOf("-i")).toEqual({ re: 0, im: -1 });
    expect(complexOf("3-i")).toEqual({ re: 3, im: -1 });
    expect(complexOf("1e+5i")).toEqual({ re: 0, im: 1e5 });
    expect(complexOf(".5i")).toEqual({ re: 0, im: 0.5 });
    expect(complexOf("-7")).toEqual({ re: -7, im: 0 });
  });

  it("are refused in any other", () => {
    for (const bad of [
      "",
      "+",
      "1+",
      "i2",
      "1/0",
      "sqrt(-1)",
      "1+2j",
      "0x10",
      "1e",
      "NaN",
      "Infinity",
      "1e999",
      "2e999i",
    ]) {
      expect(complexOf(bad), bad).toBeUndefined();
    }
    for (const bad of [Number.POSITIVE_INFINITY, Number.NaN, null, true, [], [1], [1, 2, 3], [1, "2"], {}]) {
      expect(complexOf(bad), String(bad)).toBeUndefined();
    }
  });

  it("read back as the same bits", () => {
    const part = fc.double({ noNaN: true, noDefaultInfinity: true });
    fc.assert(
      fc.property(part, part, (re, im) => {
        const text = `${re}${im < 0 || Object.is(im, -0) ? "-" : "+"}${Math.abs(im)}i`;
        expect(isExactText(text)).toBe(false);
        expect(NUMBER_TEXT.test(text)).toBe(true);
        expect(complexOf(text)).toEqual({ re: re + 0, im });
      }),
      { seed: 3 },
    );
  });

  it("that are text but no decimals are exact, and otherwise rounded correctly", () => {
    for (const text of ["1/3", "sqrt(2/3)", "(1+2i)/sqrt(5)", "√(2/3)", "1 + 2i", "\\frac{1}{2}\\sqrt{3}", "−√3/2"]) {
      expect(isExactText(text), text).toBe(true);
      expect(NUMBER_TEXT.test(text), text).toBe(true);
      expect(complexOf(text)).toEqual(readExact(place, text).toComplex());
    }
    for (const text of ["0.1", "1+2i", "-i", "3"]) expect(isExactText(text)).toBe(false);
    expect(readExact(place, "0.1").text()).toBe("1/10");
    expect(readExact(place, 0.5).text()).toBe("1/2");
    expect(readExact(place, [0, 0.25]).text()).toBe("i/4");
  });

  it("say what is wrong with a text, and where", () => {
    const fault =
      /^file: p\.json: expected a finite number, .*got "sqrt\(x\)"; the exact number "sqrt\(x\)": "x" is not known, at character 6/;
    expect(errorOf(() => readExact(place, "sqrt(x)"))).toMatch(fault);
    expect(errorOf(() => readNumber(place, "sqrt(x)"))).toMatch(fault);
    expect(errorOf(() => readNumber(place, "1e400/3"))).toContain("beyond the range of doubles");
    expect(errorOf(() => readExact(place, Number.POSITIVE_INFINITY))).toMatch(/^not-finite/);
  });
});
