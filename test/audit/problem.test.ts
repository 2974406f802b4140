import { Matrix } from "ml-matrix";
import { describe, expect, it } from "vitest";
import { type Problem, prepareProblem } from "../../src/audit/problem.js";
import { GoodBasisError } from "../../src/errors.js";
import { Operator } from "../../src/operator/operator.js";
import { naiveOf } from "../operator/naive.js";

const one = [
  [1, 0],
  [0, 2],
];
const good: Problem = { h0: one, v: one };

/** The refusal of a problem; anything may be in it, as plain JavaScript allows. */
function refusal(change: Readonly<Record<string, unknown>>): GoodBasisError {
  try {
    prepareProblem({ ...good, ...change } as Problem);
  } catch (error) {
    if (error instanceof GoodBasisError) return error;
    throw error;
  }
  throw new Error("not refused");
}

describe("prepareProblem reads", () => {
  it("every form, with the names and kinds of all operators", () => {
    const problem = prepareProblem({
      h0: { diagonal: [0, 0, 1] },
      v: {
        zeeman: [
          [1, 0, 0],
          [0, -1, 0],
          [0, 0, 0],
        ],
        stark: new Matrix([
          [0, 1, 0],
          [1, 0, 0],
          [0, 0, 0],
        ]),
      },
      candidates: {
        T: { permutation: [1, 0, 2] },
        R: { operator: { permutation: [1, 2, 0] }, label: { root: 3 } },
        m: {
          operator: { diagonal: [0.5, -0.5, 0.5] },
          label: "m",
          ladder: [
            [0, 1, 0],
            [0, 0, 0],
            [0, 0, 0],
          ],
        },
        N: { diagonal: [0, 0, 2], imaginary: [0, 1, 0] },
      },
      kets: ["a", "b", "c"],
      unit: "cm⁻¹",
    });
    expect(problem.n).toBe(3);
    expect(problem.unit).toBe("cm⁻¹");
    expect([0, 1, 2].map(problem.ket)).toEqual(["a", "b", "c"]);
    expect(problem.perturbations.map(({ name }) => name)).toEqual(["zeeman", "stark"]);
    expect(problem.candidates.map(({ name, kind, label }) => [name, kind, label])).toEqual([
      ["T", "hermitian", undefined],
      ["R", "unitary", { root: 3 }],
      ["m", "hermitian", "m"],
      ["N", "normal", undefined],
    ]);
    for (const { operator, adjoint, kind } of problem.candidates) {
      expect(naiveOf(adjoint)).toEqual(naiveOf(operator.adjoint()));
      expect(adjoint === operator).toBe(kind === "hermitian");
    }
    expect(problem.candidates.map(({ ladder }) => ladder?.entry(0, 1).re)).toEqual([
      undefined,
      undefined,
      1,
      undefined,
    ]);
  });

  it("the smallest problem: one ket, no candidate, no names", () => {
    const problem = prepareProblem({ h0: [[0]], v: [[0]] });
    expect(problem).toMatchObject({ n: 1, candidates: [], kets: undefined, unit: "" });
    expect(problem.ket(0)).toBe("0");
    expect(problem.perturbations.map(({ name }) => name)).toEqual(["V"]);
  });

  it("symmetrises rounding-sized asymmetry, with the asymmetry in the radii", () => {
    const h0 = [
      [1, 0.5 + 2 ** -53],
      [0.5, 1],
    ];
    const problem = prepareProblem({ h0, v: h0, candidates: { A: h0 } });
    for (const { operator } of [{ operator: problem.h0 }, ...problem.perturbations, ...problem.candidates]) {
      expect(operator.entry(0, 1)).toEqual(operator.entry(1, 0));
      expect(operator.radius?.[1]).toBeGreaterThanOrEqual(2 ** -54);
    }
  });

  it("copies the kets", () => {
    const kets = ["up", "down"];
    const problem = prepareProblem({ ...good, kets });
    kets[0] = "changed";
    expect(problem.ket(0)).toBe("up");
    expect(problem.kets).toEqual(["up", "down"]);
  });
});

