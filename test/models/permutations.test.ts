import { expect, test } from "vitest";
import { ketPermutation, reflection, sitePermutation, translation } from "../../src/models/permutations.js";
import { productSpace } from "../../src/models/product-space.js";
import { Operator } from "../../src/operator/operator.js";

test("the content of site s moves to site map[s]", () => {
  const map = [2, 0, 1];
  const space = productSpace([3, 3, 3]);
  const number = Operator.diagonal([0, 1, 2], { uncertainty: "exact" });
  const p = sitePermutation(3, map);
  for (const [site, image] of map.entries()) {
    const moved = p.times(space.embed(number, site)).times(p.adjoint());
    expect(moved.minus(space.embed(number, image)).norm).toBe(0);
  }
  // |0 1 2⟩ has its 0 at site 2, its 1 at site 0, its 2 at site 1: |1 2 0⟩.
  expect(p.entry(1 * 9 + 2 * 3 + 0, 0 * 9 + 1 * 3 + 2).re).toBe(1);
  expect(p.isExact).toBe(true);
  expect(p.kind).toBe("unitary");
});

test("permutations compose as their maps do", () => {
  const first = [1, 2, 0, 3];
  const second = [3, 1, 0, 2];
  const both = first.map((s) => second[s] ?? -1);
  const product = sitePermutation(2, second).times(sitePermutation(2, first));
  expect(product.minus(sitePermutation(2, both)).norm).toBe(0);
});

test("translation and reflection of a ring", () => {
  const t = translation(5, 2);
  const r = reflection(5, 2);
  const one = Operator.identity(32);
  expect(t.power(5).minus(one).norm).toBe(0);
  expect(t.power(2).minus(one).norm).toBeGreaterThan(0);
  expect(r.times(r).minus(one).norm).toBe(0);
  expect(r.times(t).times(r).minus(t.adjoint()).norm).toBe(0);
  expect(t.entry(0b01000, 0b10000).re).toBe(1);
  expect(t.entry(0b10000, 0b00001).re).toBe(1);
  expect(r.entry(0b00011, 0b11000).re).toBe(1);
  // Mirror through site 0.
  expect(reflection(5, 2, 0).entry(0b10000, 0b10000).re).toBe(1);
  expect(reflection(5, 2, 0).entry(0b00001, 0b01000).re).toBe(1);
});

test("ket permutations with phases", () => {
  const p = ketPermutation([1, 0], [1, { re: 0, im: 1 }]);
  expect(p.entry(1, 0)).toEqual({ re: 1, im: 0 });
  expect(p.entry(0, 1)).toEqual({ re: 0, im: 1 });
});

test("misuse is refused", () => {
  const code = (value: string): object => expect.objectContaining({ code: value });
  expect(() => sitePermutation(2, [0, 0])).toThrow(code("shape"));
  expect(() => sitePermutation(0, [0])).toThrow(code("option"));
  expect(() =>
    sitePermutation(
      2,
      Array.from({ length: 40 }, (_, k) => k),
    ),
  ).toThrow(code("option"));
  expect(() => translation(0, 2)).toThrow(code("option"));
  expect(() => reflection(2.5, 2)).toThrow(code("option"));
});
