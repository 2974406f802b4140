import { describe, expect, it } from "vitest";
import {
  type FindOptions,
  findGoodBasis,
  GoodBasisError,
  Operator,
  type Problem,
  perturb,
  recheck,
  validateBasis,
} from "../../src/index.js";

const code = (work: () => unknown): string => {
  try {
    work();
  } catch (error) {
    if (error instanceof GoodBasisError) return error.code;
    throw error;
  }
  return "none";
};

describe("certificates stand up to their own re-check", () => {
  it("with a complex V and a candidate broken near the resolution", () => {
    for (const e of [1e-9, 1e-10, 1e-11, 1e-12, 1e-14]) {
      for (let k = 1; k <= 40; k++) {
        const a = k / 64;
        const c = (41 - k) / 64;
        const problem = {
          h0: { diagonal: [0, 0, 1] },
          v: {
            re: [
              [0, 0, a],
              [0, 0, a + e],
              [a, a + e, 0],
            ],
            im: [
              [0, 0, c],
              [0, 0, c],
              [-c, -c, 0],
            ],
          },
          candidates: { P: { permutation: [1, 0, 2] } },
        };
        const report = recheck(findGoodBasis(problem, { lambda: 0.1 }).certificate(), problem);
        expect(report.findings).toEqual([]);
      }
    }
  });

  it("with labels that are nearly equal", () => {
    const problem = {
      h0: { diagonal: [0, 0, 1] },
      v: [
        [0, 0, 0.1],
        [0, 0, 0.1],
        [0.1, 0.1, 0],
      ],
      candidates: { A: { diagonal: [1, 1 + 1e-12, 1] } },
    };
    expect(recheck(findGoodBasis(problem).certificate(), problem).findings).toEqual([]);
  });

  it("and say which verdict they carry", () => {
    const problem = {
      h0: { diagonal: [0, 0] },
      v: [
        [0, 1],
        [1, 0],
      ],
    };
    const report = recheck(findGoodBasis(problem, { depth: "labels" }).certificate(), problem);
    expect(report).toMatchObject({ ok: true, verdict: "not good" });
  });
});

describe("runaway denominators without a stated λ", () => {
  const coupled = (gap: number): { h0: { diagonal: number[] }; v: number[][] } => ({
    h0: { diagonal: [0, gap, 1] },
    v: [
      [0, 0, 0.1],
      [0, 0, 0.1],
      [0.1, 0.1, 0],
    ],
  });

  it("are refused where second order is wrong by all of its size", () => {
    for (const gap of [1e-3, 1e-6, 1e-9]) {
      const outcome = findGoodBasis(coupled(gap));
      expect(outcome.verdict).toBe("undecided");
      expect(outcome.levels.flatMap((level) => level.questions.map((question) => question.code))).toContain(
        "near-degenerate",
      );
    }
  });

  it("are accepted once λ is stated small enough", () => {
    const outcome = findGoodBasis(coupled(1e-3), { lambda: 1e-2 });
    expect(outcome.verdict).toBe("good");
  });
});

describe("a label that H0 breaks as strongly as V acts", () => {
  it("does not make two equal mixtures of states that H0 tells apart", () => {
    const exact = { uncertainty: "exact" } as const;
    const h0 = Operator.diagonal([0, 1e-12, 1], exact);
    const v = Operator.from(
      [
        [0, 1e-14, 0],
        [1e-14, 0, 0],
        [0, 0, 1e-13],
      ],
      exact,
    );
    const swap = Operator.from(
      [
        [0, 1, 0],
        [1, 0, 0],
        [0, 0, 0],
      ],
      exact,
    );
    expect(findGoodBasis({ h0, v, candidates: { swap } }).verdict).not.toBe("good");
  });
});

describe("what plain JavaScript may get wrong", () => {
  const problem = { h0: { diagonal: [0, 0] }, v: { diagonal: [1, 2] } };

  it("a misspelt option is named, not passed over", () => {
    expect(code(() => findGoodBasis(problem, JSON.parse('{ "lamda": 3 }')))).toBe("option");
  });

  it("a candidate called __proto__ is refused", () => {
    const candidates = JSON.parse('{ "__proto__": { "diagonal": [1, 2] } }');
    expect(code(() => findGoodBasis({ ...problem, candidates }))).toBe("name");
  });

  it("a vector that was handed out can be written to without harm", () => {
    const outcome = findGoodBasis(problem);
    if (outcome.verdict !== "good") throw new Error(outcome.verdict);
    const vector = outcome.basis.states[0]?.vector;
    if (vector === undefined) throw new Error("no state");
    vector.re[0] = 9;
    expect(outcome.basis.states[0]?.vector.re[0]).toBe(1);
    expect(outcome.certificate().levels[0]?.states[0]?.vector.re).toEqual([1]);
    expect(perturb(outcome.basis, { order: 1 }).states.length).toBe(2);
  });
});

