import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { COMPLEX_TEXT, complexOf } from "../../src/problem/numbers.js";

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
      "1+2",
      "i2",
      "1 + 2i",
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
        expect(COMPLEX_TEXT.test(text)).toBe(true);
        expect(complexOf(text)).toEqual({ re: re + 0, im });
      }),
      { seed: 3 },
    );
  });
});
