import { describe, expect, it } from "vitest";
import { findGoodBasis } from "../../src/certify/find.js";
import { recheck } from "../../src/certify/recheck.js";
import { CASES } from "./recheck-problems.js";

describe("recheck passes what findGoodBasis wrote", () => {
  for (const [name, { problem, options, verdict }] of Object.entries(CASES)) {
    it(name, () => {
      const outcome = findGoodBasis(problem, options);
      expect(outcome.verdict).toBe(verdict);
      const certificate = outcome.certificate();
      const report = recheck(certificate, problem);
      expect(report.findings).toEqual([]);
      expect(report.ok).toBe(true);
      expect(report.checked).toBeGreaterThan(50);
      expect(recheck(JSON.parse(JSON.stringify(certificate)), problem)).toEqual(report);
      expect(recheck(JSON.stringify(certificate), problem)).toEqual(report);
      expect(recheck(`\uFEFF${JSON.stringify(certificate, undefined, 2)}`, problem)).toEqual(report);
    });
  }
});

it("a certificate is written anew each time: changes of one reach neither the next nor the study", () => {
  for (const { problem, options } of Object.values(CASES).slice(0, 6)) {
    const outcome = findGoodBasis(problem, options);
    const text = JSON.stringify(outcome.certificate());
    const spoil = (value: unknown): void => {
      if (typeof value !== "object" || value === null) return;
      for (const [key, item] of Object.entries(value)) {
        spoil(item);
        Reflect.set(value, key, 42);
      }
    };
    spoil(outcome.certificate());
    expect(JSON.stringify(outcome.certificate())).toBe(text);
  }
});
