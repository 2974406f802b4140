import fc from "fast-check";
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { Operator } from "../../src/operator/operator.js";
import { expectWithinRadii } from "../support/exact-operator.js";

const TEXTS = ["0", "1", "-1", "i", "1/3", "sqrt(2/3)", "-sqrt(3)/2", "(1+2i)/sqrt(5)", "sqrt(2)+sqrt(3)", "1/10"];

const matrices = (n: number): fc.Arbitrary<Operator> =>
  fc
    .array(fc.array(fc.constantFrom(...TEXTS), { minLength: n, maxLength: n }), { minLength: n, maxLength: n })
    .map((rows) => Operator.from(rows));

describe("an operator of exact entries", () => {
  it("has correctly rounded doubles, and says what they are", () => {
    const operator = Operator.from([
      ["1/2", "sqrt(2/3)"],
      [1, 0.1],
    ]);
    expect(operator.entry(0, 1).re).toBe(0.816496580927726);
    expect(operator.exact?.entry(0, 1).text()).toBe("sqrt(2/3)");
    expect(operator.exact?.entry(1, 1).equals(0.1)).toBe(true);
    expect(operator.exact?.entry(1, 1).equals("1/10")).toBe(false);
    expect([...(operator.radius ?? [])].map((r) => r > 0)).toEqual([false, true, false, false]);
  });

  it("is read from every form", () => {
    const rows = [
      ["0", "i/3"],
      ["-i/3", "2"],
    ];
    const expected = ExactOperator.from(rows);
    const forms = [
      Operator.from(rows),
      Operator.from(expected),
      Operator.from({
        re: [
          [0, 0],
          [0, "2"],
        ] as const,
        im: [
          [0, "1/3"],
          ["-1/3", 0],
        ] as const,
      }),
      Operator.from({
        n: 2,
        entries: [
          [0, 1, "i/3"],
          [1, 0, 0, "-1/3"],
          [1, 1, 1n],
          [1, 1, Surd.one],
        ],
      }),
      Operator.fromTriplets(2, [
        [0, 1, "i/3"],
        [1, 0, "-i/3"],
        [1, 1, 2],
      ]),
    ];
    for (const form of forms) {
      expect(form.exact?.equals(expected)).toBe(true);
      expect(form.hash).toBe(forms[0]?.hash);
    }
    const diagonal = Operator.diagonal(["1/3", 2, 5n]);
    expect(diagonal.exact?.entry(0, 0).text()).toBe("1/3");
    expect(
      Operator.from({ diagonal: ["1/3"], imaginary: ["sqrt(2)"] })
        .exact?.entry(0, 0)
        .text(),
    ).toBe("1/3+i*sqrt(2)");
    const turn = Operator.permutation([1, 0], ["(1+i)/sqrt(2)", { re: 0, im: 1 }]);
    expect(turn.exact?.entry(1, 0).text()).toBe("(1+i)/sqrt(2)");
    expect(turn.exact?.entry(0, 1).text()).toBe("i");
  });

  it("refuses what is no exact number, with its place", () => {
    const refusals: readonly (readonly [() => unknown, string, RegExp, object])[] = [
      [() => Operator.from([["x"]]), "text", /^Operator\.from: entry \(0, 0\), .*"x" is not known/, { row: 0, col: 0 }],
      [
        () =>
          Operator.from([
            [1, "1/0"],
            [0, 0],
          ]),
        "zero-division",
        /entry \(0, 1\)/,
        { row: 0, col: 1 },
      ],
      [() => Operator.from([["1", 0], ["2"]]), "shape", /row 1 has 1 entries/, { row: 1 }],
      [
        () =>
          Operator.from([
            ["1", Number.NaN],
            [0, 0],
          ]),
        "not-finite",
        /entry \(0, 1\)/,
        { row: 0, col: 1 },
      ],
      [() => Operator.from({ diagonal: ["i"], imaginary: [1] }), "not-real", /entry \(0, 0\)/, { row: 0, col: 0 }],
      [() => Operator.from({ re: [["i"]] }), "not-real", /entry \(0, 0\)/, { row: 0 }],
      [() => Operator.permutation([1, 0], ["1-1", "1"]), "shape", /phase 0 is zero/, { index: 0 }],
      [() => Operator.fromTriplets(2, [[0, 2, "1"]]), "shape", /index 2/, { triplet: 0 }],
      [() => Operator.diagonal(["1e400"]), "not-finite", /beyond the range of doubles/, {}],
      [() => Operator.identity(2).scale("y"), "text", /^scale: the exact number "y"/, { factor: "y" }],
    ];
    for (const [call, code, message, details] of refusals) {
      expect(call).toThrow(expect.objectContaining({ code, message: expect.stringMatching(message) }));
      expect(call).toThrow(expect.objectContaining({ details: expect.objectContaining(details) }));
    }
  });

  it("keeps what it is under the uncertainty exact, and loses it under any other", () => {
    const texts = [["sqrt(2)"]];
    expect(Operator.from(texts, { uncertainty: "exact" }).exact?.entry(0, 0).text()).toBe("sqrt(2)");
    const own = Operator.from(texts);
    expect(Operator.from(own, { uncertainty: "exact" })).toBe(own);
    expect(Operator.from(own, { uncertainty: { relative: 0 } })).toBe(own);
    expect(
      Operator.from([[0.1]], { uncertainty: { absolute: 0 } })
        .exact?.entry(0, 0)
        .equals(0.1),
    ).toBe(true);
    const measured = Operator.from(texts, { uncertainty: { absolute: 1e-3 } });
    expect(measured.exact).toBeUndefined();
    expect(measured.radius?.[0]).toBeGreaterThan(1e-3);
    expect(Operator.from(own, { uncertainty: { relative: 1e-3 } }).exact).toBeUndefined();
  });
});

