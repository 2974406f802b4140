import { spawnSync } from "node:child_process";
import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { describe, expect, it } from "vitest";
import { findGoodBasis } from "../../src/index.js";
import { builtPackage } from "../build.js";
import { problemOf } from "../support/check-bounds.js";
import { type ExactPlan, exactProblem } from "../support/exact-problem.js";

const plan: ExactPlan = {
  seed: 11,
  n: 9,
  complex: true,
  energies: [0, 1, 3],
  labels: [2, 2],
  unitary: true,
  inside: "scalar",
  perturbations: 1,
  breaking: 2 ** -48,
  scale: 0,
  uncertainty: "default",
};

/** A program that solves a few problems from numbers alone and prints their certificates. */
const program = `
const { angularMomentum, findGoodBasis, hopping, Operator, perturb, spinChain, translation, reflection } =
  await import(${JSON.stringify(pathToFileURL(join(builtPackage, "index.js")).href)});
const { x, y, z } = angularMomentum(3 / 2);
const u = Math.sqrt(2) / 3;
const problems = [
  [{ h0: z.times(z), v: x, candidates: { Jx: x, Jz2: z.times(z) } }, {}],
  [{ h0: z.times(z), v: y.times(y).plus(x.times(x)), candidates: { Jz: { operator: z, label: "m" } } }, {}],
  [{ h0: [[u, 0.1, 0.1], [0.1, u, 0.1], [0.1, 0.1, u]], v: { a: [[0, 1, 0], [1, 0, 0], [0, 0, 1]], b: [[1, 0, 0], [0, 1, 0], [0, 0, 2]] },
     candidates: { P: { permutation: [1, 0, 2] } } }, { depth: "first order" }],
];
for (const [problem, options] of problems) {
  const outcome = findGoodBasis(problem, options);
  console.log(JSON.stringify(outcome.certificate()));
  if (outcome.verdict !== "good") continue;
  const select = outcome.states.filter((s) => s.safe.energies === "all" || s.safe.energies >= 2).map((s) => s.index);
  console.log(JSON.stringify(perturb(outcome.basis, { select }).states));
}
`;

function run(...flags: string[]): string {
  const { stdout, stderr, status } = spawnSync(process.execPath, [...flags, "--input-type=module", "--eval", program], {
    encoding: "utf8",
  });
  expect(stderr).toBe("");
  expect(status).toBe(0);
  return stdout;
}

describe("same input, same bits", () => {
  it("two processes print the same certificates, with and without the optimising compiler", () => {
    const first = run();
    expect(first.split("\n").length).toBeGreaterThan(5);
    expect(first).toContain("goodbasis-certificate");
    expect(run()).toBe(first);
    expect(run("--no-opt")).toBe(first);
  });

  it("one process prints the same twice, whatever was solved in between", () => {
    const print = (): string => JSON.stringify(findGoodBasis(problemOf(exactProblem(plan))).certificate());
    const first = print();
    for (const seed of [1, 2, 3]) findGoodBasis(problemOf(exactProblem({ ...plan, seed })));
    expect(print()).toBe(first);
  });

  it("the input is left as it was", () => {
    const h0 = [
      [1, 0],
      [0, 1],
    ];
    const v = [
      [0, 0.5],
      [0.5, 0],
    ];
    const before = JSON.stringify([h0, v]);
    const { verdict } = findGoodBasis({ h0, v });
    expect(verdict).toBe("good");
    expect(JSON.stringify([h0, v])).toBe(before);
  });
});
