import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { checkDeclaration, type LabelDeclaration, onlyMember, recogniseFamily } from "../../src/audit/label-family.js";
import { GoodBasisError } from "../../src/errors.js";

const real = (re: number): { re: number; im: number } => ({ re, im: 0 });

describe("checkDeclaration", () => {
  it("passes every form, and keeps of it what it knows", () => {
    for (const label of ["j", "m", "parity", "number"]) expect(checkDeclaration("A", label)).toBe(label);
    expect(checkDeclaration("A", undefined)).toBeUndefined();
    expect(checkDeclaration("A", { root: 6, note: "k" })).toEqual({ root: 6 });
    expect(checkDeclaration("A", { rational: 1_000_000 })).toEqual({ rational: 1_000_000 });
    expect(checkDeclaration("A", { root: 1 })).toEqual({ root: 1 });
  });

  it("refuses the rest by name, with the forms that exist", () => {
    const bad: unknown[] = [
      null,
      "J",
      "",
      3,
      5n,
      true,
      {},
      [],
      { root: 0 },
      { root: 2.5 },
      { root: "6" },
      { root: 5n },
      { root: 1_000_001 },
      { rational: -1 },
      { rational: Number.NaN },
      { roots: 3 },
      () => 1,
    ];
    for (const label of bad) {
      const refused = (): unknown => checkDeclaration("Jz", label);
      expect(refused).toThrow(GoodBasisError);
      expect(refused).toThrow(expect.objectContaining({ code: "option", details: { name: "Jz", label } }));
      expect(refused).toThrow(
        /label of candidate Jz .* give "j", "m", "parity", "number", \{ root: N \} or \{ rational: Q \}/,
      );
    }
  });
});

/** All members of a family near a value, by enumeration: eigenvalue and text. */
function members(family: LabelDeclaration, at: number): { re: number; im: number; text: string }[] {
  const half = (k: number): string => `${k < 0 ? "−" : ""}${k % 2 === 0 ? Math.abs(k) / 2 : `${Math.abs(k)}/2`}`;
  if (family === "parity")
    return [
      { ...real(1), text: "+1" },
      { ...real(-1), text: "−1" },
    ];
  if (family === "m")
    return Array.from({ length: 9 }, (_, k) => Math.round(2 * at) - 4 + k).map((k) => ({
      ...real(k / 2),
      text: half(k),
    }));
  if (family === "j") return Array.from({ length: 60 }, (_, k) => ({ ...real((k * (k + 2)) / 4), text: half(k) }));
  if (typeof family === "object" && "root" in family) {
    const n = family.root;
    return Array.from({ length: n }, (_, k) => {
      const divisor = [...Array(n).keys()].map((d) => n - d).find((d) => k % d === 0 && n % d === 0) ?? 1;
      const [p, q] = [k / divisor, n / divisor];
      const names: Record<string, string> = { "0/1": "+1", "1/2": "−1", "1/4": "+i", "3/4": "−i" };
      return {
        re: Math.cos((2 * Math.PI * k) / n),
        im: Math.sin((2 * Math.PI * k) / n),
        text: names[`${p}/${q}`] ?? `exp(2πi·${p}/${q})`,
      };
    });
  }
  if (typeof family === "object") {
    const found = new Map<number, string>();
    for (let q = 1; q <= family.rational; q++) {
      for (let p = Math.floor((at - 1) * q); p <= (at + 1) * q; p++) {
        if (!found.has(p / q)) found.set(p / q, q === 1 ? `${Math.abs(p)}` : `${Math.abs(p)}/${q}`);
      }
    }
    return [...found].map(([x, text]) => ({ ...real(x), text: x < 0 ? `−${text}` : text }));
  }
  return [];
}

const families: LabelDeclaration[] = [
  "j",
  "m",
  "parity",
  { root: 1 },
  { root: 2 },
  { root: 3 },
  { root: 4 },
  { root: 7 },
  { root: 12 },
  { root: 60 },
  { rational: 1 },
  { rational: 3 },
  { rational: 8 },
  { rational: 30 },
];