describe("labels and levels that could mislead", () => {
  it("an eigenvalue outside a declared family of j says that it is an eigenvalue", () => {
    const outcome = findGoodBasis({
      h0: { diagonal: [0, 0, 0] },
      v: { diagonal: [1, 2, 3] },
      candidates: { J2: { operator: { diagonal: [-1, 2, 5] }, label: "j" as const } },
    });
    expect(outcome.states.map((state) => state.labels.J2.text)).toEqual(["eigenvalue 5", "1", "eigenvalue −1"]);
  });

  it("a level of columns that are no eigenvectors of H0 is not called good", () => {
    const h0 = [
      [0, 1],
      [1, 0],
    ];
    const validation = validateBasis({ h0, v: { diagonal: [0, 0] } }, [
      [1, 0],
      [0, 1],
    ]);
    expect(validation.levels.map((level) => level.verdict)).not.toContain("good");
  });

  it("more commuting sets than a few are all compared", () => {
    // on each of five sites of three kets, two candidates that do not commute: 32 maximal sets
    const sites = 5;
    const n = 3 ** sites;
    const digit = (ket: number, site: number): number => Math.floor(ket / 3 ** site) % 3;
    const candidates: Record<string, { diagonal: number[] } | { permutation: number[] }> = {};
    for (let site = 0; site < sites; site++) {
      const swap = (ket: number): number => {
        const d = digit(ket, site);
        return d === 2 ? ket : ket + (d === 0 ? 1 : -1) * 3 ** site;
      };
      candidates[`w${site}`] = { permutation: Array.from({ length: n }, (_, ket) => swap(ket)) };
      candidates[`x${site}`] = { diagonal: Array.from({ length: n }, (_, ket) => digit(ket, site)) };
    }
    const zero = { diagonal: new Array<number>(n).fill(0) };
    const outcome = findGoodBasis({ h0: zero, v: zero, candidates }, { depth: "labels" });
    expect(outcome.sets).toHaveLength(32);
    expect(outcome.sets.find((set) => set.chosen)?.pairsTogether).toBe(0);
    expect(outcome.verdict).toBe("good");
  });
});

/** A symmetric matrix from elements on and above the diagonal. */
const symmetric = (n: number, elements: readonly (readonly [number, number, number])[]): number[][] => {
  const rows = Array.from({ length: n }, () => new Array<number>(n).fill(0));
  for (const [i, j, x] of elements) {
    (rows[i] as number[])[j] = x;
    (rows[j] as number[])[i] = x;
  }
  return rows;
};

/** The verdict, once the certificate has stood up to its own re-check. */
const verdictOf = (problem: Problem, options: FindOptions = {}): string => {
  const outcome = findGoodBasis(problem, options);
  expect(recheck(outcome.certificate(), problem).findings).toEqual([]);
  return outcome.verdict;
};

describe("what counts as vanished does not grow with what couples nothing", () => {
  it("a filled matrix, whose norm bound is far above its norm", () => {
    // normalised Hadamard matrix of 256 kets: ‖V‖₂ = 1, √(‖V‖₁‖V‖_∞) = 16
    let signs = [[1]];
    while (signs.length < 256) {
      signs = [...signs.map((row) => [...row, ...row]), ...signs.map((row) => [...row, ...row.map((x) => -x)])];
    }
    const v = signs.map((row) => row.map((x) => x / 16));
    (v[0] as number[])[1] = 4e-10;
    (v[1] as number[])[0] = 4e-10;
    (v[1] as number[])[1] = 1 / 16;
    const h0 = { diagonal: Array.from({ length: 256 }, (_, k) => (k < 2 ? 0 : 10 * k)) };
    const outcome = findGoodBasis({ h0, v }, { depth: "labels", levels: { lowest: 1 }, lambda: 1e-3 });
    expect(outcome.verdict).toBe("not good");
  });

  it("an offset of V", () => {
    for (const offset of [0, 1, 1e5, 1e12]) {
      const v = symmetric(3, [
        [0, 0, offset],
        [1, 1, offset],
        [2, 2, offset],
        [0, 1, 1],
      ]);
      expect(verdictOf({ h0: { diagonal: [0, 0, 1] }, v }, { depth: "labels" })).toBe("not good");
    }
  });

  it("a multiple of 1 for V or for H0, and no V at all, are good", () => {
    const mixed = symmetric(3, [
      [0, 1, 1],
      [1, 2, 0.5],
    ]);
    expect(verdictOf({ h0: { diagonal: [0, 0, 1] }, v: { diagonal: [3, 3, 3] } })).toBe("good");
    expect(verdictOf({ h0: { diagonal: [0, 0, 1] }, v: { diagonal: [0, 0, 0] } })).toBe("good");
    expect(verdictOf({ h0: { diagonal: [5, 5, 5] }, v: mixed })).toBe("good");
  });
});

