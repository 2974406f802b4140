import fc from "fast-check";
import { describe, expect, it } from "vitest";
import {
  angularMomentum,
  type BasisState,
  findGoodBasis,
  Operator,
  type Problem,
  type Repair,
  validateBasis,
} from "../../src/index.js";
import { generator } from "../numerics/eigen/matrices.js";
import { problemOf } from "../support/check-bounds.js";
import { exactProblem } from "../support/exact-problem.js";
import {
  adjoint,
  at,
  columns as columnsOf,
  double,
  type FixedMatrix,
  fixed,
  frobenius,
  identity,
  matrix,
  minus,
  modulus,
  norm2,
  product,
  times,
} from "../support/fixed.js";
import { Claims, fixedOperator } from "../support/oracle.js";
import { plans } from "../support/plans.js";

interface Columns {
  readonly re: number[][];
  readonly im: number[][];
}

/** State vectors as columns over n kets. */
function columnsFrom(states: readonly BasisState[], n: number): Columns {
  const out: Columns = {
    re: Array.from({ length: n }, () => new Array<number>(states.length).fill(0)),
    im: Array.from({ length: n }, () => new Array<number>(states.length).fill(0)),
  };
  states.forEach(({ vector }, s) => {
    vector.kets.forEach((ket, k) => {
      (out.re[ket] as number[])[s] = vector.re[k] ?? 0;
      (out.im[ket] as number[])[s] = vector.im?.[k] ?? 0;
    });
  });
  return out;
}

function fixedFrom({ re, im }: Columns): FixedMatrix {
  return matrix(re.length, re[0]?.length ?? 0, (i, j) => [fixed(re[i]?.[j] ?? 0), fixed(im[i]?.[j] ?? 0)]);
}

/** The columns of one level turned by the rotation returned for it; the others as they are. */
function repaired(given: Columns, level: { readonly columns: readonly number[]; readonly repair: Repair }): Columns {
  const { columns, repair } = level;
  const turn = (row: number, k: number): [number, number] => {
    let x = 0;
    let y = 0;
    columns.forEach((column, j) => {
      const [a, b] = [given.re[row]?.[column] ?? 0, given.im[row]?.[column] ?? 0];
      const [c, d] = [repair.re[j]?.[k] ?? 0, repair.im?.[j]?.[k] ?? 0];
      x += a * c - b * d;
      y += a * d + b * c;
    });
    return [x, y];
  };
  const place = new Map(columns.map((column, k) => [column, k]));
  const all = (part: 0 | 1): number[][] =>
    given.re.map((row, i) =>
      row.map((_, column) => {
        const k = place.get(column);
        return k === undefined ? ((part === 0 ? given.re : given.im)[i]?.[column] ?? 0) : turn(i, k)[part];
      }),
    );
  return { re: all(0), im: all(1) };
}

const eye = (n: number): number[][] =>
  Array.from({ length: n }, (_, i) => Array.from({ length: n }, (__, j) => Number(i === j)));

