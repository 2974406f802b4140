import fc from "fast-check";
import { Matrix } from "ml-matrix";
import { describe, expect, test } from "vitest";
import { GoodBasisError } from "../../src/errors.js";
import { Operator } from "../../src/operator/operator.js";
import { distance, filled, naiveAdjoint, naiveKron, naiveOf, naiveProduct, naiveSum, sparse } from "./naive.js";

const SEED = { seed: 91, numRuns: 60 };

function codeOf(action: () => unknown): string {
  try {
    action();
  } catch (error) {
    if (error instanceof GoodBasisError) return error.code;
    throw error;
  }
  return "nothing thrown";
}

describe("algebra against the obvious dense arithmetic", () => {
  const sizes = fc.integer({ min: 1, max: 7 });
  const pair = sizes.chain((n) => fc.tuple(sparse(n), sparse(n)));

  test("sums, products, commutators, adjoints, Kronecker products", () => {
    fc.assert(
      fc.property(pair, ([a, b]) => {
        const [x, y] = [naiveOf(a), naiveOf(b)];
        const [xy, yx] = [naiveProduct(x, y), naiveProduct(y, x)];
        expect(distance(naiveOf(a.plus(b)), naiveSum(x, y))).toBe(0);
        expect(distance(naiveOf(a.minus(b)), naiveSum(x, y, -1))).toBe(0);
        expect(distance(naiveOf(a.times(b)), xy)).toBeLessThan(1e-14);
        expect(distance(naiveOf(a.commutator(b)), naiveSum(xy, yx, -1))).toBeLessThan(1e-14);
        expect(distance(naiveOf(a.anticommutator(b)), naiveSum(xy, yx))).toBeLessThan(1e-14);
        expect(distance(naiveOf(a.adjoint()), naiveAdjoint(x))).toBe(0);
        expect(distance(naiveOf(a.kron(b)), naiveKron(x, y))).toBeLessThan(1e-15);
        const unit = naiveKron([[{ re: 0.3, im: -0.4 }]], x);
        expect(distance(naiveOf(a.scale({ re: 0.3, im: -0.4 })), unit)).toBeLessThan(1e-15);
        expect(distance(naiveOf(a.power(3)), naiveProduct(naiveProduct(x, x), x))).toBeLessThan(1e-13);
      }),
      SEED,
    );
  });

  test("columns ascend strictly in every result", () => {
    fc.assert(
      fc.property(pair, ([a, b]) => {
        for (const { csr } of [a.plus(b), a.times(b), a.commutator(b), a.kron(b), a.adjoint()]) {
          for (let row = 0; row < csr.rows; row++) {
            const columns = [...csr.col.slice(csr.ptr[row], csr.ptr[row + 1])];
            expect(columns).toEqual([...new Set(columns)].sort((p, q) => p - q));
          }
        }
      }),
      SEED,
    );
  });

  test("the dense kernel, across its blocks", () => {
    for (const [left, right] of [
      [false, false],
      [false, true],
      [true, false],
      [true, true],
    ] as const) {
      const a = filled(70, 11, left);
      const b = filled(70, 12, right);
      const c = a.times(b);
      expect(a.storage).toBe("dense");
      expect(distance(naiveOf(c), naiveProduct(naiveOf(a), naiveOf(b)))).toBeLessThan(1e-13);
      expect(c.error).toBeLessThan(Math.SQRT2 * 75 * 2 ** -53 * a.norm * b.norm);
      expect(c.error).toBeGreaterThan(1e-15);
    }
  });

  test("restriction conjugates the left vectors", () => {
    fc.assert(
      fc.property(
        sizes.chain((n) => fc.tuple(sparse(n), sparse(n))),
        ([a, frame]) => {
          const f = naiveOf(frame);
          const conjugated = f.map((row) => row.map(({ re, im }) => ({ re, im: -im })));
          const truth = naiveProduct(naiveProduct(conjugated, naiveOf(a)), naiveAdjoint(conjugated));
          expect(distance(naiveOf(a.restrict(frame.csr)), truth)).toBeLessThan(1e-13);
        },
      ),
      SEED,
    );
    const y = Operator.from({
      re: [
        [0, 0],
        [0, 0],
      ],
      im: [
        [0, -1],
        [1, 0],
      ],
    });
    const up = { rows: 1, cols: 2, ptr: Int32Array.of(0, 2), col: Int32Array.of(0, 1) };
    const eigenvector = { ...up, re: Float64Array.of(Math.SQRT1_2, 0), im: Float64Array.of(0, Math.SQRT1_2) };
    expect(y.restrict(eigenvector).entry(0, 0).re).toBeCloseTo(1, 14);
  });

  test("a frame of kets selects entries, in its order, with their radii", () => {
    const a = Operator.from(
      [
        [1, 2, 3],
        [4, 5, 6],
        [7, 8, 9],
      ],
      { uncertainty: { relative: 0.01 } },
    );
    const frame = Operator.permutation([2, 0, 1]).csr;
    const picked = a.restrict(frame);
    const order = [1, 2, 0];
    for (const [i, p] of order.entries()) {
      for (const [j, q] of order.entries()) expect(picked.entry(i, j)).toEqual(a.entry(p, q));
    }
    expect(picked.radius?.[0]).toBeCloseTo(0.05, 12);
    const rectangular = {
      ...frame,
      rows: 2,
      ptr: Int32Array.of(0, 1, 2),
      col: Int32Array.of(2, 0),
      re: Float64Array.of(1, 1),
    };
    expect(a.restrict(rectangular).toMatrix().to2DArray()).toEqual([
      [9, 7],
      [3, 1],
    ]);
  });
});

