import { describe, expect, test } from "vitest";
import { auditCommutators } from "../../src/audit/audit.js";
import { findGoodBasis } from "../../src/certify/find.js";
import type { Outcome } from "../../src/certify/outcome.js";
import { formatAudit } from "../../src/report/format-audit.js";
import { formatOutcome } from "../../src/report/format-outcome.js";
import { formatRecheck } from "../../src/report/format-recheck.js";
import { typesetMessage } from "../../src/report/sentences.js";
import { doublet, ring, stark } from "./problems.js";

const between = (text: string, from: string, to: string): string[] => {
  const lines = text.split("\n");
  const start = lines.indexOf(from);
  const end = lines.indexOf(to);
  if (start < 0 || end < start) throw new Error(`no "${from}" before "${to}" in\n${text}`);
  return lines.slice(start + 1, end);
};

describe("formatAudit", () => {
  test("names what is conserved, what is not, and why", () => {
    expect(formatAudit(auditCommutators(stark())).split("\n")).toEqual([
      "AUDIT: 1 of 2 candidates conserved",
      "",
      "  candidate  kind       with H0    with V           verdict",
      `  ${"─".repeat(76)}`,
      "  L2         Hermitian  0 exactly  broken, 8.74301  dropped, names levels only",
      "  Lz         Hermitian  0 exactly  0 exactly        conserved",
      "",
      "  L2 does not commute with V: ‖[L2, V]‖ = 8.74301 (Frobenius); largest elements 6 at ⟨2s|…|2p0⟩,",
      "      1.49 at ⟨1s|…|2p0⟩.",
    ]);
  });

  test("conserved candidates that do not commute are a finding, with the sets that can be used", () => {
    const text = formatAudit(auditCommutators(ring()));
    expect(text).toContain("AUDIT: 2 of 2 candidates conserved");
    expect(text).toContain("Conserved, but not together\n  T does not commute with R: ‖[T, R]‖ = 3.4641 (Frobenius)");
    expect(text.endsWith("Sets that commute\n  T\n  R")).toBe(true);
  });

  test("does without candidates", () => {
    expect(formatAudit(auditCommutators({ h0: { diagonal: [0] }, v: [[1]] }))).toBe(
      "AUDIT: 0 of 0 candidates conserved\n\n  none given: nothing but H0 and V is there to label states",
    );
  });
});

