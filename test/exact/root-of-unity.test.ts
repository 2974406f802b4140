import { describe, expect, it } from "vitest";
import { exactRootOfUnity } from "../../src/exact/root-of-unity.js";

describe("roots of unity", () => {
  it("are in the field where their order divides 24, and are what cosine and sine say", () => {
    for (let order = 1; order <= 30; order++) {
      for (let k = -order; k <= 2 * order; k++) {
        const root = exactRootOfUnity(k, order);
        if (root === undefined) continue;
        expect(root.power(order).equals(1)).toBe(true);
        const { re, im } = root.toComplex();
        expect(
          Math.hypot(re - Math.cos((2 * Math.PI * k) / order), im - Math.sin((2 * Math.PI * k) / order)),
        ).toBeLessThan(1e-14);
      }
      expect(exactRootOfUnity(1, order) !== undefined).toBe(24 % order === 0);
    }
    expect(exactRootOfUnity(2, 10)).toBeUndefined();
    expect(exactRootOfUnity(5, 10)?.text()).toBe("-1");
    expect(exactRootOfUnity(1, 8)?.text()).toBe("(1+i)/sqrt(2)");
    expect(exactRootOfUnity(-1, 3)?.text()).toBe("-1/2-i/2*sqrt(3)");
  });

  it("are asked with whole numbers", () => {
    expect(() => exactRootOfUnity(0.5, 3)).toThrow(expect.objectContaining({ code: "option" }));
    expect(() => exactRootOfUnity(1, 0)).toThrow(expect.objectContaining({ code: "option" }));
  });
});
