import { type Problem, prepareProblem } from "../audit/problem.js";
import { GoodBasisError } from "../errors.js";
import type { Certificate } from "./certificate-format.js";
import { checkBounds } from "./recheck-bounds.js";
import { checkCommutators } from "./recheck-commutators.js";
import { checkCompleteness, isWhole } from "./recheck-complete.js";
import { checkGuard } from "./recheck-guard.js";
import { checkLabels } from "./recheck-labels.js";
import { evaluateLevel } from "./recheck-level.js";
import { checkNodes, leak, type NodeCase } from "./recheck-nodes.js";
import { ownProblem } from "./recheck-operators.js";
import { readCertificate } from "./recheck-read.js";
import { parsedCertificate } from "./recheck-reader.js";
import { Ledger, type RecheckReport } from "./recheck-report.js";
import { checkSafeOrders } from "./recheck-safe.js";
import { checkSectors } from "./recheck-sectors.js";
import { rebuildTree } from "./recheck-tree.js";
import { noteUnchecked, termsOf } from "./recheck-unchecked.js";
import { Bench, gatherVectors } from "./recheck-vectors.js";
import { checkLevelVerdict, checkVerdict } from "./recheck-verdict.js";
import { checkWhole } from "./recheck-whole.js";
import { computeSeals } from "./seal.js";

export type { RecheckFinding, RecheckReport, RecheckTerms } from "./recheck-report.js";

/** Operators smaller than this (or larger than its inverse) would lose their squares to underflow. */
const SMALLEST_NORM = 2 ** -400;

/**
 * Checks a certificate again from the operators, with code of its own: no product, bound or eigenvalue is taken from the code
 * that wrote it.
 *
 * The seals tell where a file was altered. Independently of them every claim is checked: vectors, energies, labels, commutators,
 * the evidence of every node, shifts and their ±, safe orders, completeness of the levels, the denominators guard, and the
 * verdicts. Bounds need not be equal: a claim fails where it covers less than what is certain (what was computed less its rounding,
 * and the entries' uncertainty) and seven eighths of the own allowance for rounding, or so much more that it must belong to something else.
 *
 * `notChecked` lists what the operators could not be held against: of a certificate of some levels only, the ratios of the guard, values
 * of the second-order operator and what rests on them, sectors, and the bounds over the whole basis (checked as far as the certified
 * states bear on them); the same ratios and values where sectors are too large to be multiplied out again in reasonable time. That
 * completeness cannot be counted (a connected part of H0 has more than 1500 kets and not all levels are certified) is a finding.
 * Resolution, λ and threshold are choices of whoever asked, given as `relativeTo`; the words of `limitedBy` and the library's version
 * are sealed but claim nothing.
 *
 * @param certificate - what `outcome.certificate()` wrote, or its JSON, as text or parsed
 * @param problem - the problem that it is about, with the same operators
 * @returns `ok`, the number of claims checked, every claim that does not stand with its path in the JSON, and what was not checked
 * @throws GoodBasisError `file` - a malformed certificate, or text that is not JSON; `wrong-problem` - another dimension or other operator names; and what
 *   reading a problem throws
 *
 * @example
 * ```ts
 * import { findGoodBasis, recheck } from "goodbasis";
 *
 * const problem = {
 *   h0: { diagonal: [1, 1, 2] },
 *   v: [[-1, 0, 0], [0, 0, 1], [0, 1, 0]],
 *   candidates: { A: { diagonal: [1, 0, 0] } },
 * };
 * const json = JSON.stringify(findGoodBasis(problem).certificate());
 * const report = recheck(json, problem);
 * if (!report.ok) throw new Error(report.findings.map((finding) => `${finding.path}: ${finding.message}`).join("\n"));
 * ```
 */