describe("the exact companion", () => {
  it("is that of the doubles where they are stated to be exact, and nothing otherwise", () => {
    expect(
      Operator.from([[0.1]], { uncertainty: "exact" })
        .exact?.entry(0, 0)
        .equals(0.1),
    ).toBe(true);
    expect(Operator.from([[0.1]]).exact).toBeUndefined();
    expect(Operator.from([[0.1]]).isKnownExactly).toBe(false);
    expect(
      Operator.identity(2).plus(
        Operator.from([
          [1, 0],
          [0, 1],
        ]),
      ).exact,
    ).toBeUndefined();
    expect(Operator.diagonal(["1/3"]).plus(Operator.diagonal([1])).isKnownExactly).toBe(false);
  });

  it("goes through the algebra, its doubles within their radii", () => {
    fc.assert(
      fc.property(matrices(3), matrices(3), fc.constantFrom(...TEXTS), (a, b, z) => {
        const [x, y] = [a.exact, b.exact];
        if (x === undefined || y === undefined) throw new Error("not exact");
        const pairs: readonly (readonly [Operator, ExactOperator])[] = [
          [a, x],
          [a.plus(b), x.plus(y)],
          [a.minus(b), x.minus(y)],
          [a.minus(a), ExactOperator.zero(3)],
          [a.times(b), x.times(y)],
          [a.adjoint(), x.adjoint()],
          [a.kron(b), x.kron(y)],
          [a.power(3), x.power(3)],
          [a.commutator(b), x.commutator(y)],
          [a.anticommutator(b), x.anticommutator(y)],
          [a.hermitianPart(), x.plus(x.adjoint()).scale("1/2")],
          [a.scale(z), x.scale(z)],
          [a.scale(Surd.from(z)), x.scale(z)],
          [a.scale(0.1), x.scale(0.1)],
          [a.scale({ re: 0, im: 0.5 }), x.scale("i/2")],
          [Operator.sum(a, b, Operator.identity(3)), x.plus(y).plus(ExactOperator.identity(3))],
        ];
        for (const [operator, expected] of pairs) {
          expect(operator.exact?.equals(expected)).toBe(true);
          expectWithinRadii(operator);
        }
      }),
      { seed: 4101, numRuns: 60 },
    );
  });

  it("counts the rounding of a factor that is no double", () => {
    const numbers = Operator.diagonal(
      Float64Array.from({ length: 200 }, (_, k) => k + 1),
      { uncertainty: "exact" },
    );
    for (const factor of ["1/3", "1/7", "sqrt(2)", "-sqrt(2/3)", "i/9", "(1+2i)/sqrt(5)"]) {
      expectWithinRadii(numbers.scale(factor));
    }
    const plain = Operator.from([[0.3]]).scale("1/3");
    expect(plain.exact).toBeUndefined();
    expect(plain.radius?.[0]).toBeGreaterThan(0.1 * 2 ** -52);
  });

  it("is restricted with the operator to chosen kets, in their order", () => {
    const a = Operator.from([
      ["1/3", "sqrt(2)", 0],
      ["sqrt(2)", 1, "i"],
      [0, "-i", 2],
    ]);
    const frame = Operator.permutation([2, 0, 1]).csr;
    const chosen = a.restrict(frame);
    const at = (k: number): number => frame.col[k] as number;
    for (const [row, col] of [
      [0, 1],
      [1, 2],
      [2, 2],
    ] as const) {
      expect(chosen.exact?.entry(row, col).equals(a.exact?.entry(at(row), at(col)) ?? 9)).toBe(true);
    }
    expectWithinRadii(chosen);
    const rounded = Operator.from([
      [0.6, 0.8, 0],
      [0, 0, 1],
      [0.8, -0.6, 0],
    ]).csr;
    expect(a.restrict(rounded).exact).toBeUndefined();
  });

  it("decides what doubles cannot", () => {
    const x = Operator.from([
      [0, "sqrt(1/2)"],
      ["sqrt(1/2)", 0],
    ]);
    const square = x.power(2).minus(Operator.identity(2).scale("1/2"));
    expect(square.isExact).toBe(false);
    expect(square.exact?.isZero).toBe(true);
    const planted = x.plus(Operator.fromTriplets(2, [[0, 0, "1e-30"]]));
    expect([...(planted.commutator(x).exact?.elements() ?? [])].map(({ value }) => value.text({})).length).toBe(2);
  });

  it("of a long sum does not outgrow the stack", () => {
    const term = Operator.from([["sqrt(2)"]]);
    let sum = term;
    for (let k = 1; k < 50_000; k++) sum = sum.plus(term);
    expect(sum.exact?.entry(0, 0).text()).toBe("50000*sqrt(2)");
  });

  it("leaves the hash of floating content alone", () => {
    const rows = [
      [1, 0.5],
      [0.5, 0],
    ];
    const before = Operator.from(rows, { uncertainty: "exact" }).hash;
    const asked = Operator.from(rows, { uncertainty: "exact" });
    expect(asked.exact?.count).toBe(3);
    expect(asked.hash).toBe(before);
    expect(
      Operator.from([
        ["1", "1/2"],
        ["1/2", "0"],
      ]).hash,
    ).toBe(before);
  });
});
