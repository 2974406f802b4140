import { roundUp } from "../numerics/rounding.js";
import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import type { OwnLevel, Pair } from "./recheck-level.js";
import { type OwnProblem, productRounding } from "./recheck-operators.js";
import type { Ledger } from "./recheck-report.js";

/** The smaller of a level's two gaps; Infinity where it is the only level. */
export function smallerGap({ gapBelow, gapAbove }: CertifiedLevel): number {
  return Math.min(gapBelow ?? Number.POSITIVE_INFINITY, gapAbove ?? Number.POSITIVE_INFINITY);
}

/** Checks energies, shifts and what is said of one level as a whole. */
export function checkBounds(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  level: CertifiedLevel,
  l: number,
  own: OwnLevel,
  leaks: readonly number[],
): void {
  const path = `levels[${l}]`;
  ledger.claim(
    level.degeneracy === level.states.length,
    `${path}.degeneracy`,
    () => `claimed ${level.degeneracy}, but ${level.states.length} states are listed`,
  );
  ledger.bound(
    `${path}.orthonormality`,
    "‖Q Q† − 1‖",
    level.orthonormality,
    own.orthonormality.least,
    own.orthonormality.loose + certificate.whole.orthonormality,
    own.orthonormality.certain,
  );
  ledger.claim(
    level.orthonormality >= own.orthonormalityAtLeast,
    `${path}.orthonormality`,
    () => `claimed to be at most ${level.orthonormality}, but one overlap alone is off by ${own.orthonormalityAtLeast}`,
  );
  checkEnergies(ledger, problem, level, path, own);
  const tilt = checkTilt(ledger, certificate, level, path, own);
  checkShifts(ledger, problem, level, path, own, tilt, leaks);
}

function checkEnergies(ledger: Ledger, problem: OwnProblem, level: CertifiedLevel, path: string, own: OwnLevel): void {
  const { h0 } = own;
  const rounding = h0.looseError + (own.orthonormality.tight + own.orthonormalityAtLeast) * problem.h0.norm;
  const width = own.residuals.reduce((most, x) => Math.max(most, x), 0);
  const solver =
    64 * Math.sqrt(problem.n) * (problem.h0.looseRounding + problem.h0.operator.error) + rounding + 2 * width;
  let low = Number.POSITIVE_INFINITY;
  let high = Number.NEGATIVE_INFINITY;
  level.states.forEach((state, k) => {
    const found = h0.diagonal[k] as number;
    low = Math.min(low, found);
    high = Math.max(high, found);
    const at = `${path}.states[${k}]`;
    // |⟨H0⟩ − E| ≤ ‖H0 q − E q‖, which is checked next
    ledger.near(`${at}.energy`, "the energy ⟨H0⟩", state.energy, found, rounding + state.energyPlusMinus);
    const grow = 1 + 2 * own.orthonormality.tight;
    const tight = roundUp((own.residuals[k] as number) * grow);
    ledger.bound(
      `${at}.energyPlusMinus`,
      "the residual ‖H0 q − E q‖",
      state.energyPlusMinus,
      tight,
      (own.looseResiduals[k] as number) * grow,
      own.certainResiduals[k] as number,
    );
    ledger.claim(
      state.energyPlusMinus >=
        (own.residuals[k] as number) - problem.h0.rounding - problem.h0.operator.error - 1e-12 * tight,
      `${at}.energyPlusMinus`,
      () => `an energy within ${state.energyPlusMinus} is claimed, but ‖H0 q − E q‖ is ${own.residuals[k]}`,
    );
  });
  // the eigenvalues inside the level lie within the off-diagonal block of the expectation values
  const off = Math.min(h0.offDiagonal.tight, h0.offDiagonal.loose);
  ledger.claim(
    level.spread >= high - low - solver && level.spread <= high - low + 2 * off + solver,
    `${path}.spread`,
    () => `claimed ${level.spread}; its energies spread over ${high - low}, at most ${2 * off} more`,
  );
  const half = level.spread / 2;
  ledger.claim(
    level.energy - half <= low + solver &&
      level.energy - half >= low - off - solver &&
      level.energy + half >= high - solver &&
      level.energy + half <= high + off + solver,
    `${path}.energy`,
    () => `claimed ${level.energy} as the middle of its energies, which lie between ${low} and ${high}`,
  );
}

