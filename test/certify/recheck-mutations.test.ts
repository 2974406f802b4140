import { describe, expect, it } from "vitest";
import type { Problem } from "../../src/audit/problem.js";
import type { Certificate } from "../../src/certify/certificate-format.js";
import { findGoodBasis } from "../../src/certify/find.js";
import { recheck } from "../../src/certify/recheck.js";
import { computeSeals } from "../../src/certify/seal.js";
import { GoodBasisError } from "../../src/errors.js";
import { type Leaf, leavesOf, replaced } from "./recheck-leaves.js";
import { CASES } from "./recheck-problems.js";

const SMALL = [
  "three kets and a label",
  "spin-orbit coupling",
  "hydrogen n = 2 in a field, labels alone",
  "second order on three kets",
  "one inner level of a rotor",
  "two perturbations",
];

function certificateOf(name: string): { problem: Problem; certificate: Certificate } {
  const found = CASES[name];
  if (found === undefined) throw new Error(`no case "${name}"`);
  return { problem: found.problem, certificate: findGoodBasis(found.problem, found.options).certificate() };
}

/** Other values for a leaf: larger, a little off, or another text. */
function others({ value }: Leaf): unknown[] {
  if (typeof value === "number")
    return [1.5 * value, value + 1e-3 * Math.max(1, Math.abs(value))].filter((x) => x !== value);
  if (typeof value === "string") return [`${value}x`, value === "good" ? "not good" : "good"];
  return [typeof value === "boolean" ? !value : 1];
}

/** Where the re-check says that the first fault lies. */
function firstFault(certificate: unknown, problem: Problem): string | undefined {
  try {
    return recheck(certificate, problem).findings[0]?.path;
  } catch (error) {
    if (!(error instanceof GoodBasisError)) throw error;
    if (error.code === "wrong-problem") return error.message.includes("kets") ? "n" : "operators";
    expect(error.code).toBe("file");
    return String(error.details["path"]);
  }
}