describe("a basis that is right", () => {
  it("the library's own bases validate, labels and all", () => {
    let good = 0;
    fc.assert(
      fc.property(plans({ breaking: 0, unitary: false }), (plan) => {
        const exact = exactProblem(plan);
        const problem = problemOf(exact);
        const outcome = findGoodBasis(problem);
        if (outcome.verdict !== "good") return;
        good++;
        const labels = Object.fromEntries(
          outcome.candidates.map((name) => [
            name,
            outcome.states.map((state) => Math.round(Object(state.labels)[name].re)),
          ]),
        );
        const validation = validateBasis(problem, columnsFrom(outcome.states, exact.n), labels);
        expect(validation.remarks).toEqual([]);
        expect(validation.verdict).toBe("good");
        expect(validation.complete).toBe(true);
      }),
      { seed: 15, numRuns: 80 },
    );
    expect(good).toBeGreaterThan(40);
  });

  it("unitary labels may be claimed as complex numbers", () => {
    const i = { re: 0, im: 1 };
    const C = Operator.diagonal([1, 1, -1])
      .plus(Operator.diagonal([0, -1, 0]))
      .plus(Operator.diagonal([0, 1, 0]).scale(i));
    const problem = { h0: Operator.diagonal([1, 1, 2]), v: Operator.diagonal([1, 2, 3]), candidates: { C } };
    expect(validateBasis(problem, eye(3), { C: [1, i, -1] }).verdict).toBe("good");
    const wrong = validateBasis(problem, eye(3), { C: [1, { re: 0, im: -1 }, -1] });
    expect(wrong.verdict).toBe("not good");
    expect(wrong.columns[1]?.labels["C"]).toMatchObject({ verdict: "not good" });
    expect(wrong.columns[1]?.labels["C"]?.atLeast).toBeCloseTo(2, 12);
  });

  it("quantum numbers in the trade's writing: j, and fractions with either minus sign", () => {
    const { squared, z } = angularMomentum(3 / 2);
    const problem = {
      h0: Operator.identity(4),
      v: z,
      candidates: { J2: { operator: squared, label: "j" as const }, Jz: { operator: z, label: "m" as const } },
    };
    const m = z.csr.rows === 4 ? [0, 1, 2, 3].map((k) => z.entry(k, k).re) : [];
    const text = m.map((x) => `${x < 0 ? "−" : ""}${Math.abs(2 * x)}/2`);
    expect(validateBasis(problem, eye(4), { J2: ["3/2", "3/2", "3/2", "3/2"], Jz: text }).verdict).toBe("good");
    expect(validateBasis(problem, eye(4), { J2: ["3/2", "3/2", "3/2", "3/2"], Jz: m }).verdict).toBe("good");
    expect(validateBasis(problem, eye(4), { J2: ["1/2", "3/2", "3/2", "3/2"] }).verdict).toBe("not good");
    expect(validateBasis(problem, eye(4), { Jz: [...text].reverse() }).verdict).toBe("not good");
  });

  it("an incomplete basis is judged for what it is, and said to be incomplete", () => {
    const problem = {
      h0: Operator.diagonal([1, 1, 2]),
      v: Operator.from([
        [-1, 0, 0],
        [0, 0, 1],
        [0, 1, 0],
      ]),
    };
    const two = validateBasis(problem, [
      [1, 0],
      [0, 1],
      [0, 0],
    ]);
    expect(two).toMatchObject({ verdict: "good", complete: false });
    const one = validateBasis(problem, [[0], [0], [1]]);
    expect(one).toMatchObject({ verdict: "good", complete: false });
    expect(one.columns[0]?.energy).toBe(2);
  });
});

