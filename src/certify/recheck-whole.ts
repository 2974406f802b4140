import type { Certificate } from "./certificate-format.js";
import { rootSum } from "./recheck-bounds.js";
import type { OwnCandidate } from "./recheck-commutators.js";
import { isWhole } from "./recheck-complete.js";
import type { OwnResiduals } from "./recheck-labels.js";
import type { OwnLevel } from "./recheck-level.js";
import { type OwnOperator, type OwnProblem, productRounding } from "./recheck-operators.js";
import type { OwnCommutator } from "./recheck-own-commutator.js";
import type { Ledger } from "./recheck-report.js";
import { APART, type OwnSectors, smallestApart } from "./recheck-sectors.js";

/** A level merged over more than this fraction of ‖H0‖ has other vectors than the energies were found with. */
const MERGED = 2 ** -40;

/** Checks what is said of the whole space: orthonormality, energies, and the distance to an exactly symmetric model. */
export function checkWhole(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  residuals: readonly OwnResiduals[],
  own: readonly OwnLevel[],
  sectors: OwnSectors | undefined,
): void {
  const { whole, levels } = certificate;
  const { h0 } = problem;
  // the bound is about the vectors that the energies were found with; states of a level may be others, by its spread
  const { tight, certain } = residualsTogether(h0, own);
  const spread = rootSum(levels.map((level) => level.spread * Math.sqrt(level.states.length)));
  const merged = levels.some((level) => level.spread > MERGED * h0.norm);
  const everything = isWhole(certificate) && !merged;
  const loose = rootSum(own.map((level) => rootSum(level.looseResiduals)));
  ledger.bound(
    "whole.energyResidual",
    "the norm of all residuals H0 q − E q",
    whole.energyResidual,
    Math.max(0, tight - spread),
    everything ? loose + spread + Math.sqrt(problem.n) * h0.looseRounding : Number.POSITIVE_INFINITY,
    merged ? 0 : Math.max(0, certain - spread),
  );
  const enclosure =
    whole.energyResidual * (1 + whole.orthonormality) + 2 * h0.operator.norm * whole.orthonormality + h0.operator.error;
  ledger.near(
    "whole.energyEnclosure",
    "the enclosure of every energy",
    whole.energyEnclosure,
    enclosure,
    1e-9 * enclosure,
  );
  const step = own.reduce((most, level) => Math.max(most, level.orthonormality.tight), 0);
  const seen = own.reduce((most, level) => Math.max(most, level.orthonormalityAtLeast), 0);
  ledger.claim(
    whole.orthonormality >= seen - step - productRounding(problem.n),
    "whole.orthonormality",
    () => `claimed to be at most ${whole.orthonormality}, but an overlap inside a level is off by ${seen}`,
  );
  ledger.claim(whole.orthonormality < 0.5, "whole.orthonormality", () => `claimed ${whole.orthonormality}: no basis`);
  const eta = (p: number, norm: number, of: (c: OwnCandidate) => OwnCommutator | undefined, inside: number): void => {
    const path = p < 0 ? "whole.eta0" : `whole.eta[${p}]`;
    const claimed = p < 0 ? whole.eta0 : (whole.eta[p] ?? 0);
    const { low, certain, high } = modelDistance(certificate, problem, candidates, residuals, norm, of);
    const uneven = p < 0 ? { low: 0, high: 0 } : unevenness(certificate, own, p);
    const everywhere = isWhole(certificate) || candidates.every((candidate) => candidate.role !== "conserved");
    ledger.bound(
      path,
      "the distance to an exactly symmetric model",
      claimed,
      low + uneven.low,
      everywhere ? high + uneven.high : Number.POSITIVE_INFINITY,
      certain + uneven.low,
    );
    const between = (p < 0 ? sectors?.h0 : sectors?.perturbations[p]) ?? 0;
    const element = Math.max(inside, between - 2.01 * norm * whole.orthonormality);
    ledger.claim(
      claimed >= element,
      path,
      () => `claimed to be at most ${claimed}, but an element between different labels alone is ${element}`,
    );
    const broken = sectors === undefined ? 0 : leastDistance(certificate, problem, candidates, residuals, norm, of);
    ledger.claim(
      claimed >= broken,
      path,
      () => `claimed to be at most ${claimed}, but a commutator with a label that the sectors carry leaves ${broken}`,
    );
  };
  eta(-1, h0.norm, (c) => c.withH0, 0);
  const counted = ledger.claim(
    whole.eta.length === problem.perturbations.length,
    "whole.eta",
    () => `${whole.eta.length} distances for ${problem.perturbations.length} perturbations`,
  );
  if (!counted) return;
  problem.perturbations.forEach((v, p) => {
    let element = 0;
    levels.forEach((level, l) => {
      level.nodes.forEach((node, place) => {
        const elements = own[l]?.perturbations[p];
        if (node.kind !== "label" || elements === undefined) return;
        element = Math.max(element, (elements.atNode[place] as number) - elements.looseError);
      });
    });
    eta(p, v.norm, (c) => c.withPerturbations[p], element);
  });
}

/**
 * The norm of all residuals, whatever vectors of the levels they are taken on: the Frobenius norm R of what was computed is the same for
 * all, but an error e of each of d vectors adds to the size of single residuals, which is not: together at least √(R² + 2eR + d e²).
 */
