import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import { smallerGap } from "./recheck-bounds.js";
import type { Sector } from "./recheck-intermediate.js";
import type { OwnLevel } from "./recheck-level.js";
import type { OwnProblem } from "./recheck-operators.js";
import { type OwnPart, type OwnRatios, ratiosOf } from "./recheck-ratios.js";
import type { Ledger } from "./recheck-report.js";

/** Checks the denominators guard of one level: that it agrees with itself and, with all levels at hand, with an own evaluation. */
export function checkGuard(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  level: CertifiedLevel,
  l: number,
  own: OwnLevel,
  sectors: readonly Sector[] | undefined,
): void {
  checkItself(ledger, certificate, problem, level, `levels[${l}].guard`);
  if (sectors === undefined) return;
  const path = `levels[${l}].guard`;
  const { guard } = level;
  checkLambda(ledger, certificate, problem, level, path);
  const ratios = ratiosOf(certificate, problem, l, own, sectors);
  checkSeconds(ledger, level, l, ratios);
  problem.perturbations.forEach((v, p) => {
    const open = ratios.parts.filter((part) => part.perturbation === p);
    const matched = guard.sectors.filter((claimed) => claimed.perturbation === v.name);
    const { slack } = ratios;
    const agree = (a: number, b: number): boolean => Math.abs(a - b) <= slack + ratios.relative * Math.max(a, b);
    const most = (list: readonly { first: number; second: number }[]): number =>
      list.reduce((a, x) => Math.max(a, x.first, x.second), 0);
    if (matched.length !== open.length) {
      const claimed = most(matched.map((x) => ({ first: x.first.ratio, second: x.second.ratio })));
      ledger.claim(
        claimed >= most(open) * (1 - ratios.relative) - slack,
        `${path}.outside`,
        () => `claimed ${claimed} for ${v.name}, found ${most(open)}`,
      );
      return;
    }
    guard.sectors.forEach((claimed, k) => {
      if (claimed.perturbation !== v.name) return;
      const alike = (part: OwnPart): boolean =>
        agree(part.first, claimed.first.ratio) && agree(part.second, claimed.second.ratio);
      const reaches = (side: GuardClaim, own: ReadonlyMap<number, number>): boolean =>
        isWith(certificate, side, own, ratios);
      const best = open.findIndex(
        (part) => alike(part) && reaches(claimed.first, part.firstTo) && reaches(claimed.second, part.secondTo),
      );
      const at = best < 0 ? open.findIndex(alike) : best;
      const part = open[at];
      ledger.claim(
        part !== undefined,
        `${path}.sectors[${k}]`,
        () =>
          `${v.name} is claimed to reach ${claimed.first.ratio} at first and ${claimed.second.ratio} at second order; ` +
          `found ${open.map((x) => `${x.first} and ${x.second}`).join(", ") || "nothing left"}`,
      );
      if (part === undefined) return;
      open.splice(at, 1);
      for (const [side, own] of [
        ["first", part.firstTo],
        ["second", part.secondTo],
      ] as const) {
        const { ratio, energy } = claimed[side];
        ledger.claim(
          reaches(claimed[side], own),
          `${path}.sectors[${k}].${side}.energy`,
          () => `the ratio ${ratio} is claimed to be with the level at ${energy}, which does not have it`,
        );
      }
    });
  });
  if (ratios.inside !== undefined) {
    const { inside } = ratios;
    ledger.claim(
      guard.inside >= inside * (1 - ratios.relative) - ratios.insideSlack,
      `${path}.inside`,
      () => `claimed ${guard.inside}, found ${inside}`,
    );
  }
}

type GuardClaim = CertifiedLevel["guard"]["sectors"][number]["first"];

/** Whether a claimed ratio is with the level that it names. */
function isWith(
  certificate: Certificate,
  { energy, ratio }: GuardClaim,
  own: ReadonlyMap<number, number>,
  { slack, relative }: OwnRatios,
): boolean {
  const place = certificate.levels.findIndex((level) => level.energy === energy);
  if (energy === null) return true;
  return place >= 0 && (ratio <= slack || (own.get(place) ?? 0) >= ratio * (1 - 1e-3 - relative) - slack);
}

