import { expect, it } from "vitest";
import { checkOutcome, checkWhole } from "../support/check-bounds.js";
import { exactProblem, type ExactPlan, type Inside } from "../support/exact-problem.js";
import { generator } from "../numerics/eigen/matrices.js";

const from = Number(process.env["FROM"] ?? 1), to = Number(process.env["TO"] ?? 150);
const scales = (process.env["SCALES"] ?? "0").split(",").map(Number);
it("hunt", () => {
  const seen = new Map<string, number>(); const kinds = new Map<string, string[]>(); let good = 0, checked = 0; const t0 = Date.now();
  for (let seed = from; seed < to; seed++) {
    const r = generator(seed * 7919 + 5);
    const pick = <T>(l: readonly T[]): T => l[Math.min(l.length - 1, Math.floor((r() + 0.5) * l.length))] as T;
    const plan: ExactPlan = {
      seed, n: pick([1, 2, 3, 4, 5, 6, 7, 8, 9, 10]), complex: pick([true, false]),
      energies: pick([[0], [1], [0, 1], [0, 2 ** -20], [1, 1 + 2 ** -20], [1, 1 + 2 ** -20, 3], [2 ** -18, 1, 1024], [-5, 0, 5], [3, 3 + 2 ** -10]]),
      labels: pick([[], [2], [3], [4], [2, 2], [2, 3], [1]]), unitary: pick([true, false]),
      inside: pick(["full", "close", "scalar", "zero"] as Inside[]), perturbations: pick([1, 1, 1, 2]),
      breaking: pick([0, 0, 0, 2 ** -36, 2 ** -44, 2 ** -50, 2 ** -20]), scale: pick(scales), uncertainty: pick(["exact", "default"] as const),
    };
    const problem = exactProblem(plan);
    const depth = pick(["full", "full", "labels", "first order"] as const);
    try {
    const { claims, outcome } = checkOutcome(problem, { depth });
    const w = checkWhole(problem);
    checked += claims.checked + w.claims.checked;
    seen.set(outcome.verdict, (seen.get(outcome.verdict) ?? 0) + 1);
    if (outcome.verdict === "undecided") for (const q of new Set(outcome.questions.map((q) => q.code))) seen.set(q, (seen.get(q) ?? 0) + 1);
    for (const b of [...claims.broken, ...w.claims.broken]) { const kind = b.replace(/[-\d.e+]+/g, "#").slice(0, 60); const l = kinds.get(kind) ?? []; l.push(`seed ${seed} ${JSON.stringify(plan)} ${depth}: ${b}`); kinds.set(kind, l); }
    } catch (e) { const kind = "THROW " + String((e as Error).message).slice(0, 60); const l = kinds.get(kind) ?? []; l.push(`seed ${seed} ${JSON.stringify(plan)} ${depth} ${(e as Error).stack?.split("\n").slice(0, 5).join(" | ")}`); kinds.set(kind, l); }
  }
  console.log(JSON.stringify([...seen]), checked, Date.now() - t0, "ms");
  for (const [k, l] of kinds) console.log(k, l.length, "\n   ", l.slice(0, 3).join("\n    "));
});
