import { expect, test } from "vitest";
import { hopping } from "../../src/models/lattice.js";

test("hopping is Hermitian, with complex amplitudes and doubled bonds", () => {
  const chain = hopping(
    3,
    [
      [0, 1],
      [1, 2],
    ],
    -1,
  );
  expect(chain.toMatrix().to2DArray()).toEqual([
    [0, -1, 0],
    [-1, 0, -1],
    [0, -1, 0],
  ]);
  expect(chain.isExact).toBe(true);
  const flux = hopping(
    3,
    [
      [0, 1],
      [1, 2],
      [2, 0],
    ],
    [{ re: 0.6, im: 0.8 }, 1, 2],
  );
  expect(flux.entry(0, 1)).toEqual({ re: 0.6, im: 0.8 });
  expect(flux.entry(1, 0)).toEqual({ re: 0.6, im: -0.8 });
  expect(flux.isHermitian).toBe(true);
  expect(flux.error).toBeGreaterThanOrEqual(2 ** -53);
  const twice = hopping(
    2,
    [
      [0, 1],
      [0, 1],
    ],
    0.1,
  );
  expect(twice.entry(0, 1).re).toBe(0.2);
  expect(twice.error).toBeGreaterThanOrEqual(0.2 * 2 ** -53);
  expect(hopping(2, []).csr.col.length).toBe(0);
});

test("misuse is refused", () => {
  const code = (value: string): object => expect.objectContaining({ code: value });
  expect(() => hopping(2, [[0, 2]])).toThrow(code("shape"));
  expect(() => hopping(2, [[1, 1]])).toThrow(code("shape"));
  expect(() => hopping(0, [])).toThrow(code("shape"));
  expect(() => hopping(2, [[0, 1]], [1, 2])).toThrow(code("shape"));
  expect(() => hopping(2, [[0, 1]], Number.NaN)).toThrow(code("not-finite"));
});