function checkItself(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  level: CertifiedLevel,
  path: string,
): void {
  const { guard } = level;
  ledger.claim(guard.lambda > 0, `${path}.lambda`, () => `λ is ${guard.lambda}, not positive`);
  ledger.claim(
    guard.refuseAbove > 0,
    `${path}.refuseAbove`,
    () => `the threshold is ${guard.refuseAbove}, not positive`,
  );
  ledger.claim(
    guard.stated || guard.lambda <= 1,
    `${path}.lambda`,
    () => `λ is ${guard.lambda}; where nobody states it, it is at most 1`,
  );
  const other = certificate.levels[0]?.guard ?? guard;
  ledger.claim(
    guard.lambda === other.lambda && guard.stated === other.stated && guard.refuseAbove === other.refuseAbove,
    path,
    () => "λ, whether it was stated, and the threshold are the same for all levels of one certificate",
  );
  const names = problem.perturbations.map((v) => v.name);
  guard.sectors.forEach((sector, k) => {
    ledger.claim(
      sector.perturbation === names[k % names.length] && sector.sector === Math.floor(k / names.length),
      `${path}.sectors[${k}]`,
      () => `expected sector ${Math.floor(k / names.length)} with ${names[k % names.length]} here`,
    );
    for (const side of ["first", "second"] as const) {
      const { ratio, energy } = sector[side];
      ledger.claim(
        (energy === null) === (ratio === 0),
        `${path}.sectors[${k}].${side}.energy`,
        () => `the ratio ${ratio} is claimed to be with ${energy === null ? "no level" : `the level at ${energy}`}`,
      );
    }
    ledger.claim(
      sector.inside === null || (names.length === 1 && sector.inside.energy === null),
      `${path}.sectors[${k}].inside`,
      () => "a ratio inside the level has no other level, and needs a single perturbation",
    );
  });
  ledger.claim(
    guard.sectors.length > 0 && guard.sectors.length % names.length === 0,
    `${path}.sectors`,
    () => `${guard.sectors.length} entries for ${names.length} perturbations`,
  );
  const outside = guard.sectors.reduce((most, s) => Math.max(most, s.first.ratio, s.second.ratio), 0);
  const inside = guard.sectors.reduce((most, s) => Math.max(most, s.inside?.ratio ?? 0), 0);
  ledger.claim(
    guard.outside === outside,
    `${path}.outside`,
    () => `claimed ${guard.outside}, its sectors say ${outside}`,
  );
  ledger.claim(guard.inside === inside, `${path}.inside`, () => `claimed ${guard.inside}, its sectors say ${inside}`);
  ledger.claim(
    guard.radius.length === names.length,
    `${path}.radius`,
    () => `${guard.radius.length} radii for ${names.length} perturbations`,
  );
  const isolation = smallerGap(level) - 2 * certificate.whole.energyEnclosure;
  guard.radius.forEach((claimed, p) => {
    const norm = problem.perturbations[p]?.norm ?? 0;
    // Kato's lower bound, d/(2‖V‖) with d the isolation (Perturbation Theory for Linear Operators, 1966, ch. II)
    const radius = norm > 0 && Number.isFinite(isolation) ? Math.max(0, isolation) / (2 * norm) : null;
    ledger.claim(
      radius === null
        ? claimed === null
        : claimed !== null && claimed <= radius * (1 + 1e-12) && claimed >= radius * (1 - 1e-9),
      `${path}.radius[${p}]`,
      () => `the series is claimed to converge within ${claimed}; isolation and ‖V‖ give ${radius ?? "no limit"}`,
    );
  });
}

/** With no λ stated it makes the strongest V as large as H0's range, and at most 1. */
function checkLambda(
  ledger: Ledger,
  { levels }: Certificate,
  problem: OwnProblem,
  { guard }: CertifiedLevel,
  path: string,
): void {
  if (guard.stated) return;
  const norm = problem.perturbations.reduce((most, v) => Math.max(most, v.operator.norm), 0);
  const range = (levels[levels.length - 1]?.energy ?? 0) - (levels[0]?.energy ?? 0);
  const lambda = norm > 0 && range > 0 ? Math.min(1, range / norm) : 1;
  ledger.near(`${path}.lambda`, "λ, which nobody stated,", guard.lambda, lambda, 1e-9 * lambda);
}

/** Values of second-order nodes against the own operator. */
function checkSeconds(ledger: Ledger, level: CertifiedLevel, l: number, ratios: OwnRatios): void {
  level.nodes.forEach((node, place) => {
    if (node.kind !== "second order") return;
    node.values.forEach(([value], child) => {
      for (const state of node.states[child] ?? []) {
        const found = ratios.second[state];
        if (found === undefined) continue;
        ledger.claim(
          Math.abs(found - value) <= ratios.secondSlack,
          `levels[${l}].nodes[${place}].values[${child}]`,
          () => `the second-order operator is claimed to have the value ${value} in state ${state}, found ${found}`,
        );
      }
    });
  });
}
