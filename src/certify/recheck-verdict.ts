import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import { smallerGap } from "./recheck-bounds.js";
import type { OwnLevel } from "./recheck-level.js";
import type { OwnCouplings } from "./recheck-nodes.js";
import type { OwnProblem } from "./recheck-operators.js";
import type { Ledger } from "./recheck-report.js";

/** "Far below": the width of a level against the gap around it and the splittings inside it, as the library states it. */
const FAR_BELOW = 1e-3;

/** Energies closer than this fraction of ‖H0‖ count as one level when nobody states a width. */
const LEVEL_WIDTH = 2 ** -42;

type Code = CertifiedLevel["questions"][number];

/** Checks the verdict on one level against the own bounds, and its questions against what they ask. */
export function checkLevelVerdict(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  level: CertifiedLevel,
  l: number,
  own: OwnLevel,
  couplings: OwnCouplings,
): void {
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
  checkQuestions(ledger, certificate, problem, level, l, own, coupled);
}

function checkQuestions(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  level: CertifiedLevel,
  l: number,
  own: OwnLevel,
  coupled: boolean,
): void {
  const together = own.tree.together.some((count) => count > 1);
  const expected: Record<Code, boolean | undefined> = {
    // only a study that stops at labels asks this
    "labels-insufficient": together && !coupled ? undefined : false,
    "coupling-undecided": couplingUndecided(certificate, problem, level, own),
    "ambiguous-level": ambiguous(certificate, level, own),
    "merged-level": merged(problem, level, own),
    "near-degenerate": level.guard.outside > level.guard.refuseAbove,
    "strong-mixing": level.guard.stated && level.guard.inside > level.guard.refuseAbove,
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

/**
 * Whether the level's width is not far below the gap around it and what V or W separates inside it, or shifts that ought to be
 * equal are not equal far below what W separates; undefined where the own evaluation does not decide the last.
 */
function ambiguous({ whole }: Certificate, level: CertifiedLevel, own: OwnLevel): boolean | undefined {
  const grow = 1 + 2 * level.orthonormality;
  const residual = level.states.reduce((most, state) => Math.max(most, state.energyPlusMinus), 0) / grow;
  const width = level.spread + 2 * residual;
  if (width > FAR_BELOW * (smallerGap(level) - 2 * whole.energyEnclosure)) return true;
  const { lambda } = level.guard;
  let answer: boolean | undefined = false;
  for (const node of splitting(level)) {
    const scale = node.kind === "perturbation" ? lambda : lambda * lambda;
    if (width > FAR_BELOW * scale * node.gap) return true;
    if (node.kind === "perturbation") continue;
    const shifts = shiftSpread(node, own);
    const limit = FAR_BELOW * lambda * node.gap;
    if (shifts.low > limit) return true;
    if (shifts.high > limit) answer = undefined;
  }
  return answer;
}

/** How far the first-order shifts of the states below a node may differ: the least and the most that an evaluation may say. */
function shiftSpread(node: CertifiedLevel["nodes"][number], own: OwnLevel): { low: number; high: number } {
  const elements = own.perturbations[0];
  if (elements === undefined) return { low: 0, high: 0 };
  const shifts = node.states.flat().map((state) => elements.diagonal[state] ?? 0);
  const range = Math.max(...shifts) - Math.min(...shifts);
  return {
    low: Math.max(0, range - 2 * elements.looseError) + elements.error / 2,
    high: 2 * range + 8 * elements.looseError,
  };
}

/** The nodes at which V or the second-order operator tells states apart. */
function splitting(level: CertifiedLevel): CertifiedLevel["nodes"] {
  return level.nodes.filter((node) => node.kind === "perturbation" || node.kind === "second order");
}

/** Whether V tells states apart that were merged over a real spread with no λ stated; undefined where that is not to be seen. */
function merged(problem: OwnProblem, level: CertifiedLevel, own: OwnLevel): boolean | undefined {
  if (level.guard.stated || splitting(level).length === 0) return false;
  const { h0 } = problem;
  const rounding =
    LEVEL_WIDTH * h0.operator.norm + 32 * h0.operator.error + 8 * Math.sqrt(problem.n) * 2 ** -53 * h0.operator.norm;
  const spread = new Map<number, { low: number; high: number }>();
  own.tree.labelGroup.forEach((group, state) => {
    const energy = own.h0.diagonal[state] as number;
    const range = spread.get(group);
    if (range === undefined) spread.set(group, { low: energy, high: energy });
    else spread.set(group, { low: Math.min(range.low, energy), high: Math.max(range.high, energy) });
  });
  let widest = 2 * own.h0.largestOff;
  for (const { low, high } of spread.values()) widest = Math.max(widest, high - low);
  if (widest > 4 * rounding) return true;
  return level.spread <= rounding / 4 ? false : undefined;
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
