import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import { isAmbiguous, isMerged } from "./recheck-ambiguous.js";
import type { OwnLevel } from "./recheck-level.js";
import type { NodeCase, OwnCouplings } from "./recheck-nodes.js";
import type { OwnProblem } from "./recheck-operators.js";
import type { Ledger } from "./recheck-report.js";

type Code = CertifiedLevel["questions"][number];

/** Checks the verdict on one level against the own bounds, and its questions against what they ask. */
export function checkLevelVerdict(ledger: Ledger, given: NodeCase, couplings: OwnCouplings): void {
  const { certificate, problem, level, l, own } = given;
  const path = `levels[${l}].verdict`;
  const { resolution } = certificate;
  let coupled = false;
  problem.perturbations.forEach((v, p) => {
    const elements = own.perturbations[p];
    if (elements === undefined) return;
    const threshold = resolution * v.scale;
    const bound = couplings.bounds[p] ?? 0;
    const { atLeast, first, second } = elements.worst;
    const sure = level.verdict === "not good" ? atLeast : atLeast - 64 * elements.looseError;
    if (sure > threshold) coupled = true;
    if (level.verdict === "good") {
      ledger.claim(
        bound <= threshold,
        path,
        () =>
          `claimed good, but elements of ${v.name} inside the level are only bounded by ${bound}, above ${threshold}`,
      );
    }
    if (level.verdict !== "not good") {
      ledger.claim(
        sure <= threshold,
        path,
        () => `claimed ${level.verdict}, but ${v.name} couples states ${first} and ${second} by at least ${atLeast}`,
      );
    }
  });
  if (level.verdict === "not good") {
    ledger.claim(
      coupled,
      path,
      () => "claimed not good, but no element inside the level is certainly above the resolution",
    );
  } else {
    const verdict = level.questions.length === 0 ? "good" : "undecided";
    ledger.claim(
      level.verdict === verdict,
      path,
      () => `claimed ${level.verdict}, but ${level.questions.length} questions make it ${verdict}`,
    );
  }
  checkQuestions(ledger, given, coupled);
}

function checkQuestions(ledger: Ledger, given: NodeCase, coupled: boolean): void {
  const { certificate, problem, level, l, own } = given;
  const together = own.tree.together.some((count) => count > 1);
  const expected: Record<Code, boolean | undefined> = {
    // only a study that stops at labels asks this
    "labels-insufficient": together && !coupled ? undefined : false,
    "coupling-undecided": couplingUndecided(certificate, problem, level, own),
    "ambiguous-level": isAmbiguous(given),
    "merged-level": isMerged(given),
    "near-degenerate": level.guard.outside > level.guard.refuseAbove,
    "strong-mixing": level.guard.inside > level.guard.refuseAbove,
  };
  for (const [code, asked] of Object.entries(expected)) {
    const listed = level.questions.some((question) => question === code);
    ledger.claim(
      asked === undefined || asked === listed,
      `levels[${l}].questions`,
      () => `"${code}" is ${listed ? "" : "not "}among the questions, but the level's numbers say otherwise`,
    );
  }
}

function couplingUndecided(
  { resolution }: Certificate,
  problem: OwnProblem,
  level: CertifiedLevel,
  own: OwnLevel,
): boolean | undefined {
  let open: boolean | undefined = false;
  problem.perturbations.forEach((v, p) => {
    const threshold = resolution * v.scale;
    const atLeast = own.perturbations[p]?.worst.atLeast ?? 0;
    if ((level.couplings[p]?.largest ?? 0) <= threshold) return;
    if (atLeast > threshold + 64 * (own.perturbations[p]?.looseError ?? 0)) return;
    // between the two evaluations' own errors either answer is honest
    open = atLeast > threshold - 64 * (own.perturbations[p]?.looseError ?? 0) && open !== true ? undefined : true;
  });
  return open;
}

/** Checks the verdict on the whole from the verdicts on its levels. */
export function checkVerdict(ledger: Ledger, { verdict, levels, resolution }: Certificate): void {
  ledger.claim(
    resolution > 0 && resolution < 1,
    "resolution",
    () => `claimed ${resolution}; a resolution lies between 0 and 1`,
  );
  const verdicts = levels.map((level) => level.verdict);
  const found = verdicts.includes("not good") ? "not good" : verdicts.includes("undecided") ? "undecided" : "good";
  ledger.claim(verdict === found, "verdict", () => `claimed ${verdict}; its levels make it ${found}`);
}