/** sin Θ ≤ ‖H0 Q − Q Λ‖ / gap (Davis and Kahan, SIAM J. Numer. Anal. 7, 1 (1970)). */
function checkTilt(
  ledger: Ledger,
  certificate: Certificate,
  level: CertifiedLevel,
  path: string,
  own: OwnLevel,
): Pair & { readonly certain: number } {
  const isolation = smallerGap(level) - 2 * certificate.whole.energyEnclosure - level.spread;
  const sine = (residuals: Float64Array): number => {
    if (isolation === Number.POSITIVE_INFINITY) return 0;
    if (isolation <= 0 || own.orthonormality.tight >= 0.5) return 1;
    return Math.min(1, roundUp((rootSum(residuals) * (1 + own.orthonormality.tight)) / isolation));
  };
  const certain =
    isolation > 0 && own.orthonormality.tight < 0.5
      ? Math.min(1, rootSum(own.certainResiduals) / isolation)
      : sine(own.residuals);
  const tilt = { tight: sine(own.residuals), loose: sine(own.looseResiduals), certain };
  ledger.bound(`${path}.tilt`, "the tilt of the level", level.tilt, tilt.tight, tilt.loose, tilt.certain);
  const gap = smallerGap(level);
  const isolated = gap === Number.POSITIVE_INFINITY ? null : Math.max(0, gap - 2 * certificate.whole.energyEnclosure);
  const { complete } = level;
  ledger.claim(
    isolated === null
      ? complete.isolation === null
      : complete.isolation !== null && Math.abs(complete.isolation - isolated) <= 1e-12 * gap,
    `${path}.complete.isolation`,
    () => `claimed ${complete.isolation}; its gaps and the enclosure of energies leave ${isolated ?? "no limit"}`,
  );
  ledger.claim(
    complete.energiesFound === certificate.n,
    `${path}.complete.energiesFound`,
    () => `claimed ${complete.energiesFound} of ${certificate.n} energies`,
  );
  return tilt;
}

/** √(Σ x²), rounded up. */
export function rootSum(values: ArrayLike<number>): number {
  let sum = 0;
  for (let k = 0; k < values.length; k++) sum += (values[k] as number) ** 2;
  return roundUp(Math.sqrt(sum), values.length + 8);
}

/**
 * The ± of a shift: the in-level block that was dropped, the orthonormality defect, the tilt, the width of the level, and the
 * evaluation of the element.
 */
function checkShifts(
  ledger: Ledger,
  problem: OwnProblem,
  level: CertifiedLevel,
  path: string,
  own: OwnLevel,
  tilt: Pair & { readonly certain: number },
  leaks: readonly number[],
): void {
  const names = problem.perturbations.map((v) => v.name);
  const most = (list: Float64Array): number => list.reduce((a, b) => Math.max(a, b), 0);
  // the residuals are about the claimed energies, so they count
  const deviation = level.states.reduce((a, state) => Math.max(a, Math.abs(state.energy - level.energy)), 0);
  const defect = own.orthonormality.least;
  level.states.forEach((state, k) => {
    const at = `${path}.states[${k}].shifts`;
    const named = ledger.claim(
      state.shifts.map((shift) => shift.perturbation).join("\n") === names.join("\n"),
      at,
      () => `expected one shift for each of ${names.join(", ")}, in their order`,
    );
    if (!named) return;
    state.shifts.forEach((shift, p) => {
      const elements = own.perturbations[p];
      const v = problem.perturbations[p];
      if (elements === undefined || v === undefined) return;
      const found = elements.diagonal[k] as number;
      ledger.near(`${at}[${p}].value`, `the shift ⟨${v.name}⟩`, shift.value, found, 2 * elements.looseError);
      const tight =
        elements.offDiagonal.least +
        2 * v.norm * (defect + tilt.tight) +
        deviation +
        most(own.residuals) +
        elements.error;
      const certain =
        elements.offDiagonal.certain +
        2 * v.norm * (own.orthonormality.certain + tilt.certain) +
        deviation +
        most(own.certainResiduals) +
        v.operator.error;
      const loose =
        elements.offDiagonal.loose +
        2 * v.norm * (own.orthonormality.loose + level.orthonormality + tilt.loose + productRounding(2 * problem.n)) +
        deviation +
        problem.h0.looseRounding +
        most(own.looseResiduals) +
        elements.looseError +
        (leaks[p] ?? 0);
      ledger.bound(
        `${at}[${p}].plusMinus`,
        `the ± of the shift by ${v.name}`,
        shift.plusMinus,
        roundUp(tight, 32),
        loose,
        certain,
      );
    });
  });
}
