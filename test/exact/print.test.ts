import fc from "fast-check";
import { describe, expect, it } from "vitest";
import type { SurdTextOptions } from "../../src/exact/print.js";
import { Surd } from "../../src/exact/surd.js";
import { rootOf, surd } from "./arbitrary.js";

const forms = ["plain", "unicode", "latex"] as const;

describe("writing exact numbers", () => {
  it("comes back the same in every form", () => {
    fc.assert(
      fc.property(surd, fc.constantFrom(...forms), fc.boolean(), (x, form, underRoot) => {
        const text = x.text({ form, underRoot });
        expect(Surd.from(text).equals(x), text).toBe(true);
        expect(Surd.from(text).text({ form, underRoot })).toBe(text);
      }),
      { seed: 71, numRuns: 600 },
    );
  });

  it("comes back the same with radicands that nobody factors", () => {
    const [p, q] = [10n ** 18n + 9n, 10n ** 18n + 3n];
    for (const x of [
      rootOf(p * p * q),
      rootOf(p * q)
        .plus(rootOf(p))
        .over(7),
      rootOf(p ** 3n).inverse(),
    ]) {
      for (const form of forms) expect(Surd.from(x.text({ form })).equals(x)).toBe(true);
    }
  });

  it.each([
    ["0", "0", "0", "0"],
    ["-1", "-1", "−1", "-1"],
    ["1/2", "1/2", "1/2", "\\frac{1}{2}"],
    ["sqrt(2)", "sqrt(2)", "√2", "\\sqrt{2}"],
    ["sqrt(2/3)", "sqrt(2/3)", "√(2/3)", "\\sqrt{\\frac{2}{3}}"],
    ["-sqrt(3)/2", "-1/2*sqrt(3)", "−√3/2", "-\\frac{\\sqrt{3}}{2}"],
    ["5*sqrt(2)/3", "5/3*sqrt(2)", "5√2/3", "\\frac{5\\sqrt{2}}{3}"],
    ["1/sqrt(2)", "1/sqrt(2)", "1/√2", "\\frac{1}{\\sqrt{2}}"],
    ["sqrt(3)/6", "1/(2*sqrt(3))", "1/(2√3)", "\\frac{1}{2\\sqrt{3}}"],
    ["sqrt(2/3)/5", "1/5*sqrt(2/3)", "√(2/3)/5", "\\frac{1}{5}\\sqrt{\\frac{2}{3}}"],
    ["3*sqrt(2/3)", "sqrt(6)", "√6", "\\sqrt{6}"],
    ["i", "i", "i", "i"],
    ["-i/2", "-i/2", "−i/2", "-\\frac{i}{2}"],
    ["i*sqrt(3)/2", "i/2*sqrt(3)", "i√3/2", "\\frac{i\\sqrt{3}}{2}"],
    ["1/2+3i/4", "1/2+3i/4", "1/2 + 3i/4", "\\frac{1}{2} + \\frac{3i}{4}"],
    ["(1+2i)/sqrt(5)", "(1+2i)/sqrt(5)", "(1+2i)/√5", "\\frac{1+2i}{\\sqrt{5}}"],
    ["(i-1)*sqrt(3)/2", "-(1-i)/2*sqrt(3)", "−(1−i)√3/2", "-\\frac{(1-i)\\sqrt{3}}{2}"],
    ["(1-sqrt(5))/2", "1/2-1/2*sqrt(5)", "1/2 − √5/2", "\\frac{1}{2} - \\frac{\\sqrt{5}}{2}"],
  ])("%s", (text, plain, unicode, latex) => {
    const x = Surd.from(text);
    expect(forms.map((form) => x.text({ form }))).toEqual([plain, unicode, latex]);
    expect([`${x}`, JSON.stringify(x)]).toEqual([plain, JSON.stringify(plain)]);
  });

  it.each([
    ["sqrt(3)/2", "√(3/4)"],
    ["-2*sqrt(6)/3", "−√(8/3)"],
    ["1/sqrt(2)", "√(1/2)"],
    ["2*sqrt(3)", "√12"],
    ["i*sqrt(3)/2", "i√(3/4)"],
    ["1/2", "1/2"],
    ["(1+i)/sqrt(2)", "(1+i)/√2"],
    ["1+sqrt(2)", "1 + √2"],
  ])("%s under one root, as tables of coupling coefficients have it", (text, expected) => {
    const options: SurdTextOptions = { form: "unicode", underRoot: true };
    expect(Surd.from(text).text(options)).toBe(expected);
  });
});
