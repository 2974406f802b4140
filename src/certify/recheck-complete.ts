import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import { rootSum } from "./recheck-bounds.js";
import type { OwnLevel } from "./recheck-level.js";
import { type OwnProblem, productRounding } from "./recheck-operators.js";
import type { Ledger } from "./recheck-report.js";
import { spectrumOf } from "./recheck-spectrum.js";
import { type Bench, modulusOf, type Vectors } from "./recheck-vectors.js";

/** A count that leaves this fraction of a gap open is taken for the whole gap. */
const OPEN = 1 / 64;

/** Up to this size of H0's connected parts the neighbour at the end of a gap is looked for as well. */
const SMALL_PART = 512;

/** Whether the levels of a certificate make up the whole space. */
export function isWhole({ levels, n, whole }: Certificate): boolean {
  return levels.length === whole.levels && levels.reduce((sum, level) => sum + level.states.length, 0) === n;
}

/**
 * Checks that no eigenvalue of H0 was missed near any level, and that the gaps are what they are said to be.
 *
 * All vectors together are orthonormal and their residuals small, so as many eigenvalues lie next to those of H0 inside the levels
 * (Kahan; see Parlett, The Symmetric Eigenvalue Problem, §11.5), which lie within its off-diagonal elements of the energies. Where the vectors fill the space there are no others. Where only some levels
 * are certified, the eigenvalues at both ends of each run of neighbouring levels are counted.
 */
export function checkCompleteness(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  vectors: Vectors,
  bench: Bench,
  own: readonly OwnLevel[],
): void {
  const { levels, n, whole } = certificate;
  const total = levels.reduce((sum, level) => sum + level.states.length, 0);
  ledger.claim(
    levels.length > 0 &&
      levels.length <= whole.levels &&
      whole.levels - levels.length <= n - total &&
      (levels.length === whole.levels) === (total === n),
    "whole.levels",
    () => `${whole.levels} levels are claimed; ${levels.length} are certified with ${total} of ${n} states`,
  );
  const overlap = crossOverlap(vectors, bench);
  const residual = rootSum(own.map(({ residuals, h0 }) => besides(rootSum(residuals), h0.offFrobenius)));
  const reach = (residual * (1 + 2 * overlap) + 2 * problem.h0.norm * overlap) * 1.01;
  ledger.claim(
    overlap < 0.25,
    "levels",
    () => `the vectors of different levels overlap: ‖F F† − 1‖ is found to be up to ${overlap}`,
  );
  levels.forEach((level, l) => {
    // a level that is said to be ambiguous claims no distance to its neighbours
    const ambiguous = level.questions.includes("ambiguous-level");
    for (const [gap, beside] of [
      [level.gapBelow, own[l - 1]],
      [level.gapAbove, own[l + 1]],
    ] as const) {
      // both ends may lie nearer by the residuals, and by what H0 has off the diagonal inside the levels
      const nearer = 2 * reach + (own[l]?.h0.offDiagonal.tight ?? 0) + (beside?.h0.offDiagonal.tight ?? 0);
      ledger.claim(
        ambiguous || gap === null || nearer < gap,
        `levels[${l}].complete`,
        () => `residuals of ${nearer} do not tell the level from its neighbours, ${gap} away`,
      );
    }
  });
  const runs = checkNeighbours(ledger, certificate, problem);
  if (isWhole(certificate)) return;
  countRuns(ledger, certificate, problem, runs);
}

/** What residuals leave besides the elements of H0 between the states of a level, which do not lead out of it. */
function besides(residual: number, inside: number): number {
  return Math.sqrt(Math.max(0, residual * residual - inside * inside)) * 1.001;
}

/** Bound on the norm of all overlaps between different vectors, and of all lengths off 1. */
function crossOverlap(vectors: Vectors, bench: Bench): number {
  let longest = 0;
  for (let s = 0; s < vectors.count; s++) {
    longest = Math.max(longest, (vectors.ptr[s + 1] as number) - (vectors.ptr[s] as number));
  }
  const relative = productRounding(longest) * 1.01;
  let sum = 0;
  for (let r = 0; r < vectors.count; r++) {
    bench.take(r);
    bench.project(0, r + 1, true);
    for (let t = 0; t < bench.met; t++) {
      const c = bench.partners[t] as number;
      const size = modulusOf((bench.re[c] as number) - (c === r ? 1 : 0), bench.im[c] as number);
      const error = vectors.unit[r] === 1 && vectors.unit[c] === 1 ? 0 : relative;
      sum += (c === r ? 1 : 2) * (size + error) ** 2;
    }
  }
  return Math.sqrt(sum) * 1.001;
}

function bottom(level: CertifiedLevel): number {
  return level.energy - level.spread / 2;
}

function top(level: CertifiedLevel): number {
  return level.energy + level.spread / 2;
}

/** A run of certified levels with no other between them: the first and the last. */
type Run = readonly [number, number];