export function recheck(certificate: unknown, problem: Problem): RecheckReport {
  const claims = readCertificate(parsedCertificate(certificate));
  const prepared = prepareProblem(problem);
  const own = ownProblem(prepared);
  const ledger = new Ledger();
  requireSameNames(
    claims,
    [own.h0, ...own.perturbations, ...own.candidates].map((x) => x.name),
    own.n,
  );
  checkSeals(ledger, claims);
  checkOperators(ledger, claims, [own.h0, ...own.perturbations, ...own.candidates], own.perturbations.length);
  ledger.claim(
    claims.unit === prepared.unit,
    "unit",
    () => `claimed "${claims.unit}", the problem has "${prepared.unit}"`,
  );
  const candidates = checkCommutators(ledger, claims, own);
  const vectors = gatherVectors(claims);
  const bench = new Bench(vectors);
  const trees = claims.levels.map((level, l) => rebuildTree(ledger, `levels[${l}]`, level));
  const all = isWhole(claims);
  const residuals = checkLabels(ledger, claims, prepared, own, candidates, vectors, bench, trees, all);
  const sectors = all ? checkSectors(ledger, claims, own, candidates, residuals, vectors, bench) : undefined;
  const levels = claims.levels.map((level, l) => {
    const tree = trees[l] as (typeof trees)[number];
    const evaluated = evaluateLevel(own, vectors, bench, level, l, tree);
    const given: NodeCase = {
      certificate: claims,
      problem: own,
      candidates,
      residuals,
      level,
      l,
      first: vectors.first[l] as number,
      own: evaluated,
    };
    const couplings = checkNodes(ledger, given);
    const leaks = own.perturbations.map((_, p) => leak(given, p));
    checkBounds(ledger, claims, own, level, l, evaluated, leaks);
    checkSafeOrders(ledger, given);
    checkGuard(ledger, claims, own, level, l, evaluated, sectors?.sectors);
    checkLevelVerdict(ledger, given, couplings);
    return evaluated;
  });
  checkCompleteness(ledger, claims, own, vectors, bench, levels);
  checkWhole(ledger, claims, own, candidates, residuals, levels, sectors);
  checkVerdict(ledger, claims);
  noteUnchecked(ledger, claims, sectors?.sectors !== undefined);
  const relativeTo = termsOf(claims);
  return { ...ledger.report(), verdict: claims.verdict, ...(relativeTo === undefined ? {} : { relativeTo }) };
}

function requireSameNames({ n, operators }: Certificate, names: readonly string[], expected: number): void {
  if (n !== expected) {
    throw new GoodBasisError(
      "wrong-problem",
      `recheck: the certificate is about ${n} kets, the problem has ${expected}; pass the problem that it was written for`,
      { certificate: n, problem: expected },
    );
  }
  const listed = operators.map((operator) => operator.name);
  if (listed.length === names.length && names.every((name, k) => name === listed[k])) return;
  throw new GoodBasisError(
    "wrong-problem",
    `recheck: the certificate is about the operators ${listed.join(", ")}, the problem has ${names.join(", ")}; ` +
      "pass the problem that it was written for, its operators in the same order",
    { certificate: listed, problem: names },
  );
}

/** The seals: which sections were altered after they were written. */
function checkSeals(ledger: Ledger, claims: Certificate): void {
  const expected = computeSeals(claims);
  for (const [section, seal] of Object.entries(expected)) {
    const claimed = Object.hasOwn(claims.seals, section) ? claims.seals[section] : undefined;
    ledger.claim(claimed === seal, section, () =>
      claimed === undefined
        ? "this section has no seal: its seal was removed, or the section was added after writing"
        : "this section does not agree with its seal: one of the two was altered after writing",
    );
  }
  for (const section of Object.keys(claims.seals)) {
    ledger.claim(
      Object.hasOwn(expected, section),
      Object.hasOwn(expected, section) ? section : "seals",
      () =>
        `there is a seal for "${section}", but no such section: it was removed after writing, or the seal was added`,
    );
  }
}

/** The operators by role and hash. */
function checkOperators(
  ledger: Ledger,
  { operators }: Certificate,
  own: readonly { readonly name: string; readonly operator: { readonly hash: string; readonly norm: number } }[],
  perturbations: number,
): void {
  operators.forEach((claimed, k) => {
    const role = k === 0 ? "h0" : k <= perturbations ? "perturbation" : "candidate";
    ledger.claim(
      claimed.role === role,
      `operators[${k}].role`,
      () => `${claimed.name} is listed as ${claimed.role} where a ${role} belongs`,
    );
    const norm = own[k]?.operator.norm ?? 0;
    ledger.claim(
      norm === 0 || (norm > SMALLEST_NORM && norm < 1 / SMALLEST_NORM),
      `operators[${k}]`,
      () =>
        `not checked: ‖${claimed.name}‖ is about ${norm}, whose squares leave the range of doubles; change the unit`,
    );
    const hash = own[k]?.operator.hash ?? "";
    ledger.claim(
      claimed.hash === hash,
      `operators[${k}].hash`,
      () =>
        `${claimed.name} is not the operator that the certificate was written for: claimed ${claimed.hash}, found ${hash}`,
    );
  });
}