describe("a near-degeneracy is not hidden, with no λ stated", () => {
  const couplings = [
    [0, 2, 0.1],
    [1, 2, 0.1],
  ] as const;

  it("by an offset of V", () => {
    for (const offset of [0, 1e5]) {
      const diagonal = [0, 1, 2].map((k) => [k, k, offset] as const);
      const v = symmetric(3, [...couplings, ...diagonal]);
      expect(verdictOf({ h0: { diagonal: [0, 1e-8, 1] }, v })).toBe("undecided");
    }
  });

  it("by a large element on a ket that V does not couple", () => {
    const v = symmetric(4, [...couplings, [3, 3, 1e5]]);
    expect(verdictOf({ h0: { diagonal: [0, 1e-8, 1, 2] }, v })).toBe("undecided");
    const columns = [0, 1, 2, 3].map((k) => [0, 1, 2, 3].map((j) => (j === k ? 1 : 0)));
    expect(validateBasis({ h0: { diagonal: [0, 1e-8, 1, 2] }, v }, columns).verdict).toBe("undecided");
  });

  it("by a strong coupling in another sector, or far levels there", () => {
    const candidates = { A: { diagonal: [0, 0, 0, 1, 1] } };
    const v = symmetric(5, [...couplings, [3, 4, 1e5]]);
    for (const far of [5, 1e3]) {
      const outcome = findGoodBasis({ h0: { diagonal: [0, 1e-8, 1, 0, far] }, v, candidates });
      expect(outcome.levels[1]?.questions.map((question) => question.code)).toEqual(["near-degenerate"]);
    }
  });

  it("by a second perturbation that tells the pair apart, where each is taken alone", () => {
    const one = symmetric(3, [...couplings, [0, 0, 1e-6], [1, 1, -1e-6]]);
    const two = { diagonal: [0.5, -0.5, 0] };
    for (const v of [one, { one, two }]) {
      const problem: Problem = { h0: { diagonal: [0, 0, 1] }, v };
      expect(verdictOf(problem, { lambda: 1 })).toBe("undecided");
      expect(verdictOf(problem, { lambda: 1e-4 })).toBe("good");
    }
  });
});

describe("a near-degeneracy stays one, whatever labels and columns stand beside it", () => {
  const identity = (n: number): number[][] =>
    Array.from({ length: n }, (_, i) => Array.from({ length: n }, (__, j) => (i === j ? 1 : 0)));
  const near: Problem = { h0: { diagonal: [0, 1e-9, 1] }, v: symmetric(3, [[0, 1, 0.1]]) };

  it("with a true label that leaves the pair alone in its sector, and with nothing else at all", () => {
    expect(verdictOf(near)).toBe("undecided");
    expect(verdictOf({ ...near, candidates: { A: { diagonal: [0, 0, 1] } } })).toBe("undecided");
    expect(verdictOf({ h0: { diagonal: [0, 1e-9] }, v: symmetric(2, [[0, 1, 1]]) })).toBe("undecided");
    expect(verdictOf({ h0: { diagonal: [0, 1e-9] }, v: symmetric(2, [[0, 1, 1]]) }, { lambda: 1e-10 })).toBe("good");
  });

  it("for a basis that somebody brings, complete or not", () => {
    const half = [0, 1, 2].map((ket) => [ket === 0 ? 1 : 0, ket === 1 ? 1 : 0]);
    for (const options of [{}, { lambda: 1 }]) {
      expect(validateBasis(near, identity(3), undefined, options).verdict).toBe("undecided");
      expect(validateBasis(near, half, undefined, options).verdict).toBe("undecided");
    }
    expect(validateBasis(near, half, undefined, { lambda: 1e-9 }).verdict).toBe("good");
    // a reach far below ‖V‖, and yet far above the distance
    const faint: Problem = {
      h0: { diagonal: [0, 1e-9, 1] },
      v: symmetric(3, [
        [0, 1, 1e-7],
        [2, 2, 1],
      ]),
    };
    expect(
      validateBasis(
        faint,
        half.map(([x]) => [x as number]),
        undefined,
        { lambda: 1 },
      ).verdict,
    ).toBe("undecided");
  });

  it("inside a level too: states that V tells apart far less than the second order mixes them", () => {
    const v = symmetric(3, [
      [0, 0, 1e-6],
      [1, 1, -1e-6],
      [0, 2, 0.5],
      [1, 2, 0.5],
    ]);
    const outcome = findGoodBasis({ h0: { diagonal: [0, 0, 1] }, v });
    expect(outcome.levels[0]?.questions.map((question) => question.code)).toEqual(["strong-mixing"]);
  });
});