describe("a basis that is wrong is told how", () => {
  const h0 = Operator.diagonal([1, 1, 2]);
  const v = Operator.from([
    [0, 0.25, 0],
    [0.25, 0, 0],
    [0, 0, 0],
  ]);
  const A = Operator.diagonal([1, 2, 3]);

  it("no columns at all but zeros", () => {
    const { verdict, orthonormality } = validateBasis({ h0, v }, [[0], [0], [0]]);
    expect(verdict).toBe("not good");
    expect(orthonormality.verdict).toBe("not good");
    expect(orthonormality.atMost).toBeGreaterThanOrEqual(1);
    expect(orthonormality.worst).toEqual([0, 0]);
  });

  it("columns that are not normalised, not orthogonal, or one and the same", () => {
    const long = validateBasis({ h0, v }, [
      [1, 0],
      [0, 1.001],
      [0, 0],
    ]);
    expect(long.orthonormality).toMatchObject({ verdict: "not good", worst: [1, 1] });
    expect(long.orthonormality.size).toBeCloseTo(0.002001, 12);
    const skew = validateBasis({ h0, v }, [
      [1, 0.6],
      [0, 0.8],
      [0, 0],
    ]);
    expect(skew.orthonormality).toMatchObject({ verdict: "not good", worst: [0, 1] });
    expect(skew.remarks[0]).toContain("columns 0 and 1");
    const twice = validateBasis({ h0, v }, [
      [1, 1],
      [0, 0],
      [0, 0],
    ]);
    expect(twice.orthonormality).toMatchObject({ verdict: "not good", worst: [0, 1] });
  });

  it("columns that are no eigenvectors of H0", () => {
    const s = Math.SQRT1_2;
    const found = validateBasis({ h0, v }, [
      [s, 0, -s],
      [0, 1, 0],
      [s, 0, s],
    ]);
    expect(found.verdict).toBe("not good");
    expect(found.columns.map((column) => column.eigenvector.verdict)).toEqual(["not good", "good", "not good"]);
    expect(found.columns[0]?.eigenvector.atLeast).toBeCloseTo(0.5, 12);
    expect(found.columns[0]?.eigenvector.atMost).toBeCloseTo(0.5, 12);
  });

  it("labels claimed wrongly, by a lot and by 1e-9", () => {
    const problem = { h0, v, candidates: { A } };
    const s = Math.SQRT1_2;
    const right = [
      [s, s, 0],
      [s, -s, 0],
      [0, 0, 1],
    ];
    expect(validateBasis({ h0, v: v.scale(0), candidates: { A } }, eye(3), { A: [1, 2, 3] }).verdict).toBe("good");
    expect(validateBasis({ h0, v: v.scale(0), candidates: { A } }, eye(3), { A: [1, 2, 3 + 1e-8] }).verdict).toBe(
      "not good",
    );
    expect(validateBasis({ h0, v: v.scale(0), candidates: { A } }, eye(3), { A: [2, 1, 3] }).verdict).toBe("not good");
    // A is not sharp in the states that V wants
    const mixed = validateBasis(problem, right, { A: [1.5, 1.5, 3] });
    expect(mixed.columns.map((column) => column.labels["A"]?.verdict)).toEqual(["not good", "not good", "good"]);
  });

  it("kets that V couples inside a level, the size, and the rotation that repairs it", () => {
    const found = validateBasis({ h0, v }, eye(3));
    expect(found.verdict).toBe("not good");
    const [level] = found.levels;
    expect(level?.worst[0]).toMatchObject({ perturbation: "V", columns: [0, 1], size: 0.25 });
    expect(level?.worst[0]?.atLeast).toBeLessThanOrEqual(0.25);
    expect(level?.worst[0]?.atMost).toBeGreaterThanOrEqual(0.25);
    if (level === undefined) return;
    const [low, high] = [...(level.repair.shifts[0] ?? [])].sort((a, b) => a - b);
    expect(low).toBeCloseTo(-0.25, 14);
    expect(high).toBeCloseTo(0.25, 14);
    const again = validateBasis({ h0, v }, repaired({ re: eye(3), im: eye(3).map((row) => row.map(() => 0)) }, level));
    expect(again.verdict).toBe("good");
  });

  it("two perturbations with no common basis: not good, and no rotation pretends to help", () => {
    const { x, z } = angularMomentum(1 / 2);
    const problem = { h0: Operator.identity(2), v: { x, z } };
    const found = validateBasis(problem, eye(2));
    expect(found.verdict).toBe("not good");
    expect(found.levels[0]?.worst[0]?.perturbation).toBe("x");
    expect(found.levels[0]?.repair.left).toBeGreaterThan(0.3);
    expect(findGoodBasis(problem).verdict).toBe("not good");
  });

  it("two perturbations with a common basis are repaired together", () => {
    const turned = (a: number, b: number): Operator =>
      Operator.from([
        [(a + b) / 2, (a - b) / 2],
        [(a - b) / 2, (a + b) / 2],
      ]);
    const problem = { h0: Operator.identity(2), v: { first: turned(1, 2), second: turned(5, -3) } };
    const found = validateBasis(problem, eye(2));
    expect(found.verdict).toBe("not good");
    const [level] = found.levels;
    if (level === undefined) return;
    expect(level.repair.left).toBeLessThan(1e-14);
    expect(
      validateBasis(
        problem,
        repaired(
          {
            re: eye(2),
            im: [
              [0, 0],
              [0, 0],
            ],
          },
          level,
        ),
      ).verdict,
    ).toBe("good");
  });

  it("a level that lacks states of H0 is not called good; a whole level of many is", () => {
    const problem = {
      h0: [
        [1, 0, 0, 0],
        [0, 1, 0, 0],
        [0, 0, 2, 1],
        [0, 0, 1, 2],
      ],
      v: { diagonal: [1, -1, 0, 0] },
    };
    const half = Math.SQRT1_2;
    const third = [0, 0, half, -half];
    const columns = (...list: number[][]): number[][] => [0, 1, 2, 3].map((ket) => list.map((q) => q[ket] as number));
    const lacking = validateBasis(problem, columns([1, 0, 0, 0], [0, 1, 0, 0]));
    expect(lacking.verdict).toBe("undecided");
    expect(lacking.remarks.join(" ")).toContain("H0 has 3 states at 1, of which the basis holds 2");
    expect(validateBasis(problem, columns([1, 0, 0, 0], third, [0, 1, 0, 0])).verdict).toBe("good");
    expect(validateBasis(problem, columns([0, 0, half, half])).verdict).toBe("good");
  });

  it("neighbouring levels that V couples far more strongly than they are apart", () => {
    const close = {
      h0: Operator.diagonal([0, 1e-9, 1]),
      v: Operator.from([
        [0, 0, 0.1],
        [0, 0, 0.1],
        [0.1, 0.1, 0],
      ]),
    };
    // through the third level, at second order
    expect(validateBasis(close, eye(3), undefined, { lambda: 1 }).verdict).toBe("undecided");
    expect(validateBasis(close, eye(3), undefined, { lambda: 1e-4 }).verdict).toBe("good");
    const direct = {
      ...close,
      v: Operator.from([
        [0, 0.1, 0],
        [0.1, 0, 0],
        [0, 0, 0],
      ]),
    };
    const found = validateBasis(direct, eye(3), undefined, { lambda: 1 });
    expect(found.verdict).toBe("undecided");
    expect(found.remarks.join(" ")).toContain("as strongly as they are apart");
    expect(validateBasis(direct, eye(3), undefined, { lambda: 1e-10 }).verdict).toBe("good");
  });

  it("random levels, real and complex, are repaired by the rotations returned", () => {
    let broken = 0;
    fc.assert(
      fc.property(plans({ breaking: 0, perturbations: 1, energies: [0, 1], inside: "full" }), (plan) => {
        const exact = exactProblem(plan);
        const problem: Problem = { h0: exact.h0, v: exact.perturbations[0] ?? exact.h0 };
        // the exact eigenvectors of H0, which V couples
        const order = exact.energies.map((_, k) => k);
        const frame: Columns = {
          re: order.map((i) => order.map((j) => double(at(exact.frame, i, j)[0]))),
          im: order.map((i) => order.map((j) => double(at(exact.frame, i, j)[1]))),
        };
        const found = validateBasis(problem, frame, undefined, { refuseAbove: 1e9 });
        if (found.verdict === "good") return;
        broken++;
        expect(found.verdict).toBe("not good");
        const after = validateBasis(problem, found.levels.reduce(repaired, frame), undefined, { refuseAbove: 1e9 });
        expect(after.remarks).toEqual([]);
        expect(after.verdict).toBe("good");
      }),
      { seed: 8, numRuns: 80 },
    );
    expect(broken).toBeGreaterThan(30);
  });
});

