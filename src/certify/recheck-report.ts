import type { Verdict } from "./verdict.js";

/** One claim of a certificate that does not stand. */
export interface RecheckFinding {
  /** Where in the JSON, such as `levels[0].states[2].labels.Jz`. */
  readonly path: string;
  /** What was claimed and what was found. */
  readonly message: string;
}

/** What a re-check found. */
export interface RecheckReport {
  /** Whether every claim that was checked stands. */
  readonly ok: boolean;
  /** The verdict that the certificate claims, which may be "not good" and stand all the same. */
  readonly verdict?: Verdict;
  /** Number of claims checked. */
  readonly checked: number;
  /** The claims that do not stand: altered sections first, then in the order of checking. */
  readonly findings: readonly RecheckFinding[];
}

/** A bound may claim this much less than the re-check's own evaluation shows, whose rounding is bounded on its own. */
const TOO_LITTLE = 1 / 4;

/** A bound more than this far above anything that rounding could leave was not written for this problem. */
const TOO_MUCH = 64;

/** Below this squares vanish, and a bound may say no more than that. */
const UNDERFLOWN = 2 ** -500;

/** After this many findings the rest is counted only. */
const MOST_FINDINGS = 1000;

/** Counts the claims that are checked and keeps those that fail. */
export class Ledger {
  #checked = 0;
  #failed = 0;
  readonly #findings: RecheckFinding[] = [];

  /**
   * Checks one claim.
   *
   * @param message - what was claimed and what was found; evaluated only where the claim fails
   * @returns whether it holds
   */
  claim(holds: boolean, path: string, message: () => string): boolean {
    this.#checked++;
    if (holds) return true;
    this.#failed++;
    if (this.#findings.length < MOST_FINDINGS) this.#findings.push({ path, message: message() });
    return false;
  }

  /** Checks that a claimed number is the one found, to within a tolerance. */
  near(path: string, what: string, claimed: number, found: number, tolerance: number): boolean {
    return this.claim(
      Math.abs(claimed - found) <= tolerance + UNDERFLOWN,
      path,
      () => `${what} is claimed to be ${claimed}, found ${found} (to within ${tolerance.toExponential(1)})`,
    );
  }

  /**
   * Checks a claimed upper bound against an own one.
   *
   * @param tight - the own bound; a claim far below it says more than can be shown
   * @param loose - the largest bound that an honest evaluation could give; a claim far above it belongs to something else
   */
  bound(path: string, what: string, claimed: number, tight: number, loose: number = tight): boolean {
    const enough = this.claim(
      claimed >= TOO_LITTLE * tight,
      path,
      () => `claims too little: ${what} is claimed to be at most ${claimed}, found up to ${tight}`,
    );
    const fitting = this.claim(
      claimed <= TOO_MUCH * loose + UNDERFLOWN,
      path,
      () =>
        `does not belong to this certificate: ${what} is claimed to be at most ${claimed}, ` +
        `but an evaluation gives no more than ${loose}`,
    );
    return enough && fitting;
  }

  /** The report of everything checked so far. */
  report(): RecheckReport {
    const findings = [...this.#findings];
    const more = this.#failed - findings.length;
    if (more > 0) findings.push({ path: "", message: `${more} further claims do not stand` });
    return { ok: this.#failed === 0, checked: this.#checked, findings };
  }
}