/** Checks the gaps between certified levels; those that say that they are neighbours form a run. */
function checkNeighbours(ledger: Ledger, certificate: Certificate, problem: OwnProblem): Run[] {
  const { levels } = certificate;
  const all = levels.length === certificate.whole.levels;
  const tolerance = 16 * (problem.h0.looseRounding + problem.h0.operator.error);
  const runs: [number, number][] = [];
  levels.forEach((level, l) => {
    const before = levels[l - 1];
    if (before === undefined) {
      runs.push([l, l]);
      if (all) {
        ledger.claim(
          level.gapBelow === null,
          `levels[${l}].gapBelow`,
          () => `claimed ${level.gapBelow}, but it is the lowest level`,
        );
      }
      return;
    }
    const distance = bottom(level) - top(before);
    ledger.claim(distance > 0, `levels[${l}].energy`, () => `claimed ${level.energy}, not above the level before it`);
    const near = (gap: number | null): boolean =>
      gap !== null && Math.abs(gap - distance) <= tolerance + 1e-12 * distance;
    const below = near(level.gapBelow);
    const above = near(before.gapAbove);
    const allowed = (gap: number | null): boolean => gap !== null && gap < distance;
    const neighbours = all || below || above;
    ledger.claim(
      below || (!neighbours && allowed(level.gapBelow)),
      `levels[${l}].gapBelow`,
      () => `claimed ${level.gapBelow}, but the certified level below is ${distance} away`,
    );
    ledger.claim(
      above || (!neighbours && allowed(before.gapAbove)),
      `levels[${l - 1}].gapAbove`,
      () => `claimed ${before.gapAbove}, but the certified level above is ${distance} away`,
    );
    const run = runs[runs.length - 1];
    if (neighbours && run !== undefined) run[1] = l;
    else runs.push([l, l]);
  });
  const last = levels[levels.length - 1];
  if (all && last !== undefined) {
    ledger.claim(
      last.gapAbove === null,
      `levels[${levels.length - 1}].gapAbove`,
      () => `claimed ${last.gapAbove}, but it is the highest level`,
    );
  }
  return runs;
}

/** Counts the eigenvalues of H0 at both ends of every run. */
function countRuns(ledger: Ledger, certificate: Certificate, problem: OwnProblem, runs: readonly Run[]): void {
  const { levels, whole, n } = certificate;
  const spectrum = spectrumOf(problem.h0.operator);
  for (const [a, b] of runs) {
    const low = levels[a];
    const high = levels[b];
    if (low === undefined || high === undefined) continue;
    // an ambiguous level at an end claims no distance to what lies beyond
    if ([low, high].some((level) => level.questions.includes("ambiguous-level"))) continue;
    const path = `levels[${a}].complete`;
    const countable = ledger.claim(
      spectrum.countable,
      path,
      () => `completeness not checked: component too large (${spectrum.largest} kets)`,
    );
    if (!countable) continue;
    const states = levels.slice(a, b + 1).reduce((sum, level) => sum + level.states.length, 0);
    const end = (edge: number, gap: number | null, sign: number, open: number): number | undefined =>
      gap === null
        ? undefined
        : edge + sign * Math.max(0, gap + Math.sign(open) * 2 * whole.energyEnclosure) * (1 + open);
    const from = end(bottom(low), low.gapBelow, -1, -OPEN);
    const to = end(top(high), high.gapAbove, 1, -OPEN);
    const lower = from === undefined ? { below: 0, error: 0 } : spectrum.count(from);
    const upper = to === undefined ? { below: n, error: 0 } : spectrum.count(to);
    const room = OPEN * Math.min(low.gapBelow ?? Number.POSITIVE_INFINITY, high.gapAbove ?? Number.POSITIVE_INFINITY);
    ledger.claim(
      Math.max(lower.error, upper.error) < room,
      path,
      () =>
        `completeness not checked: the count is sharp to ${Math.max(lower.error, upper.error)} only, gaps need ${room}`,
    );
    ledger.claim(
      upper.below - lower.below === states,
      path,
      () =>
        `${states} states are certified between ${from ?? "the bottom"} and ${to ?? "the top"}, but H0 has ` +
        `${upper.below - lower.below} eigenvalues there`,
    );
    if (spectrum.largest > SMALL_PART) continue;
    // once the sharpness of the count is known, the neighbour can be looked for at the very end of the gap
    const sides = [
      { gap: low.gapBelow, edge: bottom(low), sign: -1, count: lower, path: `levels[${a}].gapBelow` },
      { gap: high.gapAbove, edge: top(high), sign: 1, count: upper, path: `levels[${b}].gapAbove` },
    ];
    for (const { gap, edge, sign, count, path: at } of sides) {
      if (gap === null || gap === 0) continue;
      const open = Math.min(OPEN, Math.max(2 ** -30, (8 * count.error) / gap));
      const before = end(edge, gap, sign, -open);
      const behind = end(edge, gap, sign, open);
      ledger.claim(
        before === undefined || spectrum.count(before).below === count.below,
        at,
        () => `claimed ${gap}, but H0 has an eigenvalue nearer than that`,
      );
      ledger.claim(
        behind === undefined || sign * (spectrum.count(behind).below - count.below) > 0,
        at,
        () => `claimed ${gap}, but H0 has no eigenvalue there`,
      );
    }
  }
}