const isWithin = (path: string, section: string): boolean =>
  path === section || (path.startsWith(section) && /^[.[]/.test(path.slice(section.length)));

describe("a change is caught and its place is named", () => {
  for (const name of SMALL) {
    it(`anywhere in the certificate of ${name}`, () => {
      const { problem, certificate } = certificateOf(name);
      const document: unknown = JSON.parse(JSON.stringify(certificate));
      const missed: string[] = [];
      let tried = 0;
      for (const leaf of leavesOf(document)) {
        const [top, section] = leaf.keys;
        const place = top === "seals" ? String(section) : leaf.path;
        for (const value of others(leaf)) {
          tried++;
          const fault = firstFault(replaced(document, leaf.keys, value), problem);
          if (fault === undefined || !(isWithin(place, fault) || isWithin(fault, place))) {
            missed.push(`${leaf.path}: ${leaf.value} → ${value} gave ${fault}`);
          }
        }
      }
      expect(missed).toEqual([]);
      expect(tried).toBeGreaterThan(150);
    });
  }

  it("when something is removed or added", () => {
    const { problem, certificate } = certificateOf("two perturbations");
    const [first, ...rest] = certificate.levels;
    const without = recheck({ ...certificate, levels: rest }, problem);
    expect(without.ok).toBe(false);
    const bare = recheck({ ...certificate, seals: {} }, problem);
    expect(bare.findings.map((finding) => finding.path)).toContain("levels[0].states[0]");
    expect(() => recheck({ ...certificate, proof: true }, problem)).toThrow(/malformed at proof/);
    expect(recheck({ ...certificate, levels: [first, first, ...rest] }, problem).ok).toBe(false);
  });
});

/** A forged certificate: changed by someone who writes the seals anew. */
function forged(certificate: Certificate, keys: readonly (string | number)[], value: unknown): unknown {
  const document = replaced(JSON.parse(JSON.stringify(certificate)), keys, value) as Certificate;
  return { ...document, seals: computeSeals(document) };
}

function valueAt(document: unknown, keys: readonly (string | number)[]): unknown {
  return keys.reduce<unknown>((at, key) => {
    if (typeof at !== "object" || at === null) throw new TypeError(`nothing at ${key}`);
    return Reflect.get(at, key);
  }, document);
}

/** Changes that make a claim false, by the shape of the path: what the claim becomes, and where the finding must lie. */
const FALSE_CLAIMS: readonly { readonly what: string; readonly at: RegExp; readonly to: (x: unknown) => unknown }[] = [
  { what: "a vector's component", at: /\.vector\.(re|im)\[\d+\]$/, to: (x) => Number(x) + 1e-3 },
  { what: "an energy", at: /states\[\d+\]\.energy$/, to: (x) => Number(x) + 1e-3 },
  { what: "the energy of a level", at: /levels\[\d+\]\.energy$/, to: (x) => Number(x) + 1e-3 },
  { what: "a label's value", at: /labels\.\w+\.re$/, to: (x) => Number(x) + 1 },
  { what: "a label's text", at: /labels\.\w+\.text$/, to: (x) => (x === "1" ? "2" : "1") },
  { what: "a label's role", at: /labels\.\w+\.role$/, to: (x) => (x === "conserved" ? "broken" : "conserved") },
  { what: "a label's status", at: /labels\.\w+\.status$/, to: (x) => (x === "not sharp" ? "measured" : "not sharp") },
  { what: "a shift", at: /shifts\[\d+\]\.value$/, to: (x) => Number(x) + 1e-6 },
  { what: "the ± of a shift", at: /shifts\[\d+\]\.plusMinus$/, to: (x) => Number(x) / 100 },
  { what: "the ± of a shift, enlarged", at: /shifts\[\d+\]\.plusMinus$/, to: (x) => 1e4 * Number(x) },
  { what: "the ± of an energy", at: /energyPlusMinus$/, to: (x) => Number(x) / 100 },
  { what: "a value at a node", at: /nodes\[\d+\]\.values\[\d+\]\[0\]$/, to: (x) => Number(x) + 0.5 },
  { what: "a gap at a node", at: /nodes\[\d+\]\.gap$/, to: (x) => Number(x) * 10 },
  { what: "a bound that counts", at: /nodes\[\d+\]\.couplings\[\d+\]\.counted$/, to: (x) => Number(x) / 100 },
  { what: "a selection rule", at: /nodes\[\d+\]\.couplings\[\d+\]\.selectionRule$/, to: (x) => Number(x ?? 1) / 100 },
  { what: "safe orders of energies", at: /\.safe\.energies$/, to: (x) => (x === "all" ? 7 : Number(x) + 1) },
  { what: "safe orders of states", at: /\.safe\.states$/, to: (x) => (x === "all" ? 7 : "all") },
  {
    what: "the commutator's verdict",
    at: /commutators\[\d+\]\.verdict$/,
    to: (x) => (x === "broken" ? "commutes" : "broken"),
  },
  { what: "a commutator's norm", at: /commutators\[\d+\]\.norm$/, to: (x) => Number(x) + 1e-3 },
  { what: "an operator's hash", at: /operators\[\d+\]\.hash$/, to: () => "00" },
  { what: "a degeneracy", at: /\.degeneracy$/, to: (x) => Number(x) + 1 },
  { what: "a gap to the next level", at: /\.gap(Below|Above)$/, to: (x) => (x === null ? 1 : Number(x) * 1.5) },
  { what: "a verdict", at: /verdict$/, to: (x) => (x === "good" ? "not good" : "good") },
  { what: "the number of levels", at: /^whole\.levels$/, to: (x) => Number(x) + 5 },
  { what: "the enclosure of energies", at: /^whole\.energyEnclosure$/, to: (x) => Number(x) / 100 },
];

describe("a false claim is caught although the seals were written anew", () => {
  for (const { what, at, to } of FALSE_CLAIMS) {
    it(what, () => {
      let tried = 0;
      const missed: string[] = [];
      for (const name of SMALL) {
        const { problem, certificate } = certificateOf(name);
        for (const leaf of leavesOf(JSON.parse(JSON.stringify(certificate)))) {
          if (leaf.keys[0] === "seals" || !at.test(leaf.path)) continue;
          const value = to(leaf.value);
          if (value === leaf.value) continue;
          tried++;
          if (firstFault(forged(certificate, leaf.keys, value), problem) === undefined) {
            missed.push(`${name}: ${leaf.path}: ${leaf.value} → ${value}`);
          }
        }
      }
      expect(missed).toEqual([]);
      expect(tried).toBeGreaterThan(0);
    });
  }

  it("an operator of the problem", () => {
    const { problem, certificate } = certificateOf("three kets and a label");
    const other: Problem = {
      ...problem,
      v: [
        [-1, 1e-3, 0],
        [1e-3, 0, 1],
        [0, 1, 0],
      ],
    };
    const { ok, findings } = recheck(certificate, other);
    expect(ok).toBe(false);
    expect(findings.map((finding) => finding.path)).toContain("operators[1].hash");
    expect(findings.map((finding) => finding.path)).toContain("levels[0].verdict");
    const moved = recheck(certificate, { ...problem, h0: { diagonal: [1, 1.001, 2] } });
    expect(moved.findings.map((finding) => finding.path)).toContain("operators[0].hash");
    expect(moved.findings.map((finding) => finding.path)).toContain("levels[0].states[1].energy");
  });

  it("a node left out, which would have shown that states share a leaf", () => {
    const { problem, certificate } = certificateOf("three kets and a label");
    const keys = ["levels", 0, "nodes"];
    expect(valueAt(certificate, keys)).toHaveLength(1);
    const { findings } = recheck(forged(certificate, keys, []), problem);
    expect(findings.map((finding) => finding.path)).toContain("levels[0].states[0].safe");
  });

  it("a level left out together with the count of levels", () => {
    const { problem, certificate } = certificateOf("two perturbations");
    const fewer = replaced(
      forged(certificate, ["levels"], certificate.levels.slice(0, 1)),
      ["whole", "levels"],
      1,
    ) as Certificate;
    const { findings } = recheck({ ...fewer, seals: computeSeals(fewer) }, problem);
    expect(findings.map((finding) => finding.path)).toContain("whole.levels");
  });

  it("a state left out of a level of which the neighbours are not certified", () => {
    const { problem, certificate } = certificateOf("one inner level of a rotor");
    const level = certificate.levels[0];
    if (level === undefined) throw new Error("no level");
    const kept = { ...level, degeneracy: 1, nodes: [], states: level.states.slice(0, 1) };
    const { findings } = recheck(forged(certificate, ["levels"], [kept]), problem);
    expect(findings.map((finding) => finding.path)).toContain("levels[0].complete");
  });

  it("a question removed and the verdict raised", () => {
    for (const name of ["an ambiguous level", "a near-degeneracy", "a merged level, λ too large"]) {
      const { problem, certificate } = certificateOf(name);
      const levels = certificate.levels.map((level) => ({ ...level, questions: [], verdict: "good" as const }));
      const document = { ...certificate, verdict: "good" as const, levels };
      const { findings } = recheck({ ...document, seals: computeSeals(document) }, problem);
      expect(findings.map((finding) => finding.path)).toContain("levels[0].questions");
    }
  });

  it("a coupling denied", () => {
    const { problem, certificate } = certificateOf("hydrogen n = 2 in a field, labels alone");
    const levels = certificate.levels.map((level) => ({ ...level, verdict: "good" as const }));
    const document = { ...certificate, verdict: "good" as const, levels };
    const { findings } = recheck({ ...document, seals: computeSeals(document) }, problem);
    expect(findings.map((finding) => finding.path)).toContain("levels[0].verdict");
  });
});

describe("what is no certificate of this problem is refused", () => {
  const { problem, certificate } = certificateOf("three kets and a label");

  it("by its dimension or the names of its operators", () => {
    const four: Problem = { h0: { diagonal: [1, 1, 2, 3] }, v: { diagonal: [1, 2, 3, 4] } };
    expect(() => recheck(certificate, four)).toThrow(expect.objectContaining({ code: "wrong-problem" }));
    const renamed: Problem = { ...problem, candidates: { B: { diagonal: [1, 0, 0] } } };
    expect(() => recheck(certificate, renamed)).toThrow(expect.objectContaining({ code: "wrong-problem" }));
  });

  it("by its form", () => {
    const bad: [unknown, string][] = [
      [undefined, ""],
      [[], ""],
      ["no JSON", ""],
      ["{}", "format"],
      [{}, "format"],
      [{ ...certificate, formatVersion: 2 }, "formatVersion"],
      [{ ...certificate, resolution: "1e-10" }, "resolution"],
      [{ ...certificate, resolution: Number.NaN }, "resolution"],
      [{ ...certificate, levels: {} }, "levels"],
      [{ ...certificate, whole: { ...certificate.whole, eta: [null] } }, "whole.eta[0]"],
    ];
    for (const [value, path] of bad) {
      expect(() => recheck(value, problem)).toThrow(
        expect.objectContaining({ code: "file", details: expect.objectContaining({ path }) }),
      );
    }
  });

  it("or says so where the numbers are too small for it", () => {
    const tiny: Problem = { h0: { diagonal: [1, 1, 2] }, v: { diagonal: [1e-200, 0, 0] } };
    const { findings } = recheck(findGoodBasis(tiny).certificate(), tiny);
    expect(findings).toContainEqual({ path: "operators[1]", message: expect.stringContaining("change the unit") });
  });
});