describe("no bound of a validation is wrong", () => {
  it("for columns somewhat off, of any length, with claims of any size", () => {
    let checked = 0;
    fc.assert(
      fc.property(
        plans({ breaking: 0, unitary: false, labels: [3] }),
        fc.constantFrom(0, 1e-15, 1e-11, 1e-9, 1e-3, 1),
        fc.constantFrom(1, 1, 1e-3, 40, 1e6),
        fc.constantFrom(0, 1e-9, 5, 1e6),
        (plan, noise, length, offset) => {
          const exact = exactProblem({ ...plan, n: Math.min(7, plan.n) });
          const random = generator(plan.seed + 7);
          const order = exact.energies.map((_, k) => k);
          const off = (x: bigint): number => (double(x) + noise * random()) * length;
          const given: Columns = {
            re: order.map((i) => order.map((j) => off(at(exact.frame, i, j)[0]))),
            im: order.map((i) => order.map((j) => (plan.complex ? off(at(exact.frame, i, j)[1]) : 0))),
          };
          const values = exact.sectors.map((sector) => Number(sector) + offset);
          const problem = problemOf(exact);
          const found = validateBasis(problem, given, { A0: values });
          const claims = new Claims();
          const q = fixedFrom(given);
          const gram = minus(product(adjoint(q), q), identity(exact.n));
          claims.atMost(norm2(gram), found.orthonormality.atMost, "orthonormality");
          claims.atLeast(norm2(gram), found.orthonormality.atLeast, "orthonormality");
          const a = fixedOperator(exact.labels[0] ?? exact.h0);
          const h0 = fixedOperator(exact.h0);
          const residual = (operator: FixedMatrix, column: number, value: number): bigint => {
            const own = columnsOf(q, [column]);
            const image = product(operator, own);
            return frobenius(
              matrix(exact.n, 1, (i) => {
                const [x, y] = at(own, i, 0);
                const [u, w] = at(image, i, 0);
                return [u - times(fixed(value), x), w - times(fixed(value), y)];
              }),
            );
          };
          found.columns.forEach(({ column, energy, eigenvector, labels }) => {
            const r = residual(h0, column, energy);
            claims.atMost(r, eigenvector.atMost, `column ${column} eigenvector`);
            claims.atLeast(r, eigenvector.atLeast, `column ${column} eigenvector`);
            const s = residual(a, column, values[column] ?? 0);
            claims.atMost(s, labels["A0"]?.atMost ?? 0, `column ${column} label`);
            claims.atLeast(s, labels["A0"]?.atLeast ?? Number.NaN, `column ${column} label`);
          });
          exact.perturbations.forEach((operator, p) => {
            const elements = product(product(adjoint(q), fixedOperator(operator)), q);
            for (const level of found.levels) {
              for (const i of level.columns) {
                for (const j of level.columns) {
                  if (i !== j) claims.atMost(modulus(elements, i, j), level.largest[p] ?? 0, `(${i}, ${j}) of V${p}`);
                }
              }
              for (const pair of level.worst) {
                if (exact.perturbations.length > 1 && pair.perturbation !== `V${p}`) continue;
                claims.atMost(modulus(elements, ...pair.columns), pair.atMost, "pair");
                claims.atLeast(modulus(elements, ...pair.columns), pair.atLeast, "pair");
              }
            }
          });
          expect(claims.broken).toEqual([]);
          checked += claims.checked;
        },
      ),
      { seed: 2, numRuns: 120 },
    );
    expect(checked).toBeGreaterThan(3000);
  });
});