describe("onlyMember", () => {
  it("finds every member by its own eigenvalue, exact or shifted within the radius, and spells it", () => {
    for (const family of families) {
      for (const at of [0, -2.3, 7.9]) {
        for (const member of members(family, at)) {
          for (const radius of [1e-15, 1e-12, 1e-6, 1e-4]) {
            for (const shift of [0, 0.9, -0.9]) {
              const value = { re: member.re + shift * radius * 0.7, im: member.im + shift * radius * 0.7 };
              const found = onlyMember(family, value, radius + 2e-15);
              expect(found?.text, `${JSON.stringify(family)} ${member.text} ± ${radius}`).toBe(member.text);
              expect(Math.hypot((found?.re ?? 9) - member.re, (found?.im ?? 9) - member.im)).toBeLessThan(2e-15);
            }
          }
        }
      }
    }
  });

  it("never names a member outside the radius, and never one of two that fit", () => {
    const value = fc.record({
      re: fc.double({ min: -5, max: 20, noNaN: true }),
      im: fc.oneof(fc.constant(0), fc.double({ min: -1, max: 1, noNaN: true })),
    });
    const near = fc.record({
      family: fc.constantFrom(...families),
      pick: fc.nat(),
      value,
      pull: fc.constantFrom(0, 1e-12, 1e-6, 1e-3, 0.02, 0.2, 1),
      radius: fc.constantFrom(0, 1e-13, 1e-9, 1e-3, 0.01, 0.05, 0.0624, 0.3, 2),
    });
    let named = 0;
    fc.assert(
      fc.property(near, ({ family, pick, value: far, pull, radius }) => {
        const all = members(family, far.re);
        const target = all[pick % all.length] ?? real(0);
        const x = { re: target.re + pull * (far.re - target.re), im: target.im + pull * (far.im - target.im) };
        const found = onlyMember(family, x, radius);
        const fitting = members(family, x.re).filter((m) => Math.hypot(m.re - x.re, m.im - x.im) <= radius + 1e-15);
        if (found !== undefined) {
          named++;
          expect(Math.hypot(found.re - x.re, found.im - x.im)).toBeLessThanOrEqual(
            radius + 1e-15 * (1 + Math.abs(found.re)),
          );
          expect(fitting.map(({ text }) => text)).toEqual([found.text]);
        }
      }),
      { seed: 101, numRuns: 3000 },
    );
    expect(named).toBeGreaterThan(500);
  });

  it("takes no member that is certainly not the eigenvalue", () => {
    expect(onlyMember("m", real(1 + 2 ** -52), 0)).toBeUndefined();
    expect(onlyMember("m", real(1 + 2 ** -52), 2 ** -52)?.text).toBe("1");
    expect(onlyMember("j", real(3.75 - 2 ** -51), 2 ** -52)).toBeUndefined();
    expect(onlyMember("parity", { re: -1, im: 1e-300 }, 0)).toBeUndefined();
    expect(onlyMember({ rational: 4 }, real(0.25 + 2 ** -54), 2 ** -55)).toBeUndefined();
    expect(onlyMember({ rational: 4 }, real(0.25 + 2 ** -54), 2 ** -54)?.text).toBe("1/4");
    expect(onlyMember({ root: 4 }, { re: 2 ** -60, im: 1 }, 0)).toBeUndefined();
    // a rounded third counts as one, its neighbour's neighbours do not
    expect(onlyMember({ rational: 3 }, real(1 / 3), 0)?.text).toBe("1/3");
    expect(onlyMember({ rational: 3 }, real(1 / 3 + 2 ** -50), 0)).toBeUndefined();
  });

  it("large values: the distance between doubles is no licence", () => {
    expect(onlyMember("m", real(1e15 + 0.25), 0)).toBeUndefined();
    expect(onlyMember("m", real(1e15 + 0.5), 0)?.text).toBe("2000000000000001/2");
    expect(onlyMember({ rational: 1_000_000 }, real(1e6 + 2 ** -32), 0)).toBeUndefined();
    expect(onlyMember({ rational: 1000 }, real(1e6 + 0.5), 1e-9)?.text).toBe("2000001/2");
    for (const huge of [2 ** 53 + 2, 1e17, 1e200, 1e308, Number.MAX_VALUE, Number.POSITIVE_INFINITY, Number.NaN]) {
      for (const family of families) {
        expect(onlyMember(family, real(huge), 0), `${JSON.stringify(family)} ${huge}`).toBeUndefined();
        expect(onlyMember(family, real(-huge), 1e-12)).toBeUndefined();
      }
    }
  });

  it("says nothing where the radius is wide or no number, or the family is numbers", () => {
    for (const family of families) {
      const [first] = members(family, 0);
      for (const radius of [1 / 16, 1, Number.POSITIVE_INFINITY, Number.NaN])
        expect(onlyMember(family, first ?? real(0), radius)).toBeUndefined();
    }
    expect(onlyMember("number", real(1), 0)).toBeUndefined();
    expect(onlyMember({ rational: 100 }, real(0.5), 1 / 20_000)).toBeUndefined();
    expect(onlyMember({ rational: 100 }, real(0.5), 1 / 20_001)?.text).toBe("1/2");
    expect(onlyMember({ root: 60 }, real(1), Math.sin(Math.PI / 60))).toBeUndefined();
    expect(onlyMember({ root: 60 }, real(1), Math.sin(Math.PI / 60) * 0.999)?.text).toBe("+1");
  });

  it("spells numbers as the trade does", () => {
    const text = (family: LabelDeclaration, re: number, im = 0): string | undefined =>
      onlyMember(family, { re, im }, 1e-9)?.text;
    expect(text("m", -1.5)).toBe("−3/2");
    expect(text("m", -0)).toBe("0");
    expect(text("m", 0.5)).toBe("1/2");
    expect(text("j", 0)).toBe("0");
    expect(text("j", -1e-10)).toBe("0");
    expect(text("j", 8.75)).toBe("5/2");
    expect(text("j", 12)).toBe("3");
    expect(text("parity", 1)).toBe("+1");
    expect(text("parity", -1)).toBe("−1");
    expect(text({ rational: 12 }, -7 / 12)).toBe("−7/12");
    expect(text({ rational: 12 }, 2)).toBe("2");
    expect(text({ root: 4 }, 0, -1)).toBe("−i");
    expect(text({ root: 8 }, 0, 1)).toBe("+i");
    expect(text({ root: 6 }, -0.5, Math.sqrt(0.75))).toBe("exp(2πi·1/3)");
    expect(text({ root: 6 }, 0.5, -Math.sqrt(0.75))).toBe("exp(2πi·5/6)");
    expect(text({ root: 3 }, 0.5, Math.sqrt(0.75))).toBeUndefined();
    expect(text("parity", 0)).toBeUndefined();
    expect(text("j", 0.5)).toBeUndefined();
    expect(text("j", -0.75)).toBeUndefined();
  });

  it("gives the eigenvalue of any root of unity to a few units in the last place", () => {
    for (let n = 1; n <= 200; n++) {
      for (const k of [1, n - 1, Math.floor(0.9 * n), Math.floor(n / 2)]) {
        const found = onlyMember(
          { root: n },
          { re: Math.cos((2 * Math.PI * k) / n), im: Math.sin((2 * Math.PI * k) / n) },
          1e-6,
        );
        const folded = 2 * k > n ? n - k : k;
        expect(Math.abs((found?.re ?? 9) - Math.cos((2 * Math.PI * folded) / n))).toBeLessThan(7e-16);
        expect(Math.abs(Math.abs(found?.im ?? 9) - Math.abs(Math.sin((2 * Math.PI * folded) / n)))).toBeLessThan(7e-16);
      }
    }
  });
});

