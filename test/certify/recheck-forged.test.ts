import { describe, expect, it } from "vitest";
import type { Problem } from "../../src/audit/problem.js";
import { type FindOptions, findGoodBasis } from "../../src/certify/find.js";
import { type RecheckReport, recheck } from "../../src/certify/recheck.js";
import { computeSeals } from "../../src/certify/seal.js";
import { Operator } from "../../src/operator/operator.js";
import { formatRecheck } from "../../src/report/format-recheck.js";

// biome-ignore lint/suspicious/noExplicitAny: a forger writes what it likes
type Forgery = any;

/** What the re-check says of a certificate that was changed, its seals written anew. */
function forge(problem: Problem, options: FindOptions, change: (document: Forgery) => void): RecheckReport {
  const document: Forgery = JSON.parse(JSON.stringify(findGoodBasis(problem, options).certificate()));
  expect(recheck(document, problem)).toMatchObject({ ok: true, findings: [] });
  change(document);
  document.seals = computeSeals(document);
  return recheck(document, problem);
}

const paths = ({ findings }: RecheckReport): string[] => findings.map((finding) => finding.path);

const BROKEN: Problem = {
  h0: [
    [0, 1e-13],
    [1e-13, 1],
  ],
  v: [
    [1, 2e-13],
    [2e-13, -1],
  ],
  candidates: { A: { diagonal: [1, -1] } },
};

describe("the distance to a symmetric model is no smaller than what breaks the labels", () => {
  it("where no label node lies inside a level", () => {
    const nothing = forge(BROKEN, {}, (d) => {
      d.whole.eta0 = 0;
      d.whole.eta = [0];
    });
    expect(paths(nothing)).toEqual(expect.arrayContaining(["whole.eta0", "whole.eta[0]"]));
    const small = forge(BROKEN, {}, (d) => {
      d.whole.eta0 = 3.7e-14;
    });
    expect(paths(small)).toContain("whole.eta0");
    const large: Problem = {
      h0: { diagonal: [0, 1] },
      v: [
        [0, 3e-13],
        [3e-13, 1],
      ],
      candidates: { A: { diagonal: [1, -1] } },
    };
    for (const eta of [0, 2e-13]) {
      const report = forge(large, {}, (d) => {
        d.whole.eta = [eta];
      });
      expect(paths(report)).toContain("whole.eta[0]");
    }
  });
});

describe("what is certain of a bound must be covered in full", () => {
  it("the uncertainty of entries in the ± of a shift", () => {
    const v = Operator.from({ diagonal: [1, 2] }, { uncertainty: { absolute: 0.01 } });
    for (const plusMinus of [0.0026, 0.00999]) {
      const report = forge({ h0: { diagonal: [0, 1] }, v }, {}, (d) => {
        for (const level of d.levels) for (const state of level.states) state.shifts[0].plusMinus = plusMinus;
      });
      expect(paths(report)).toContain("levels[0].states[0].shifts[0].plusMinus");
    }
  });

  it("elements inside a level in the norm of its off-diagonal block", () => {
    const problem: Problem = {
      h0: { diagonal: [0, 0, 0, 1] },
      v: [
        [0, 0.1, 0.1, 0],
        [0.1, 0, 0.1, 0],
        [0.1, 0.1, 0, 0],
        [0, 0, 0, 0],
      ],
    };
    // its norm is 0.2, that of a row 0.141
    for (const norm of [0.0501, 0.15, 0.1999]) {
      const report = forge(problem, { depth: "labels" }, (d) => {
        d.levels[0].couplings[0].offDiagonal = norm;
        for (const state of d.levels[0].states) state.shifts[0].plusMinus = norm;
      });
      expect(paths(report)).toEqual(
        expect.arrayContaining(["levels[0].couplings[0].offDiagonal", "levels[0].states[0].shifts[0].plusMinus"]),
      );
    }
  });

  it("residuals: no bound may be an eighth too small", () => {
    const { h0, v } = BROKEN;
    for (const [field, path] of [
      ["energyPlusMinus", "levels[0].states[0].energyPlusMinus"],
      ["tilt", "levels[0].tilt"],
    ] as const) {
      const report = forge({ h0, v, candidates: { A: { diagonal: [1, -1] } } }, {}, (d) => {
        const target = field === "tilt" ? d.levels[0] : d.levels[0].states[0];
        target[field] *= 7 / 8;
      });
      expect(paths(report)).toContain(path);
    }
  });
});