function residualsTogether(h0: OwnOperator, own: readonly OwnLevel[]): { tight: number; certain: number } {
  const { rounding, operator } = h0;
  const count = own.reduce((sum, level) => sum + level.residuals.length, 0);
  const all = own.map((level) => rootSum(level.residuals.map((x) => Math.max(0, x - rounding - operator.error))));
  const sure = own.map((level) => rootSum(level.certainResiduals.map((x) => x - operator.error)));
  const together = (r: number, e: number): number => Math.sqrt(r * r + 2 * e * r + count * e * e) * (1 - 1e-12);
  return {
    tight: together(rootSum(all), rounding + operator.error),
    certain: together(rootSum(sure), operator.error),
  };
}

/** How far V is from scalar on the blocks that the second-order operator refines: spread of the shifts, and what is off the diagonal. */
function unevenness({ levels }: Certificate, own: readonly OwnLevel[], p: number): { low: number; high: number } {
  let low = 0;
  let high = 0;
  levels.forEach((level, l) => {
    const elements = own[l]?.perturbations[p];
    const blocks = level.nodes.filter((node) => node.kind === "second order");
    if (blocks.length === 0 || elements === undefined) return;
    const off = level.couplings[p]?.offDiagonal ?? 0;
    for (const node of blocks) {
      const shifts = node.states.flat().map((state) => elements.diagonal[state] ?? 0);
      const range = Math.max(...shifts) - Math.min(...shifts);
      low = Math.max(low, off);
      high = Math.max(high, off + 2 * range + 8 * elements.looseError);
    }
  });
  return { low, high };
}

/**
 * A lower bound on the distance: a model that respects the sectors commutes with A' = Σ a P over their projectors, and
 * ‖A − A'‖ ≤ R, the residuals, so ‖[A, V]‖ ≤ 2‖A − c‖ ‖V − V'‖ + 2R‖V‖ for every number c. Of the commutator its largest element
 * less its error is certain. For each conserved label that is sharp in every state, has one value in every sector, and several overall.
 */
function leastDistance(
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  residuals: readonly OwnResiduals[],
  norm: number,
  of: (candidate: OwnCandidate) => OwnCommutator | undefined,
): number {
  const states = certificate.levels.flatMap((level) => level.states);
  let most = 0;
  problem.candidates.forEach(({ name, norm: size }, place) => {
    const candidate = candidates[place];
    const own = residuals[place];
    if (candidate?.role !== "conserved" || own === undefined) return;
    const labels = states.map((state) => (Object.hasOwn(state.labels, name) ? state.labels[name] : undefined));
    if (labels.some((label) => label === undefined || label.status === "not sharp")) return;
    const re = labels.map((label) => label?.re ?? 0);
    const im = labels.map((label) => label?.im ?? 0);
    const width = Math.hypot(extent(re), extent(im));
    if (width <= APART * size) return;
    const bySector = new Map<number, { re: number; im: number }>();
    let moved = 0;
    states.forEach(({ sector }, s) => {
      const first = bySector.get(sector);
      if (first === undefined) bySector.set(sector, { re: re[s] as number, im: im[s] as number });
      else moved = Math.max(moved, Math.hypot((re[s] as number) - first.re, (im[s] as number) - first.im));
    });
    const off =
      1.01 * (rootSum(own.tight) + Math.sqrt(states.length) * moved + 2 * size * certificate.whole.orthonormality);
    const atLeast = of(candidate)?.atLeast ?? 0;
    most = Math.max(most, ((atLeast - 2 * off * norm) * (1 - 1e-9)) / (width + 2 * off));
  });
  return most;
}

function extent(values: readonly number[]): number {
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  for (const x of values) {
    if (x < low) low = x;
    if (x > high) high = x;
  }
  return high - low;
}

/**
 * (‖C‖_F (1 + ε) + 2‖V‖ρ)/gap summed over the labels, plus 2‖V‖ε: once with what is certainly part of it, once with everything that
 * may be.
 */
function modelDistance(
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  residuals: readonly OwnResiduals[],
  norm: number,
  of: (candidate: OwnCandidate) => OwnCommutator | undefined,
): { low: number; certain: number; high: number } {
  const epsilon = certificate.whole.orthonormality;
  let low = 2 * norm * epsilon;
  let certain = low;
  let high = low;
  problem.candidates.forEach(({ name, norm: size }, place) => {
    const candidate = candidates[place];
    const own = residuals[place];
    if (candidate?.role !== "conserved" || own === undefined) return;
    const labels = certificate.levels.flatMap((level) =>
      level.states.map((state) => (Object.hasOwn(state.labels, name) ? state.labels[name] : undefined)),
    );
    const sharp = labels.filter((label) => label !== undefined && label.status !== "not sharp");
    const apart = smallestApart(
      sharp.map((label) => [label?.re ?? 0, label?.im ?? 0] as const),
      APART * size,
    );
    const commutator = of(candidate);
    const bound = commutator?.frobeniusBound ?? 0;
    if (apart < Number.POSITIVE_INFINITY) {
      high +=
        (bound * (1 + epsilon) + 2 * norm * (rootSum(own.loose) + certificate.n * productRounding(certificate.n))) /
        apart;
    }
    const gaps = certificate.levels.flatMap((level) =>
      level.nodes.filter((node) => node.kind === "label" && node.operator === name).map((node) => node.gap),
    );
    // a label of every state is one that the whole space was refined by
    if (gaps.length > 0 && sharp.length === labels.length) {
      const gap = gaps.reduce((least, x) => Math.min(least, x), Number.POSITIVE_INFINITY);
      low += (bound * (1 + epsilon) + 2 * norm * rootSum(own.tight)) / gap;
      certain += ((commutator?.frobeniusCertain ?? 0) + 2 * norm * rootSum(own.certain) * (1 - 1e-12)) / gap;
    }
  });
  return { low, certain, high };
}