describe("bounds", () => {
  test("the norm bounds the true one and is not far above √(‖A‖₁‖A‖∞)", () => {
    const a = Operator.from([
      [3, 4],
      [0, 5],
    ]);
    expect(a.norm).toBeGreaterThanOrEqual(Math.sqrt(45));
    expect(a.norm).toBeLessThan(Math.sqrt(9 * 7) + 1e-12);
    expect(a.frobenius).toBeCloseTo(Math.sqrt(50), 14);
    expect(a.rowEntries).toBe(2);
    expect(a.error).toBeGreaterThanOrEqual(2 ** -53 * Math.sqrt(45));
    expect(a.error).toBeLessThan(2 ** -53 * 8);
  });

  test("huge and tiny entries neither overflow nor vanish", () => {
    expect(Operator.diagonal([1e200, 1e200]).frobenius / 1e200).toBeCloseTo(Math.SQRT2, 14);
    expect(Operator.diagonal([1e-200, 1e-200]).frobenius / 1e-200).toBeCloseTo(Math.SQRT2, 14);
    const tiny = Operator.from({ re: [[3e-200]], im: [[4e-200]] });
    expect(tiny.norm / 5e-200).toBeCloseTo(1, 13);
    expect(codeOf(() => Operator.diagonal([1e200, 1]).times(Operator.diagonal([1e200, 1])))).toBe("not-finite");
  });

  test("stated uncertainties", () => {
    const a = Operator.from(
      [
        [2, 0],
        [0, -1],
      ],
      { uncertainty: { relative: 0.1, absolute: 1 } },
    );
    expect([...(a.radius ?? [])].map((r) => Number(r.toFixed(12)))).toEqual([1.2, 1.1]);
    expect(a.error).toBeGreaterThanOrEqual(1.2);
    expect(Operator.from(a, { uncertainty: "exact" }).error).toBe(0);
    expect(codeOf(() => Operator.from([[1]], { uncertainty: { relative: -1 } }))).toBe("option");
  });
});

describe("making and reading", () => {
  test("an operator passes through, and arrays are copied", () => {
    const rows = [
      [1, 2],
      [2, 1],
    ];
    const a = Operator.from(rows);
    expect(Operator.from(a)).toBe(a);
    rows[0] = [9, 9];
    expect(a.entry(0, 0)).toEqual({ re: 1, im: 0 });
    const values = Float64Array.of(1, 2, 3, 4);
    const b = Operator.from(values);
    values[0] = 9;
    expect(b.entry(0, 0).re).toBe(1);
  });

  test("identity, zero, sum", () => {
    const one = Operator.identity(3);
    expect(Operator.sum(one, one, one).entry(1, 1).re).toBe(3);
    expect(Operator.zero(2).csr.col.length).toBe(0);
    expect(Operator.zero(2).norm).toBe(0);
    expect(one.power(0).entry(2, 2).re).toBe(1);
    expect(codeOf(() => Operator.sum())).toBe("shape");
    expect(codeOf(() => Operator.identity(0))).toBe("shape");
  });

  test("misuse is refused with its code", () => {
    const a = Operator.identity(2);
    const b = Operator.identity(3);
    for (const verb of ["plus", "minus", "times", "commutator", "anticommutator"] as const) {
      expect(codeOf(() => a[verb](b))).toBe("shape");
    }
    expect(codeOf(() => a.power(-1))).toBe("option");
    expect(codeOf(() => a.power(1.5))).toBe("option");
    expect(codeOf(() => a.scale(Number.NaN))).toBe("not-finite");
    expect(codeOf(() => a.entry(0, 2))).toBe("shape");
    expect(codeOf(() => a.restrict(b.csr))).toBe("shape");
    expect(codeOf(() => a.scale({ re: 0, im: 1 }).toMatrix())).toBe("option");
  });

  test("to and from ml-matrix", () => {
    const m = new Matrix([
      [1, 2],
      [3, 4],
    ]);
    expect(Operator.from(m).toMatrix().to2DArray()).toEqual(m.to2DArray());
    expect(Operator.from(m).dense().re).toEqual(Float64Array.of(1, 2, 3, 4));
  });

  test("the hash sees values, places and radii, and nothing else", () => {
    const a = Operator.from([
      [1, 0.5],
      [0.5, 2],
    ]);
    const same = Operator.fromTriplets(2, [
      [1, 1, 2],
      [0, 0, 1],
      [0, 1, 0.5],
      [1, 0, 0.5],
    ]);
    expect(same.hash).toBe(a.hash);
    expect(a.hash).toMatch(/^[0-9a-f]{64}$/);
    const others = [
      Operator.from([
        [1, 0.5],
        [0.5, 2 + 2 ** -51],
      ]),
      Operator.from(
        [
          [1, 0.5],
          [0.5, 2],
        ],
        { uncertainty: "exact" },
      ),
      Operator.from(
        [
          [1, 0.5],
          [0.5, 2],
        ],
        { uncertainty: { absolute: 1e-9 } },
      ),
      Operator.from([
        [1, 0],
        [0.5, 2],
      ]),
      Operator.from({
        re: [
          [1, 0.5],
          [0.5, 2],
        ],
        im: [
          [0, 1],
          [-1, 0],
        ],
      }),
    ];
    expect(new Set([a.hash, ...others.map((o) => o.hash)]).size).toBe(6);
    const signed = Operator.from({ re: [[0]], im: [[1]] }).adjoint();
    expect(signed.hash).toBe(Operator.from({ re: [[-0]], im: [[-1]] }).hash);
  });
});
