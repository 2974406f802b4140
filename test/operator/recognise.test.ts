import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { Surd } from "../../src/exact/surd.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { Operator } from "../../src/operator/operator.js";
import { recogniseOperator } from "../../src/operator/recognise.js";

describe("a proposal of exact entries", () => {
  it("says which entries it changed and by how much, and is no proof", () => {
    const found = recogniseOperator([
      [0.5, 0.816496580927726, 1e-17],
      [0.816496580927726, 0.3333333333333333, 0],
      [1e-17, 0, 0.1],
    ]);
    if (found.kind !== "proposal") throw new Error(found.kind);
    const { operator, changes, distance } = found;
    expect(operator.exact?.entry(0, 1).text()).toBe("sqrt(2/3)");
    expect(operator.exact?.entry(2, 2).text()).toBe("1/10");
    expect(operator.exact?.entry(0, 2).isZero).toBe(true);
    const places = changes.map(({ row, col, withinRadius }) => [row, col, withinRadius]);
    expect(places).toEqual([
      [0, 1, true],
      [0, 2, false],
      [1, 0, true],
      [1, 1, true],
      [2, 0, false],
      [2, 2, true],
    ]);
    expect(distance).toBeGreaterThanOrEqual(Math.max(...changes.map((change) => change.distance)));
    expect(distance).toBeLessThan(1e-15);
    expect(changes[1]?.value.isZero).toBe(true);
    expect(changes[1]?.distance).toBeGreaterThanOrEqual(1e-17);
    expect(changes[1]?.distance).toBeLessThan(1.001e-17);
  });

  it("is none where an entry is no such number, and names it", () => {
    const found = recogniseOperator([[Math.PI]]);
    expect(found).toEqual({ kind: "none", entries: [{ row: 0, col: 0, re: Math.PI, im: 0 }] });
    expect(recogniseOperator([[Math.SQRT2]], { maxSquare: 0 }).kind).toBe("none");
    expect(() => recogniseOperator([[1]], { tolerance: -1 })).toThrow(expect.objectContaining({ code: "option" }));
  });

  it("finds what the builders know, from their doubles alone", () => {
    for (const j of [0.5, 1, 1.5, 3]) {
      for (const operator of Object.values(angularMomentum(j)).filter((part) => part instanceof Operator)) {
        const found = recogniseOperator(Operator.fromCsr(operator.csr));
        if (found.kind !== "proposal") throw new Error(found.kind);
        expect(operator.exact !== undefined && found.operator.exact?.equals(operator.exact)).toBe(true);
        for (const change of found.changes) expect(change.withinRadius).toBe(true);
      }
    }
  });

  it("bounds every change from above, tightly", () => {
    fc.assert(
      fc.property(fc.integer({ min: 1, max: 400 }), fc.integer({ min: 1, max: 30 }), (p, q) => {
        const exact = Surd.sqrt(Surd.ratio(BigInt(p), BigInt(q))) ?? Surd.zero;
        const given = Operator.diagonal([exact.toNumber(), 1]);
        const found = recogniseOperator(given);
        if (found.kind !== "proposal") throw new Error(found.kind);
        const off = exact.minus(exact.toNumber());
        const size = off.sign() < 0 ? off.negate() : off;
        expect(found.operator.exact?.entry(0, 0).equals(exact)).toBe(true);
        expect(size.compare(found.distance)).toBeLessThanOrEqual(0);
        expect(size.times("1.000001").plus("1e-300").compare(found.distance)).toBeGreaterThanOrEqual(0);
      }),
      { seed: 4102, numRuns: 200 },
    );
  });
});
