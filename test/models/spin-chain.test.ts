import { describe, expect, test } from "vitest";
import { spinChain } from "../../src/models/spin-chain.js";
import { Operator } from "../../src/operator/operator.js";

describe.each([
  [3, 0.5],
  [2, 1],
  [3, 1.5],
])("%d sites of spin %d", (sites, j) => {
  const chain = spinChain(sites, j);

  test("bond operators are products of site operators", () => {
    for (const [i, k] of [
      [0, 1],
      [sites - 1, 0],
    ] as const) {
      const zz = chain.szsz(i, k).minus(chain.sz(i).times(chain.sz(k)));
      expect(zz.norm).toBe(0);
      const flips = chain
        .plus(i)
        .times(chain.minus(k))
        .plus(chain.minus(i).times(chain.plus(k)))
        .scale(0.5);
      for (const other of [
        flips,
        chain
          .sx(i)
          .times(chain.sx(k))
          .plus(chain.sy(i).times(chain.sy(k))),
      ]) {
        const difference = chain.exchange(i, k).minus(other);
        expect(difference.norm).toBeLessThanOrEqual(difference.error + 1e-300);
        expect(difference.error).toBeLessThan(1e-13);
      }
      expect(chain.exchange(i, k).isHermitian).toBe(true);
    }
  });

  test("total Sz", () => {
    const sum = Operator.sum(...Array.from({ length: sites }, (_, s) => chain.sz(s)));
    expect(chain.totalSz.minus(sum).norm).toBe(0);
    expect(chain.totalSz.isExact && chain.totalSz.isDiagonal).toBe(true);
    expect(chain.totalSz.commutator(chain.exchange(0, 1)).norm).toBe(0);
  });

  test("kets", () => {
    expect(chain.kets()).toHaveLength(chain.n);
    expect(chain.kets()[0]).toBe(j === 0.5 ? "uuu" : new Array(sites).fill(j === 1 ? "1" : "3/2").join(","));
  });
});

test("spin-1/2 bonds are exact and sparse, also for many sites", () => {
  const ring = spinChain(12);
  const bonds = Array.from({ length: 12 }, (_, s) => [s, (s + 1) % 12] as const);
  const heisenberg = Operator.sum(...bonds.flatMap(([i, k]) => [ring.szsz(i, k), ring.exchange(i, k)]));
  expect(ring.n).toBe(4096);
  expect(heisenberg.isExact).toBe(true);
  expect(heisenberg.rowEntries).toBeLessThanOrEqual(13);
  expect(heisenberg.entry(0, 0).re).toBe(3);
  expect(heisenberg.commutator(ring.totalSz).csr.col.length).toBe(0);
});

test("misuse is refused", () => {
  const code = (value: string): object => expect.objectContaining({ code: value });
  expect(() => spinChain(0)).toThrow(code("option"));
  expect(() => spinChain(3, 0.25)).toThrow(code("option"));
  expect(() => spinChain(40)).toThrow(code("option"));
  expect(() => spinChain(3).sz(3)).toThrow(code("shape"));
  expect(() => spinChain(3).szsz(1, 1)).toThrow(code("shape"));
  expect(() => spinChain(3).exchange(-1, 1)).toThrow(code("shape"));
});
