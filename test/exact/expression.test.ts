import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { Surd } from "../../src/exact/surd.js";

const read = (text: string): string => Surd.from(text).text();

function refusal(text: string): { code: string; position: unknown } {
  try {
    Surd.from(text);
  } catch (error) {
    if (error instanceof GoodBasisError) return { code: error.code, position: error.details["position"] };
    throw error;
  }
  return { code: `accepted as ${read(text)}`, position: undefined };
}

describe("reading exact numbers", () => {
  it.each([
    ["sqrt(2/3)", "sqrt(2/3)"],
    ["√(2/3)", "sqrt(2/3)"],
    ["\\sqrt{\\frac{2}{3}}", "sqrt(2/3)"],
    ["-1/2*sqrt(3)", "-1/2*sqrt(3)"],
    ["-\\frac{1}{2}\\sqrt{3}", "-1/2*sqrt(3)"],
    ["−½", undefined],
    ["(1+2i)/sqrt(5)", "(1+2i)/sqrt(5)"],
    ["\\frac{1+2i}{\\sqrt{5}}", "(1+2i)/sqrt(5)"],
    ["i", "i"],
    ["-i/2", "-i/2"],
    ["2^-3", "1/8"],
    ["2^{10}", "1024"],
    ["-2^2", "-4"],
    ["(-2)^2", "4"],
    ["sqrt(2)^-2", "1/2"],
    ["0.125", "1/8"],
    [".5", "1/2"],
    ["1.5e3", "1500"],
    ["25E-1", "5/2"],
    ["2i", "2i"],
    ["i^3", "-i"],
    ["2√3/5", "2/5*sqrt(3)"],
    ["√3/2", "1/2*sqrt(3)"],
    ["√2√3", "sqrt(6)"],
    ["(1+i)(1-i)", "2"],
    ["3·√2 × 2 ⋅ 1", "6*sqrt(2)"],
    ["\\left( 1 \\cdot \\tfrac{1}{3} \\right) \\times 2\\,i", "2i/3"],
    ["1 − 1/3", "2/3"],
    ["--1", "1"],
    ["2*-3", "-6"],
    ["((((7))))", "7"],
    ["sqrt(0)", "0"],
    ["6/4/3", "1/2"],
    ["sqrt( (1/2)^2 + 0.75 )", "1"],
    ["0*sqrt(2)", "0"],
    ["√0.5", "1/sqrt(2)"],
  ])("%s", (text, expected) => {
    if (expected === undefined) expect(refusal(text).code).toBe("text");
    else expect(read(text)).toBe(expected);
  });

  it.each([
    ["", 0],
    ["   ", 3],
    ["1+", 2],
    ["*2", 0],
    ["(1", 2],
    ["1)", 1],
    ["()", 1],
    ["sqrt", 4],
    ["sqrt 2", undefined],
    ["√", 1],
    ["sqrt(1+i)", 0],
    ["1+sqrt(-1)", 2],
    ["sqrt(sqrt(2))", 0],
    ["√√2", 1],
    ["1/2√3", 3],
    ["1/2i", 3],
    ["1 1/2", 2],
    ["(2)3", 3],
    ["2^2^2", 3],
    ["2^i", 2],
    ["2^0.5", 2],
    ["2^1000000", 2],
    ["1e999999999", 0],
    ["1.2.3", 3],
    ["1.", 1],
    ["0x10", 1],
    ["1e", 1],
    ["pi", 0],
    ["NaN", 0],
    ["Infinity", 0],
    ["__proto__", 0],
    ["constructor", 0],
    ["1,5", 1],
    ["\\sqrt{2)", 7],
    ["\\frac{1}", 8],
    ["\\frac12", 5],
    ["2 % 3", 2],
    [`${"(".repeat(300)}1${")".repeat(300)}`, 200],
    [`${"√(".repeat(300)}1${")".repeat(300)}`, undefined],
  ])("refuses %s with the position", (text, position) => {
    const { code, position: found } = refusal(text);
    if (text === "sqrt 2") expect(code).toBe("accepted as sqrt(2)");
    else expect(code).toBe("text");
    if (position !== undefined) expect(found).toBe(position);
  });

  it("says where it divides by zero", () => {
    expect(refusal("1+2/(sqrt(2)*sqrt(3)-sqrt(6))")).toEqual({ code: "zero-division", position: 3 });
    expect(refusal("\\frac{1}{0}")).toEqual({ code: "zero-division", position: 0 });
    expect(refusal("3+0^-1")).toEqual({ code: "zero-division", position: 2 });
  });

  it("stops powers of powers", () => {
    expect(refusal("((9^9999)^9999)^9999").code).toBe("budget");
  });

  it("either reads a number or refuses with a typed error, whatever the characters", () => {
    const alphabet = fc.constantFrom(
      ..."0123456789.+-−*/^(){}i√ \\esqrtfrac·$,".split(""),
      "sqrt(",
      "\\frac{",
      "\\sqrt{",
    );
    const text = fc.array(alphabet, { maxLength: 14 }).map((pieces) => pieces.join(""));
    fc.assert(
      fc.property(text, (t) => {
        const { code } = refusal(t);
        return code.startsWith("accepted") || ["text", "zero-division", "budget"].includes(code);
      }),
      { seed: 61, numRuns: 3000 },
    );
  });
});