describe("an offset of H0 or V makes nothing vanish", () => {
  const broken = (c: number, h: number, v02: number): Problem => ({
    h0: symmetric(3, [
      [0, 0, c],
      [1, 1, c],
      [2, 2, c + 1],
      [0, 1, h],
    ]),
    v: symmetric(3, [[0, 2, v02]]),
    candidates: { A: { diagonal: [1, -1, 1] } },
  });

  it("a label that H0 breaks is no evidence, with an offset of H0 or without", () => {
    for (const c of [0, 1e3, 1e6]) {
      const outcome = findGoodBasis(broken(c, 5e-8, 1e-4), { lambda: 1 });
      expect(outcome.audit.candidates[0]?.conserved, `c = ${c}`).toBe(false);
    }
    // broken by less than commutators are held to, and yet by more than the second order tells apart
    expect(verdictOf(broken(0, 1e-13, 0.1), { lambda: 1e-6 })).toBe("undecided");
  });

  it("columns that are no eigenvectors are none, however far up H0 lies", () => {
    for (const c of [0, 1e4, 1e8]) {
      const [x, y] = [Math.cos(1e-5), Math.sin(1e-5)];
      const columns = [
        [x, -y],
        [y, x],
      ];
      const problem = { h0: { diagonal: [c, c + 1] }, v: { diagonal: [0, 0] } };
      expect(validateBasis(problem, columns).verdict, `c = ${c}`).toBe("not good");
    }
  });

  it("eigenvectors within the stated uncertainty of H0 are eigenvectors", () => {
    const h0 = Operator.from({ diagonal: [0, 1] }, { uncertainty: { relative: 0, absolute: 1e-9 } });
    const problem = { h0, v: { diagonal: [0.1, 0.2] } };
    expect(verdictOf(problem)).toBe("good");
    const columns = [
      [1, 0],
      [0, 1],
    ];
    expect(validateBasis(problem, columns).verdict).toBe("good");
  });

  it("a coupling far below an offset of V, and well above its rounding, is found", () => {
    const v = symmetric(3, [
      [0, 0, 1e6],
      [1, 1, 1e6],
      [2, 2, 1e6],
      [0, 1, 4e-8],
      [0, 2, 0.5],
      [1, 2, 0.5],
    ]);
    expect(verdictOf({ h0: { diagonal: [0, 0, 1] }, v }, { depth: "labels" })).toBe("not good");
  });
});

describe("a label that H0 breaks is held against what V makes of it", () => {
  const candidates = { swap: { permutation: [1, 0, 2] } };
  const problem = (energies: number[], v01: number, v22: number): Problem => ({
    h0: { diagonal: energies },
    v: symmetric(3, [
      [0, 1, v01],
      [2, 2, v22],
    ]),
    candidates,
  });

  it("where V is weaker than what H0 leaves between the labels", () => {
    for (const lambda of [undefined, 1]) {
      const options = lambda === undefined ? {} : { lambda };
      for (const v22 of [0, 1]) {
        expect(verdictOf(problem([1e4, 1e4 + 1e-8, 1e4 + 1], 1e-10, v22), options)).toBe("undecided");
        expect(verdictOf(problem([1e4, 1e4 + 1e-9, 1e4 + 1], 1e-10, v22), options)).toBe("undecided");
        expect(verdictOf(problem([0, 1e-6, 1e6], 1e-9, v22), options)).toBe("undecided");
      }
    }
  });

  it("where H0 conserves it exactly, or V is far stronger, it stands", () => {
    expect(verdictOf(problem([1e4, 1e4, 1e4 + 1], 1e-10, 1))).toBe("good");
    expect(verdictOf(problem([1, 1 + 1e-13, 2], 1e-3, 0))).toBe("good");
  });
});
