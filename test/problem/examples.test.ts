import { readFileSync } from "node:fs";
import { fileURLToPath } from "node:url";
import { describe, expect, it } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import type { BasisState } from "../../src/certify/findings.js";
import type { Outcome } from "../../src/certify/outcome.js";
import { validateBasis } from "../../src/certify/validate.js";
import { perturb } from "../../src/perturb/perturb.js";
import { type ReadProblem, readProblem } from "../../src/problem/read.js";
import { readBasis } from "../../src/problem/read-basis.js";

function example(name: string): ReadProblem {
  return readProblem(
    readFileSync(fileURLToPath(new URL(`../../docs/examples/${name}.json`, import.meta.url)), "utf8"),
    { name },
  );
}

function study(name: string): Outcome {
  const { problem, options } = example(name);
  return findGoodBasis(problem, options);
}

/** The outcome with only the named candidates, states told apart by labels alone. */
function byLabels(name: string, kept: readonly string[]): Outcome {
  const { problem, options } = example(name);
  const candidates = Object.fromEntries(Object.entries(problem.candidates ?? {}).filter(([key]) => kept.includes(key)));
  return findGoodBasis({ ...problem, candidates }, { ...options, depth: "labels" });
}

function conserved(outcome: Outcome): Record<string, boolean> {
  return Object.fromEntries(outcome.audit.candidates.map((candidate) => [candidate.name, candidate.conserved]));
}

describe("the laboratory example", () => {
  const outcome = study("laboratory");

  it("is invented, and good with the default options", () => {
    const read = example("laboratory");
    expect(read.invented).toBe(true);
    expect(read.options).toEqual({});
    expect(outcome.verdict).toBe("good");
    expect(outcome.levels.map(({ energy, degeneracy }) => [energy, degeneracy])).toEqual([
      [0, 4],
      [1350, 8],
    ]);
  });

  it("has textbook candidates that fail: Sz under the hyperfine coupling, F² already under H0", () => {
    expect(conserved(outcome)).toEqual({ Sz: false, F2: false, Fz: true, I2: true });
    const [sz, f2] = outcome.audit.candidates;
    expect(sz?.withH0.verdict).toBe("commutes");
    expect(sz?.withPerturbations[0]?.verdict).toBe("broken");
    expect(f2?.withH0.verdict).toBe("broken");
  });

  it("has a level that needs two labels", () => {
    const questionsOfLowest = (kept: readonly string[]): string[] => {
      const labelled = byLabels("laboratory", kept);
      if (labelled.verdict === "good") throw new Error("the other level needs V");
      return labelled.questions.filter(({ level }) => level === 0).map(({ code }) => code);
    };
    expect(byLabels("laboratory", ["Fz", "I2"]).levels[0]?.verdict).toBe("good");
    expect(questionsOfLowest(["Fz"])).toContain("labels-insufficient");
    expect(questionsOfLowest(["I2"])).toContain("labels-insufficient");
    const lowest = outcome.states.filter(({ level }) => level === 0);
    expect(lowest.map(({ labels }) => [labels["Fz"]?.text, labels["I2"]?.text])).toEqual([
      ["1", "1"],
      ["0", "1"],
      ["0", "0"],
      ["−1", "1"],
    ]);
    for (const { safe } of lowest) expect(safe).toEqual({ energies: "all", states: "all" });
  });

  it("has exactly one pair that is left to V", () => {
    const left = outcome.states.filter(({ safe }) => safe.energies !== "all");
    expect(left.map(({ labels }) => [labels["Fz"]?.text, labels["I2"]?.text])).toEqual([
      ["0", "1"],
      ["0", "1"],
    ]);
    for (const { safe } of left) expect(safe).toEqual({ energies: 2, states: 0 });
    // E1 = ±28.5 − 3.2 + 0.0107 mI: the field tells them apart.
    const shifts = left.map(({ shifts: [first] }) => first?.value ?? Number.NaN).sort((a, b) => a - b);
    expect(shifts[0]).toBeCloseTo(-28.5 - 3.2 - 0.0107, 10);
    expect(shifts[1]).toBeCloseTo(28.5 - 3.2 + 0.0107, 10);
  });
});

/** The fences of a guide that hold a problem file. */
function problemsIn(guide: string): string[] {
  const text = readFileSync(fileURLToPath(new URL(`../../docs/${guide}`, import.meta.url)), "utf8");
  return [...text.matchAll(/^```json\n(.*?)^```$/gms)].map(([, json = ""]) => json);
}

describe("the problem files in the guides", () => {
  for (const guide of ["molecule.md", "oscillators.md"]) {
    it(`of ${guide} work as they stand`, () => {
      const found = problemsIn(guide);
      expect(found).toHaveLength(1);
      for (const json of found) {
        const { problem, options } = readProblem(json, { name: guide });
        expect(findGoodBasis(problem, options).verdict).toBe("good");
      }
    });
  }
});

