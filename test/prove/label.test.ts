import { describe, expect, it } from "vitest";
import { Surd } from "../../src/exact/surd.js";
import { labelText, namesOf } from "../../src/prove/label.js";
import type { BlockValue } from "../../src/prove/proof.js";
import { isolate } from "../../src/prove/roots.js";
import { valueText } from "../../src/prove/value-text.js";

const value = (text: string): BlockValue => ({ kind: "value", value: Surd.from(text) });
const roots = (coefficients: readonly string[], part: "whole" | "re" | "im", re?: string): BlockValue => {
  const polynomial = coefficients.map((c) => Surd.from(c));
  const known = re === undefined ? undefined : Surd.from(re);
  return { kind: "roots", roots: { polynomial, multiplicity: 1, intervals: isolate(polynomial) }, part, re: known };
};

describe("labelText", () => {
  it("writes members of the recognised family", () => {
    const names = namesOf(undefined, [value("0"), value("2"), value("6")], undefined);
    expect(names.family).toBe("j");
    expect(labelText(value("6"), names)).toBe("2");
    expect(labelText(value("15/4"), namesOf("j", [], undefined))).toBe("3/2");
    expect(labelText(value("-1/2"), namesOf("m", [], undefined))).toBe("−1/2");
    expect(labelText(value("-1"), namesOf(undefined, [value("1"), value("-1")], 2))).toBe("−1");
  });

  it("is not fooled by a number next to a member", () => {
    const near = Surd.from("6").plus("1/100000000000000000000000000000000");
    const text = labelText({ kind: "value", value: near }, namesOf("j", [], undefined));
    expect(text).toMatch(/^eigenvalue 6000/);
    expect(labelText(value("1/2+1/1000000000000000000000"), namesOf("m", [], undefined))).not.toBe("1/2");
  });

  it("writes roots of unity by their turns, in the field or not", () => {
    const i = value("i");
    expect(labelText(i, namesOf(undefined, [i, value("1")], 4))).toBe("+i");
    const half = value("-1/2+sqrt(3)/2*i");
    expect(labelText(half, namesOf({ root: 3 }, [], 3))).toBe("exp(2πi·1/3)");
    expect(labelText(half, namesOf({ root: 3 }, [], undefined))).toBe("exp(2πi·1/3)");
    expect(labelText(half, namesOf({ root: 999_999 }, [], undefined))).toBe("exp(2πi·1/3)");
    const pythagorean = value("3/5+4/5*i");
    expect(labelText(pythagorean, namesOf({ root: 1000 }, [], undefined))).toBe("3/5 + 4i/5");
    // cos(2π/5) is in the field, sin(2π/5) is not
    const fifth = roots(["-(5+sqrt(5))/8", "0", "1"], "im", "(sqrt(5)-1)/4");
    expect(labelText(fifth, namesOf(undefined, [fifth], 5))).toBe("exp(2πi·4/5) | exp(2πi·1/5)");
    const seventh = roots(["-1/8", "-1/2", "1/2", "1"], "re");
    expect(labelText(seventh, namesOf(undefined, [seventh], 7)).split(" | ")).toHaveLength(6);
  });

  it("writes anything else as the number or the polynomial that it is", () => {
    expect(labelText(value("sqrt(2)/3"), namesOf(undefined, [value("sqrt(2)/3")], undefined))).toBe("√2/3");
    const cubic = roots(["-1", "-2", "1", "1"], "whole");
    expect(valueText(cubic)).toBe("roots of x^3 + x^2 - 2 x - 1 (-1.80194, -0.445042, 1.24698)");
    expect(labelText(cubic, namesOf(undefined, [cubic], undefined))).toBe(valueText(cubic));
    expect(labelText({ kind: "unknown" }, namesOf(undefined, [], undefined))).toBe("unknown");
  });
});
