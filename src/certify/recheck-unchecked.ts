import type { Certificate, CertifiedLevel } from "./certificate-format.js";
import { isWhole } from "./recheck-complete.js";
import type { Ledger, RecheckTerms } from "./recheck-report.js";

/**
 * Notes what the operators could not be held against: without all levels at hand, or with sectors too large to be multiplied out again,
 * what couples to the other levels is out of reach.
 *
 * @param multiplied - whether V was evaluated inside every sector
 */
export function noteUnchecked(ledger: Ledger, certificate: Certificate, multiplied: boolean): void {
  const { levels, whole } = certificate;
  const all = isWhole(certificate);
  if (all && multiplied) return;
  const why = all
    ? "the sectors are too large to be multiplied out again"
    : `only ${levels.length} of ${whole.levels} levels are certified`;
  ledger.skip(
    `The ratios of the denominators guard: ${why}; they were checked against themselves and against the threshold only.`,
  );
  if (!all) {
    ledger.skip(
      "The numbers of the sectors, the number of all levels, and the bounds over the whole basis (orthonormality, energyResidual, " +
        "eta0, eta): checked only as far as the certified states bear on them.",
    );
  }
  levels.forEach((level, l) => {
    const states = [
      ...new Set(level.nodes.flatMap((node) => (node.kind === "second order" ? node.states.flat() : []))),
    ];
    if (states.length === 0) return;
    ledger.skip(
      `What tells states ${states.sort((a, b) => a - b).join(", ")} of levels[${l}] (at ${level.energy}) apart: the values of ` +
        `the second-order operator, and with them the safe orders ${ordersOf(level, states)}; ${why}.`,
    );
  });
}

/** The safe orders that rest on the second-order operator, each once. */
function ordersOf(level: CertifiedLevel, states: readonly number[]): string {
  const orders = states.map((state) => {
    const safe = level.states[state]?.safe;
    return `${safe?.energies ?? "none"} (energies) and ${safe?.states ?? "none"} (states)`;
  });
  return [...new Set(orders)].join("; ");
}

/** The choices that the verdict is relative to. */
export function termsOf({ levels, resolution }: Certificate): RecheckTerms | undefined {
  const [first] = levels;
  if (first === undefined) return undefined;
  const { stated, refuseAbove } = first.guard;
  return {
    resolution,
    lambda: levels.reduce((x, { guard }) => Math.min(x, guard.lambda), first.guard.lambda),
    stated,
    refuseAbove,
  };
}