describe("formatOutcome", () => {
  test("good: verdict, levels, evidence, and what it is worth", () => {
    const text = formatOutcome(findGoodBasis(stark(), { lambda: 0.01 }));
    expect(text.split("\n").slice(0, 2)).toEqual([
      "GOOD: V couples no two states inside any level studied",
      "5 kets, 2 levels of H0, all studied; energies in Eh; couplings below 1e−10 ‖V‖ count as vanished",
    ]);
    const [head, , first, second] = between(text, "Levels", "What it is worth");
    expect(head?.replace(/ {2,}/g, " | ")).toBe(
      " | level | E0 [Eh] | states | verdict | told apart by | |V_μν| ≤ [Eh] | guard | safe E | safe ψ",
    );
    expect(first?.trim().split(/ {2,}/)).toEqual(["0", "−0.5", "1", "good", "—", "—", "0.02", "all", "all"]);
    expect(second?.trim().split(/ {2,}/)).toEqual([
      "1",
      "−0.125",
      "4",
      "good",
      "Lz, V",
      expect.stringMatching(/^\d(\.\d)?e−1[4-6]$/),
      "0.02",
      "2",
      "0",
    ]);
    expect(text).toMatch(/exact for a nearby model: ‖H0 − H0′‖ ≤ \S+ Eh, ‖V − V′‖ ≤ \S+ Eh\./);
    expect(text).toContain("recheck");
  });

  test("not good: the pairs by name, their size and unit, and what would help", () => {
    const text = formatOutcome(findGoodBasis(stark(), { depth: "labels", lambda: 0.01 }));
    expect(text.split("\n")[0]).toBe("NOT GOOD: V couples states inside 1 of 2 levels, by up to 3 Eh");
    const [head, , pair] = between(text, "What spoils it", "What it is worth");
    expect(head?.trim().split(/ {2,}/)).toEqual(["level", "by", "size [Eh]", "between", "and"]);
    expect(pair?.trim().split(/ {2,}/)).toEqual([
      "1",
      "V",
      expect.stringMatching(/^3 ± \d(\.\d)?e−1\d$/),
      "|2s⟩ (L2=0, Lz=0)",
      "|2p0⟩ (L2=1, Lz=0)",
    ]);
    expect(text).toContain(
      "What would help: a conserved candidate that tells these states apart, or let V itself finish",
    );
  });

  test("not good for two perturbations at once: another advice", () => {
    const v = {
      x: [
        [0, 1],
        [1, 0],
      ],
      z: { diagonal: [1, -1] },
    };
    const text = formatOutcome(findGoodBasis({ h0: { diagonal: [0, 0] }, v }));
    expect(text).toMatch(/^NOT GOOD: [xz] couples states inside 1 of 1 level, by up to \d/);
    expect(text.replace(/\s+/g, " ")).toContain("no basis is good for all perturbations at once");
    // both states have the same largest ket, so they are told apart by number
    expect(text).toMatch(/state 0, mostly \|0⟩ {2}state 1, mostly \|0⟩/);
    expect(text).toContain("perturbations x, z");
  });

  test("undecided: the questions, with numbers and the next step", () => {
    const text = formatOutcome(
      findGoodBasis({
        h0: { diagonal: [0, 1e-9, 1] },
        v: [
          [0, 0, 0.1],
          [0, 0, 0.1],
          [0.1, 0.1, 0],
        ],
      }),
    );
    expect(text.split("\n")[0]).toBe("UNDECIDED: 2 questions open at 2 of 3 levels");
    const open = between(text, "What is open", "What it is worth").join(" ").replace(/\s+/g, " ");
    expect(open).toContain("level 0 (E0 = 0), near-degenerate: at λ = 1 (not stated), V couples");
    expect(open).toContain("Merge the two levels (levelWidth)");
    expect(text).toContain("No label is used.");
  });

  test("conserved candidates that do not commute: the sets, and the one in use", () => {
    const text = formatOutcome(findGoodBasis(ring()));
    const rows = between(text, "Sets that commute", "Levels").map((line) => line.trim().split(/ {2,}/));
    expect(rows.slice(2, 4)).toEqual([
      ["T", "6", "1", "0", "used"],
      ["R", "2", "4", "7"],
    ]);
  });

  test("long lists are cut, those that are not good first, and the rest is counted", () => {
    const n = 12;
    const v = Array.from({ length: 2 * n }, (_, i) =>
      Array.from({ length: 2 * n }, (_, k) => (i < 4 && k < 4 && i !== k && i >> 1 === k >> 1 ? 1 : 0)),
    );
    const h0 = { diagonal: Array.from({ length: 2 * n }, (_, i) => -(i >> 1)) };
    const outcome = findGoodBasis({ h0, v }, { depth: "labels" });
    const text = formatOutcome(outcome, { levels: 3, findings: 1 });
    const lines = between(text, "Levels", "What spoils it");
    expect(lines.filter((line) => line.includes("not good"))).toHaveLength(2);
    expect(lines).toContain("  … 9 more levels (9 undecided)");
    expect(text).toContain("  … 1 more pair\n");
    expect(text).toMatch(/ {2}… \d+ more questions?\n/);
  });

  test("prose keeps the width asked for, and nothing is NaN or undefined", () => {
    const outcomes: Outcome[] = [
      findGoodBasis(stark(), { lambda: 0.01 }),
      findGoodBasis(stark(), { depth: "labels", lambda: 0.01, levels: { lowest: 1 } }),
      findGoodBasis(ring()),
      findGoodBasis(doublet()),
      findGoodBasis({ h0: { diagonal: [0] }, v: [[0]] }),
      findGoodBasis({ h0: { diagonal: [0, 0, 0] }, v: { diagonal: [0, 0, 0] } }),
    ];
    for (const outcome of outcomes) {
      const text = formatOutcome(outcome, { width: 72 });
      expect(text).not.toMatch(/NaN|undefined|\d-\d|e-\d/);
      const worth = text.slice(text.indexOf("What it is worth")).split("\n");
      expect(Math.max(...worth.map((line) => [...line].length))).toBeLessThanOrEqual(72);
      expect(text).toBe(formatOutcome(outcome, { width: 72 }));
    }
  });
});

test("formatRecheck names every finding", () => {
  expect(formatRecheck({ ok: true, checked: 128, findings: [], notChecked: [] })).toBe(
    "VERIFIED: all 128 statements of the certificate hold for these operators",
  );
  const findings = [
    { path: "levels[0].tilt", message: "claimed 1e−9, found at least 2e−9" },
    { path: "seals.whole", message: "altered" },
  ];
  expect(formatRecheck({ ok: false, checked: 130, findings, notChecked: [] }, { findings: 1 }).split("\n")).toEqual([
    "REFUSED: 2 findings among 130 statements",
    "",
    "  levels[0].tilt",
    "    claimed 1e−9, found at least 2e−9",
    "  … 1 more finding",
  ]);
});

test("typesetMessage leaves hyphens in words alone", () => {
  expect(typesetMessage("in-level elements below 1e-9, above 2e+7")).toBe("in-level elements below 1e−9, above 2e7");
});
