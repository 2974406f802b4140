import { describe, expect, it } from "vitest";
import { auditCommutators } from "../../src/audit/audit.js";
import { type Problem, prepareProblem } from "../../src/audit/problem.js";
import { findGoodBasis } from "../../src/certify/find.js";
import { recheck } from "../../src/certify/recheck.js";
import { validateBasis } from "../../src/certify/validate.js";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { productSpace } from "../../src/models/product-space.js";
import type { MatrixInput } from "../../src/operator/input.js";
import { Operator } from "../../src/operator/operator.js";

/** The same doubles with the same radii, known no better than that. */
function floating(input: MatrixInput): Operator {
  const operator = Operator.from(input);
  return Operator.fromCsr(operator.csr, operator.isExact ? "exact" : (operator.radius ?? "default"));
}

const [l, s] = [angularMomentum(1), angularMomentum(0.5)];
const space = productSpace([l.n, s.n]);
const both = (a: Operator, b: Operator): Operator => space.embed(a, 0).plus(space.embed(b, 1));
const [jx, jy, jz] = [both(l.x, s.x), both(l.y, s.y), both(l.z, s.z)];
const j2 = Operator.sum(jx.power(2), jy.power(2), jz.power(2));

const problems: Readonly<Record<string, { h0: MatrixInput; v: MatrixInput; A: MatrixInput }>> = {
  builders: { h0: j2.scale("1/3"), v: both(l.z, s.z.scale("sqrt(2)")), A: jz },
  texts: {
    h0: { diagonal: ["1/3", "1/3", "1/3"] },
    v: [
      ["sqrt(2)", "i/3", 0],
      ["-i/3", 0.25, 0],
      [0, 0, "1/7"],
    ],
    A: { n: 3, entries: [[2, 2, Surd.one]] },
  },
  "exact operators and plain numbers": {
    h0: ExactOperator.diagonal([1, 1, "1/2"]),
    v: [
      [0, 0.1, 0],
      [0.1, 0, 0],
      [0, 0, 0.3],
    ],
    A: ExactOperator.permutation([1, 0, 2]),
  },
  "a broken symmetry": {
    h0: ExactOperator.diagonal([1, 1]),
    v: [
      ["sqrt(1/2)", 0],
      [0, "-sqrt(1/2)"],
    ],
    A: { permutation: [1, 0], phases: ["i", "-i"] },
  },
};

describe("exact input passes through the main job with the results of its doubles", () => {
  for (const [name, { h0, v, A }] of Object.entries(problems)) {
    const exact: Problem = { h0, v, candidates: { A } };
    const plain: Problem = { h0: floating(h0), v: floating(v), candidates: { A: floating(A) } };

    it(`${name}: the same audit, outcome and certificate`, () => {
      expect(JSON.stringify(auditCommutators(exact))).toBe(JSON.stringify(auditCommutators(plain)));
      const [a, b] = [findGoodBasis(exact), findGoodBasis(plain)];
      expect(a.verdict).toBe(b.verdict);
      expect(a.certificate()).toEqual(b.certificate());
      expect(recheck(a.certificate(), exact).ok).toBe(recheck(b.certificate(), plain).ok);
      expect(recheck(a.certificate(), plain).ok).toBe(true);
    });

    it(`${name}: the same validation`, () => {
      const basis = Operator.identity(Operator.from(h0).n);
      expect(JSON.stringify(validateBasis(exact, basis))).toBe(JSON.stringify(validateBasis(plain, basis)));
    });

    it(`${name}: what is exact stays known, after the checks`, () => {
      const prepared = prepareProblem(exact);
      for (const [input, operator] of [
        [h0, prepared.h0],
        [v, prepared.perturbations[0]?.operator],
        [A, prepared.candidates[0]?.operator],
        [A, prepared.candidates[0]?.adjoint.adjoint()],
      ] as const) {
        const own = Operator.from(input).exact;
        expect(operator?.isKnownExactly).toBe(own !== undefined);
        if (own !== undefined) expect(operator?.exact?.equals(own)).toBe(true);
      }
    });
  }

  it("faults of exact entries name the operator and the place", () => {
    const problem = {
      h0: [
        ["1/2", 0],
        [0, "x"],
      ],
      v: [
        [0, 0],
        [0, 0],
      ],
    };
    expect(() => findGoodBasis(problem)).toThrow(
      expect.objectContaining({
        code: "text",
        message: expect.stringMatching(/^H0: Operator\.from: entry \(1, 1\), counted from 0: the exact number "x"/),
        details: expect.objectContaining({ operator: "H0", row: 1, col: 1 }),
      }),
    );
    const skew = {
      h0: [
        [0, "sqrt(2)"],
        [0, 0],
      ],
      v: [
        [0, 0],
        [0, 0],
      ],
    };
    expect(() => findGoodBasis(skew)).toThrow(expect.objectContaining({ code: "not-hermitian" }));
  });
});
