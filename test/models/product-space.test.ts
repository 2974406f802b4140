import { expect, test } from "vitest";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { productSpace } from "../../src/models/product-space.js";
import { Operator } from "../../src/operator/operator.js";

test("embedding is the Kronecker product with identities, radii included", () => {
  const space = productSpace([2, 3, 2]);
  const one = Operator.identity;
  const l = angularMomentum(1);
  const s = angularMomentum(0.5);
  expect(space.n).toBe(12);
  for (const [a, at, expected] of [
    [s.y, 0, s.y.kron(one(6))],
    [l.x, 1, one(2).kron(l.x).kron(one(2))],
    [s.plus, 2, one(6).kron(s.plus)],
    [
      Operator.from([
        [0.1, 2],
        [0, 0.3],
      ]),
      2,
      one(6).kron(
        Operator.from([
          [0.1, 2],
          [0, 0.3],
        ]),
      ),
    ],
  ] as const) {
    const embedded = space.embed(a, at);
    expect(embedded.minus(expected).norm).toBe(0);
    expect(embedded.csr.col).toEqual(expected.csr.col);
    expect(embedded.isExact).toBe(a.isExact);
    expect(embedded.radius === undefined).toBe(a.radius === undefined);
    expect(embedded.error).toBeGreaterThanOrEqual(expected.error * (1 - 1e-12));
    expect(embedded.error).toBeLessThanOrEqual(expected.error * (1 + 1e-12));
  }
});

test("kets are named in the order of the index, first factor slowest", () => {
  const space = productSpace([2, 2]);
  expect(
    space.kets([
      ["a", "b"],
      ["x", "y"],
    ]),
  ).toEqual(["a,x", "a,y", "b,x", "b,y"]);
  expect(
    space.kets(
      [
        ["a", "b"],
        ["x", "y"],
      ],
      " ",
    ),
  ).toEqual(["a x", "a y", "b x", "b y"]);
  expect(productSpace([2]).kets([["a", "b"]])).toEqual(["a", "b"]);
});

test("misuse is refused", () => {
  const code = (value: string): object => expect.objectContaining({ code: value });
  const space = productSpace([2, 3]);
  expect(() => productSpace([])).toThrow(code("option"));
  expect(() => productSpace([2, 0])).toThrow(code("option"));
  expect(() => productSpace([2 ** 16, 2 ** 16])).toThrow(code("option"));
  expect(() => space.embed(Operator.identity(3), 0)).toThrow(code("shape"));
  expect(() => space.embed(Operator.identity(3), 2)).toThrow(code("shape"));
  expect(() => space.kets([["a", "b"]])).toThrow(code("shape"));
  expect(() =>
    space.kets([
      ["a", "b"],
      ["x", "y"],
    ]),
  ).toThrow(code("shape"));
});
