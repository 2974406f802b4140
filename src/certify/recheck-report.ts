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
  /** What the operators at hand could not be held against, one sentence each; empty where every claim was checked against them. */
  readonly notChecked: readonly string[];
  /** What the certificate's verdict is relative to, as it states it: a choice of whoever asked, which no check can judge. */
  readonly relativeTo?: RecheckTerms;
}

/** The choices that a verdict rests on. */
export interface RecheckTerms {
  /** The fraction of ‖V − tr V/n‖ below which an element inside a level counts as vanished. */
  readonly resolution: number;
  /** Largest λ that the guard allows for, and whether it was stated; where nobody stated it, the smallest of the levels'. */
  readonly lambda: number;
  /** Whether λ was stated. */
  readonly stated: boolean;
  /** Ratios of V to a distance of energies above this are refused. */
  readonly refuseAbove: number;
}

/**
 * Two evaluations of one bound allow differently for rounding. What is certain must be covered in full, and this much of what the
 * own evaluation allows for rounding.
 */
const ROUNDING_SHARE = 7 / 8;

/** Where the own evaluation does not say what is certain, a bound may claim this much less. */
const TOO_LITTLE = 1 / 4;

/** Relative rounding of a few sums and roots. */
const SUMMED = 1e-12;

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
  readonly #notChecked: string[] = [];

  /** Notes, as a sentence, what could not be held against the operators. */
  skip(sentence: string): void {
    this.#notChecked.push(sentence);
  }

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
   * @param certain - the part of `tight` that no evaluation can do without: what was computed less its rounding, and the entries'
   *   own uncertainty
   */
  bound(
    path: string,
    what: string,
    claimed: number,
    tight: number,
    loose: number = tight,
    certain: number | undefined = undefined,
  ): boolean {
    const least =
      certain === undefined
        ? TOO_LITTLE * tight
        : (1 - SUMMED) * certain + ROUNDING_SHARE * Math.max(0, tight - certain) - UNDERFLOWN;
    const enough = this.claim(
      claimed >= least,
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
    return { ok: this.#failed === 0, checked: this.#checked, findings, notChecked: [...this.#notChecked] };
  }
}
