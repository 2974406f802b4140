import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import { smallerGap } from "./recheck-bounds.js";
import type { OwnLevel } from "./recheck-level.js";
import type { OwnProblem } from "./recheck-operators.js";
import { type OwnPart, type OwnRatios, ratiosOf } from "./recheck-ratios.js";
import type { Ledger } from "./recheck-report.js";
import type { Sector } from "./recheck-sectors.js";

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
  const ratios = ratiosOf(certificate, problem, l, own, sectors);
  checkSeconds(ledger, level, l, ratios);
  const found = new Map(ratios.parts.map((part) => [`${part.sector} ${part.perturbation}`, part]));
  guard.sectors.forEach((claimed, k) => {
    const at = `${path}.sectors[${k}]`;
    const p = problem.perturbations.findIndex((v) => v.name === claimed.perturbation);
    const part = found.get(`${claimed.sector} ${p}`);
    const there = ledger.claim(
      part !== undefined,
      `${at}.sector`,
      () => `no state of this level is in sector ${claimed.sector}, or it is listed twice`,
    );
    if (!there || part === undefined) return;
    found.delete(`${claimed.sector} ${p}`);
    checkPart(ledger, certificate, guard.lambda, claimed, part, at);
  });
  ledger.claim(
    found.size === 0,
    `${path}.sectors`,
    () => `nothing is said of ${[...found.values()].map((part) => `sector ${part.sector}`).join(", ")}`,
  );
}

/** The ratios of one sector and perturbation. */
function checkPart(
  ledger: Ledger,
  certificate: Certificate,
  lambda: number,
  claimed: CertifiedLevel["guard"]["sectors"][number],
  part: OwnPart,
  at: string,
): void {
  for (const [side, to, factor] of [
    ["first", part.firstTo, lambda],
    ["second", part.secondTo, lambda * lambda],
  ] as const) {
    const { ratio, energy } = claimed[side];
    let least = 0;
    let most = 0;
    for (const { value, error } of to.values()) {
      least = Math.max(least, factor * (value - error));
      most = Math.max(most, factor * (value + error));
    }
    ledger.claim(
      ratio >= least && ratio <= most,
      `${at}.${side}.ratio`,
      () => `claimed ${ratio}, found between ${least} and ${most}`,
    );
    const named = to.get(certificate.levels.findIndex((level) => level.energy === energy));
    ledger.claim(
      energy === null || (named !== undefined && factor * (named.value + named.error) >= ratio),
      `${at}.${side}.energy`,
      () => `the ratio ${ratio} is claimed to be with the level at ${energy}, which does not have it`,
    );
  }
  const inside = claimed.inside?.ratio ?? 0;
  ledger.claim(
    inside >= lambda * (part.inside.value - part.inside.error),
    `${at}.inside`,
    () => `claimed ${inside}, found ${lambda * part.inside.value}`,
  );
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
    guard.stated || guard.lambda === 1,
    `${path}.lambda`,
    () => `λ is ${guard.lambda}; where nobody states it, it is 1`,
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
      sector.perturbation === names[k % names.length],
      `${path}.sectors[${k}]`,
      () => `expected ${names[k % names.length]} here`,
    );
    ledger.claim(
      level.states.some((state) => state.sector === sector.sector),
      `${path}.sectors[${k}].sector`,
      () => `no state of this level is in sector ${sector.sector}`,
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
      sector.inside === null || sector.inside.energy === null,
      `${path}.sectors[${k}].inside`,
      () => "a ratio inside the level is with no other level",
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

/** Values of second-order nodes against the own operator. */
function checkSeconds(ledger: Ledger, level: CertifiedLevel, l: number, ratios: OwnRatios): void {
  level.nodes.forEach((node, place) => {
    if (node.kind !== "second order") return;
    node.values.forEach(([value], child) => {
      for (const state of node.states[child] ?? []) {
        const found = ratios.second[state];
        if (found === undefined) continue;
        ledger.claim(
          Math.abs(found.value - value) <= found.error,
          `levels[${l}].nodes[${place}].values[${child}]`,
          () =>
            `the second-order operator is claimed to have the value ${value} in state ${state}, found ${found.value}`,
        );
      }
    });
  });
}