describe("what was not checked is said", () => {
  const rotor: Problem = {
    h0: { diagonal: [4, 1, 0, 1, 4] },
    v: {
      n: 5,
      entries: [0, 1, 2, 3].flatMap((k) => [
        [k, k + 1, 1],
        [k + 1, k, 1],
      ]) as [number, number, number][],
    },
  };

  it("an invented second-order node of a certificate of some levels", () => {
    const report = forge(rotor, { levels: { nearest: 4 } }, (d) => {
      const [level] = d.levels;
      const couplings = [{ perturbation: "V", selectionRule: null, direct: 0, counted: 0 }];
      level.nodes.push({
        id: 50,
        kind: "second order",
        operator: "W",
        values: [
          [1, 0],
          [-1, 0],
        ],
        states: [[0], [1]],
        gap: 2,
        commutators: [],
        residual: 0,
        couplings,
      });
      for (const state of level.states) {
        state.safe = { energies: 3, states: 0 };
        state.limitedBy = "x";
      }
      level.safe = { energies: 3, states: 0 };
    });
    const sentence = report.notChecked.find((line) => line.includes("levels[0]"));
    expect(sentence).toMatch(
      /states 0, 1 .*second-order operator.* 3 \(energies\) and 0 \(states\); only 1 of 3 levels/,
    );
    const text = formatRecheck(report);
    expect(text).toMatch(/^VERIFIED IN PART: \d+ statements/);
    expect(text.replaceAll(/\s+/g, " ")).toContain(sentence);
  });

  it("nothing, where all levels are certified, but what the verdict is relative to", () => {
    const report = forge(rotor, { lambda: 0.25 }, (d) => {
      for (const level of d.levels) level.guard.refuseAbove = 1e6;
    });
    expect(report).toMatchObject({
      ok: true,
      notChecked: [],
      relativeTo: { resolution: 1e-10, lambda: 0.25, stated: true, refuseAbove: 1e6 },
    });
    expect(formatRecheck(report).replaceAll(/\s+/g, " ")).toMatch(
      /^VERIFIED: all .* relative to the resolution 1e-10, λ = 0.25 and the threshold 1000000 /,
    );
  });
});

describe("honest certificates are accepted", () => {
  const accepted = (problem: Problem, options: FindOptions = {}): void => {
    const outcome = findGoodBasis(problem, options);
    expect(recheck(JSON.stringify(outcome.certificate()), problem)).toMatchObject({ ok: true, findings: [] });
  };

  it("with labels as close as the refinement takes them apart", () => {
    const half = [
      [1, 1, 1, 1],
      [1, -1, 1, -1],
      [1, 1, -1, -1],
      [1, -1, -1, 1],
    ].map((row) => row.map((x) => x / 2));
    const rotated = (m: readonly (readonly number[])[]): number[][] => {
      const at = (a: readonly (readonly number[])[], i: number, j: number): number => a[i]?.[j] ?? 0;
      const product = (a: readonly (readonly number[])[], b: readonly (readonly number[])[]): number[][] =>
        a.map((_, i) => b.map((__, j) => [0, 1, 2, 3].reduce((sum, k) => sum + at(a, i, k) * at(b, k, j), 0)));
      return product(product(half, m), half);
    };
    const far = 10 + 2 ** -27;
    accepted({
      h0: { diagonal: [0, 0, 0, 0] },
      v: rotated([
        [1, 0.5, 0, 0],
        [0.5, -1, 0, 0],
        [0, 0, 0.25, 0.75],
        [0, 0, 0.75, 0],
      ]),
      candidates: {
        A: rotated([
          [10, 0, 0, 0],
          [0, 10, 0, 0],
          [0, 0, far, 0],
          [0, 0, 0, far],
        ]),
      },
    });
    const e = 2 ** -39;
    accepted({
      h0: [
        [1, -2 * e, 0, 2 * e],
        [-2 * e, 2 + 2 * e, 0, 2 * e],
        [0, 0, 1, 0],
        [2 * e, 2 * e, 0, 2],
      ],
      v: [
        [-0.625, e, -e, -0.25],
        [e, -0.375, 0.875, 0],
        [-e, 0.875, 0, 0],
        [-0.25, 0, 0, e - 0.375],
      ],
      candidates: { B: { diagonal: [2 ** -32 - 1, -1, -1, 2 ** -32 - 1] } },
    });
  });

  it("with measured labels that would fit j in part", () => {
    const A = { diagonal: [2 + 2 ** -36, 2 + 2 ** -36, 2 ** -36, 0] };
    accepted(
      { h0: { diagonal: [0, 0, 0, 1] }, v: { diagonal: [1, -1, 0, 0] }, candidates: { A } },
      { levels: { lowest: 1 } },
    );
  });

  it("with a wide level beside narrow ones", () => {
    accepted(
      {
        h0: { diagonal: [0, 0.04, 1, 1.03, 1.031] },
        v: [
          [0, 0, 0.125, 0, 0],
          [0, 0.5, 0, 0, 0],
          [0.125, 0, 0, 0.5, 0.5],
          [0, 0, 0.5, 0, 0.5],
          [0, 0, 0.5, 0.5, 0.1],
        ],
      },
      { lambda: 1e-4, levelWidth: 0.035 },
    );
  });
});

it("labels that are small beside 1 are told apart like any others", () => {
  const problem: Problem = {
    h0: { diagonal: [0, 0, 0] },
    v: { diagonal: [1, 2, 3] },
    candidates: { A: { diagonal: [1e-10, 2e-10, 0] } },
  };
  const outcome = findGoodBasis(problem);
  expect(outcome.states.map(({ labels }) => [labels["A"]?.text, labels["A"]?.status])).toEqual([
    ["2e−10", "measured"],
    ["1e−10", "measured"],
    ["0", "measured"],
  ]);
  expect(recheck(outcome.certificate(), problem).ok).toBe(true);
});