describe("recogniseFamily", () => {
  const recognise = (...values: number[]): LabelDeclaration | undefined => recogniseFamily(values.map(real), 1e-10);

  it("proposes the narrowest family that all values fit", () => {
    expect(recognise(1, -1)).toBe("parity");
    expect(recognise(-1)).toBe("parity");
    expect(recognise(1, 0, -1)).toBe("m");
    expect(recognise(0.5, -0.5)).toBe("m");
    expect(recognise(0.75)).toBe("j");
    expect(recognise(0.75, 3.75)).toBe("j");
    expect(recognise(0, 0.75, 2)).toBe("j");
    expect(recognise(0, 2, 6)).toBe("j");
    expect(recognise(0, 2)).toBe("m");
    expect(recognise(0, 1, 2)).toBe("m");
    expect(recognise(0, 2, 6.5)).toBe("m");
    expect(recognise(2, 6, 12)).toBe("j");
    expect(recognise(-2, 2, 6)).toBe("m");
    expect(recognise(1 / 3, 0)).toEqual({ rational: 12 });
    expect(recognise(-0.75)).toEqual({ rational: 12 });
    expect(recognise(5 / 12, 1)).toEqual({ rational: 12 });
    expect(recognise(1 / 13)).toBeUndefined();
    expect(recognise(Math.PI)).toBeUndefined();
    expect(recognise(1, Math.SQRT2)).toBeUndefined();
    expect(recognise(1e308)).toBeUndefined();
  });

  it("takes ±1 for a parity only where these are all the eigenvalues", () => {
    expect(recogniseFamily([real(1), real(-1)], 1e-10, false)).toBe("m");
    expect(recogniseFamily([real(1), real(-1)], 1e-10, true)).toBe("parity");
  });

  it("proposes roots of unity of the lowest order", () => {
    const roots = (n: number, ...ks: number[]): LabelDeclaration | undefined =>
      recogniseFamily(
        ks.map((k) => ({ re: Math.cos((2 * Math.PI * k) / n), im: Math.sin((2 * Math.PI * k) / n) })),
        1e-10,
      );
    expect(roots(4, 0, 1, 2, 3)).toEqual({ root: 4 });
    expect(roots(6, 1)).toEqual({ root: 6 });
    expect(roots(6, 0, 2, 4)).toEqual({ root: 3 });
    expect(roots(6, 2, 3)).toEqual({ root: 6 });
    expect(roots(64, 1)).toEqual({ root: 64 });
    expect(roots(65, 1)).toBeUndefined();
    expect(recogniseFamily([{ re: 0, im: 2 }], 1e-10)).toBeUndefined();
    expect(recogniseFamily([{ re: 0, im: 1 }, real(0.5)], 1e-10)).toBeUndefined();
  });

  it("proposes nothing where the radius does not allow it", () => {
    expect(recogniseFamily([real(1 / 3)], 1 / 200)).toBeUndefined();
    expect(recogniseFamily([real(1), real(-1)], 0.1)).toBeUndefined();
    expect(recogniseFamily([real(1 + 1e-6)], 1e-7)).toBeUndefined();
  });
});