describe("prepareProblem refuses", () => {
  it("wrong shapes, naming the operator, what was expected and what came", () => {
    const cases: [Record<string, unknown>, string, Record<string, unknown>][] = [
      [{ h0: [[1, 2]] }, "H0", {}],
      [{ h0: [] }, "H0", {}],
      [{ h0: undefined }, "H0", {}],
      [{ h0: [[1, 0], [0]] }, "H0", { row: 1 }],
      [{ v: [[1]] }, "V", { expected: 2, received: 1 }],
      [{ v: { zeeman: one, stark: [[1]] } }, "stark", { expected: 2, received: 1 }],
      [{ v: { zeeman: one, stark: null } }, "stark", {}],
      [{ candidates: { A: [[1]] } }, "A", { expected: 2, received: 1 }],
      [{ candidates: { A: undefined } }, "A", {}],
      [{ candidates: { A: null } }, "A", {}],
      [{ candidates: { A: 5 } }, "A", {}],
      [{ candidates: { A: {} } }, "A", {}],
      [{ candidates: { A: { operator: one, ladder: [[1]] } } }, "A.ladder", { expected: 2, received: 1 }],
      [{ candidates: { A: { operator: one, ladder: null } } }, "A.ladder", {}],
    ];
    for (const [change, operator, details] of cases) {
      const error = refusal(change);
      expect(error.code, error.message).toBe("shape");
      expect(error.details).toMatchObject({ ...details, operator });
      expect(error.message.startsWith(operator)).toBe(true);
    }
  });

  it("entries that are not finite, with their place", () => {
    for (const bad of [Number.NaN, Number.POSITIVE_INFINITY, Number.NEGATIVE_INFINITY]) {
      const broken = [
        [1, 0],
        [bad, 2],
      ];
      for (const [change, operator] of [
        [{ h0: broken }, "H0"],
        [{ v: broken }, "V"],
        [{ v: { stark: broken } }, "stark"],
        [{ candidates: { A: { operator: broken } } }, "A"],
        [{ candidates: { A: { operator: one, ladder: broken } } }, "A.ladder"],
      ] as const) {
        const error = refusal(change);
        expect(error.code).toBe("not-finite");
        expect(error.details).toMatchObject({ operator, row: 1, col: 0, value: bad });
        expect(error.message).toContain("(1, 0)");
      }
    }
  });

  it("H0 or V that is not Hermitian, with the size and the worst element", () => {
    const skew = {
      re: [
        [1, 3, 0],
        [2, 1, 0],
        [0, 0, 1],
      ],
      im: [
        [0, 0, 0],
        [0, 0, 0.5],
        [0, 0.5, 0],
      ],
    };
    for (const [change, operator] of [
      [{ h0: skew, v: { diagonal: [0, 0, 0] } }, "H0"],
      [{ h0: { diagonal: [0, 0, 0] }, v: skew }, "V"],
      [{ h0: { diagonal: [0, 0, 0] }, v: { stark: skew } }, "stark"],
    ] as const) {
      const error = refusal(change);
      expect(error.code).toBe("not-hermitian");
      expect(error.details).toMatchObject({ operator, difference: 1 });
      expect([error.details["row"], error.details["column"]].sort()).toEqual([0, 1]);
      expect(error.details["size"]).toBeCloseTo(2, 14);
      expect(error.message).toContain(`${operator} is not Hermitian`);
      expect(error.message).toContain(`(A + A†)/2`);
    }
    expect(refusal({ h0: { re: [[0]], im: [[1]] }, v: [[0]] }).code).toBe("not-hermitian");
  });

  it("a candidate that is not normal, with the size of its failure", () => {
    const error = refusal({
      candidates: {
        "J+": [
          [0, 3],
          [0, 0],
        ],
      },
    });
    expect(error.code).toBe("not-normal");
    expect(error.details).toMatchObject({ operator: "J+" });
    expect(error.details["size"]).toBeCloseTo(9 * Math.SQRT2, 13);
    expect(error.message).toContain("ladder");
  });

  it("names that are empty or taken", () => {
    const cases: Record<string, unknown>[] = [
      { candidates: { "": one } },
      { candidates: { " \t": one } },
      { candidates: { H0: one } },
      { candidates: { V: one } },
      { v: { stark: one }, candidates: { stark: one } },
      { v: { "": one } },
      { v: { H0: one } },
    ];
    for (const change of cases) expect(refusal(change).code, JSON.stringify(change)).toBe("name");
    expect(prepareProblem({ ...good, v: { stark: one }, candidates: { V: one } }).candidates).toHaveLength(1);
  });

  it("ket lists of another length, or with names that are empty, missing or repeated", () => {
    expect(refusal({ kets: ["a"] })).toMatchObject({ code: "shape", details: { expected: 2, received: 1 } });
    expect(refusal({ kets: ["a", "b", "c"] })).toMatchObject({ code: "shape", details: { expected: 2, received: 3 } });
    for (const kets of [null, "ab", 2, {}])
      expect(refusal({ kets })).toMatchObject({ code: "shape", details: { expected: 2 } });
    expect(refusal({ kets: ["a", ""] })).toMatchObject({ code: "name", details: { ket: 1 } });
    expect(refusal({ kets: ["  ", "b"] })).toMatchObject({ code: "name", details: { ket: 0 } });
    expect(refusal({ kets: ["a", 7] })).toMatchObject({ code: "name", details: { ket: 1 } });
    expect(refusal({ kets: new Array<string>(2) })).toMatchObject({ code: "name", details: { ket: 0 } });
    expect(refusal({ kets: ["a", "a"] })).toMatchObject({ code: "name", details: { name: "a", first: 0, second: 1 } });
  });

  it("no perturbation at all, and unknown label declarations", () => {
    for (const v of [undefined, null, {}, 5, "V"]) expect(refusal({ v }).code, String(v)).toBe("option");
    expect(refusal({ candidates: { A: { operator: one, label: "spin" } } })).toMatchObject({
      code: "option",
      details: { name: "A", label: "spin" },
    });
  });

  it("fields that it would pass over, with the one that was meant", () => {
    const misspelt = refusal({ candidate: { A: one } });
    expect(misspelt).toMatchObject({ code: "option", details: { field: "candidate" } });
    expect(misspelt.message).toBe(
      'the problem has no field "candidate"; did you mean "candidates"? there are h0, v, candidates, kets, unit',
    );
    expect(refusal({ lambda: 1 }).message).toBe(
      'the problem has no field "lambda"; there are h0, v, candidates, kets, unit',
    );
    expect(refusal({ candidates: { A: { operator: one, lable: "j" } } }).message).toMatch(
      /^candidate A has no field "lable"; did you mean "label"\?/,
    );
    expect(refusal({ v: { entries: [[0, 0, 1]], n: 2, entires: [] } })).toMatchObject({ code: "shape" });
    expect(refusal({ h0: { diagonal: [1, 2], imaginry: [1, 0] } }).message).toContain('did you mean "imaginary"?');
  });

  it("perturbations with the name of a field of a matrix, whatever they hold", () => {
    const operator = Operator.from(one);
    for (const name of ["re", "im", "entries", "diagonal", "permutation"]) {
      for (const matrix of [operator, one]) {
        for (const v of [{ [name]: matrix }, { [name]: matrix, zeeman: matrix }]) {
          if (name === "re" && matrix === one && !("zeeman" in v)) continue; // the matrix itself, in either reading
          const error = refusal({ v });
          expect(["name", "shape", "not-finite"], name).toContain(error.code);
          expect(error.message, name).toMatch(/rename it/);
        }
      }
    }
    const both = refusal({ v: { re: one, im: one } });
    expect(both.code).toBe("not-hermitian");
    expect(both.message).toContain('v is read as one matrix, as it has the field "re"; if that is a perturbation');
    expect(prepareProblem({ ...good, v: { real: one } }).perturbations[0]?.name).toBe("real");
  });

  it("entries so large that products of operators would overflow", () => {
    for (const size of [2e60, 1e300, -1e300]) {
      const large = [
        [0, 0],
        [0, size],
      ];
      for (const [change, operator] of [
        [{ h0: large }, "H0"],
        [{ v: large }, "V"],
        [{ v: { stark: large } }, "stark"],
      ] as const) {
        const error = refusal(change);
        expect(error).toMatchObject({ code: "not-finite", details: { operator, row: 1, col: 1 } });
        expect(error.message).toMatch(/entry \(1, 1\) of .*, counted from 0, is of size .* above 1e\+60.*larger unit/);
      }
    }
    const uncertain = Operator.from(one, { uncertainty: { absolute: 1e61 } });
    expect(refusal({ v: uncertain }).code).toBe("not-finite");
    expect(refusal({ candidates: { A: { diagonal: [1e151, 0] } } }).code).toBe("not-finite");
    expect(refusal({ candidates: { A: { operator: one, ladder: { diagonal: [1e151, 0] } } } }).code).toBe("not-finite");
    const edge: Problem = { h0: { diagonal: [1e60, 0] }, v: one, candidates: { A: { diagonal: [1e150, 0] } } };
    expect(prepareProblem(edge).n).toBe(2);
  });

  it("a ket that is no text, and says what came", () => {
    expect(refusal({ kets: ["a", 7] }).message).toBe('ket 1 is 7; give every name as text, such as "1"');
    expect(refusal({ kets: ["a", null] }).message).toContain("ket 1 is null");
    expect(refusal({ kets: 7 }).message).toContain("kets is 7");
  });

  it("a failure that is not its own passes through unchanged", () => {
    const trap = new Proxy([[0]], {
      get(target, key, receiver) {
        if (key === "length") throw new RangeError("trapped");
        return Reflect.get(target, key, receiver);
      },
    });
    expect(() => prepareProblem({ h0: trap, v: [[0]] })).toThrow(RangeError);
  });
});