describe("the molecule example", () => {
  const outcome = study("benzene");

  it("keeps the mirror through the substituted atom alone, and that is enough", () => {
    expect(conserved(outcome)).toEqual({ turn: false, mirror: true, "mirror between": false });
    expect(outcome.verdict).toBe("good");
    expect(outcome.levels.map(({ degeneracy }) => degeneracy)).toEqual([1, 2, 2, 1]);
    for (const { safe } of outcome.states) expect(safe).toEqual({ energies: "all", states: "all" });
  });

  it("shifts the even partner by a third of the perturbation and the odd one not at all", () => {
    const pair = outcome.states.filter(({ level }) => level === 1);
    expect(pair.map(({ labels }) => labels["mirror"]?.text)).toEqual(["+1", "−1"]);
    expect(pair[0]?.shifts[0]?.value).toBeCloseTo(-0.4 / 3, 12);
    expect(pair[1]?.shifts[0]?.value).toBeCloseTo(0, 12);
  });
});

describe("what the molecule guide says to try", () => {
  it("leaves the pairs to V where the mirror is taken away: same states, lower safe orders", () => {
    const { problem } = example("benzene");
    const bare = findGoodBasis({ ...problem, candidates: {} });
    expect(bare.verdict).toBe("good");
    const pair = bare.states.filter(({ level }) => level === 1);
    for (const { safe } of pair) expect(safe).toEqual({ energies: 2, states: 0 });
    const weights = (states: readonly BasisState[]): number[][] =>
      states.map(({ vector: { kets, re } }) => {
        const row = new Array<number>(6).fill(0);
        kets.forEach((ket, k) => {
          row[ket] = Number((re[k] ?? 0).toFixed(12)) + 0;
        });
        return row;
      });
    const labelled = study("benzene").states.filter(({ level }) => level === 1);
    expect(new Set(weights(pair).map(String))).toEqual(new Set(weights(labelled).map(String)));
  });

  it("finds the textbook states coupled, and repairs them", () => {
    const { problem, n } = example("benzene");
    const states = Array.from({ length: n }, (_, k) =>
      Array.from({ length: n }, (_, site) => {
        const angle = (2 * Math.PI * k * site) / n;
        return [Math.cos(angle) / Math.sqrt(n), Math.sin(angle) / Math.sqrt(n)];
      }),
    );
    const { columns, labels } = readBasis(states, { n });
    const validation = validateBasis(problem, columns, labels);
    expect(validation.verdict).toBe("not good");
    const pairs = validation.levels.flatMap(({ worst }) => worst);
    expect(pairs.map(({ columns: pair }) => [...pair].sort())).toEqual([
      [1, 5],
      [2, 4],
    ]);
    for (const { size } of pairs) expect(size).toBeCloseTo(0.4 / 6, 12);
    for (const { repair } of validation.levels) expect(repair.left).toBeLessThan(1e-15);
  });
});

describe("the oscillator example", () => {
  const outcome = study("oscillators");

  it("keeps exchange and parity, and leaves to V what they do not tell apart", () => {
    expect(conserved(outcome)).toEqual({ exchange: true, parity: true, "x parity": false, L: false });
    expect(outcome.verdict).toBe("good");
    expect(outcome.levels.map(({ degeneracy, safe }) => [degeneracy, safe.energies])).toEqual([
      [1, "all"],
      [2, "all"],
      [3, 2],
      [4, 2],
    ]);
  });

  it("gives the first-order shifts of the elementary matrix elements", () => {
    // ⟨10|xy|01⟩ = 1/2 and ⟨x²⟩⟨y²⟩ = (3/2)(1/2), while x² y² does not couple |10⟩ and |01⟩.
    const pair = outcome.states.filter(({ level }) => level === 1);
    expect(pair.map(({ labels }) => labels["exchange"]?.text)).toEqual(["+1", "−1"]);
    expect(pair[0]?.shifts[0]?.value).toBeCloseTo(0.01 * 0.75 + 0.04 / 2, 12);
    expect(pair[1]?.shifts[0]?.value).toBeCloseTo(0.01 * 0.75 - 0.04 / 2, 12);
  });

  it("does not feel the cut", () => {
    const file = JSON.parse(
      readFileSync(fileURLToPath(new URL("../../docs/examples/oscillators.json", import.meta.url)), "utf8"),
    );
    for (const factor of file.space) factor.oscillator = 16;
    const { problem, options } = readProblem(file);
    const larger = findGoodBasis(problem, options);
    if (larger.verdict !== "good" || outcome.verdict !== "good") throw new Error("not good");
    const [few, many] = [outcome, larger].map(({ basis }) => perturb(basis, { order: 2 }).states);
    expect(few).toHaveLength(10);
    few?.forEach(({ first, second }, k) => {
      expect(many?.[k]?.first?.[0]?.value).toBeCloseTo(first?.[0]?.value ?? Number.NaN, 12);
      expect(many?.[k]?.second?.[0]?.[0]?.value).toBeCloseTo(second?.[0]?.[0]?.value ?? Number.NaN, 10);
    });
  });
});
