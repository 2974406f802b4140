import { gcdSafe } from "./integer.js";
import { Surd } from "./surd.js";

/** Complex rational numbers over one denominator, all in safe integers: (re_k + i im_k) / den. */
export interface WholeEntries {
  /** Numerators of the real parts. */
  readonly re: Float64Array;
  /** Numerators of the imaginary parts; absent where all are zero. */
  readonly im: Float64Array | undefined;
  /** ≥ 1. */
  readonly den: number;
}

/** Denominators beyond this are not brought together: products would leave the safe integers at once. */
const LARGEST_DENOMINATOR = 2 ** 26;

/**
 * A list of exact numbers, held as machine integers over one denominator where that is possible, as {@link Surd}s otherwise;
 * each form is made from the other when first asked for. Integer matrices multiply on the first form and never see a root.
 */
export class Entries {
  /** How many. */
  readonly length: number;
  #surds: readonly Surd[] | undefined;
  /** Null where the numbers do not have that form. */
  #whole: WholeEntries | null | undefined;

  private constructor(length: number, surds: readonly Surd[] | undefined, whole: WholeEntries | undefined) {
    this.length = length;
    this.#surds = surds;
    this.#whole = whole;
  }

  /** Wraps a list of numbers. */
  static ofSurds(surds: readonly Surd[]): Entries {
    return new Entries(surds.length, surds, undefined);
  }

  /**
   * Wraps machine integers.
   *
   * @param whole - safe integers, den ≥ 1; shared, not copied
   */
  static ofWhole(whole: WholeEntries): Entries {
    return new Entries(whole.re.length, undefined, whole);
  }

  /** The numbers themselves. */
  get surds(): readonly Surd[] {
    this.#surds ??= surdsOf(this.#whole as WholeEntries);
    return this.#surds;
  }

  /** The numbers as machine integers over one denominator; undefined where they have no such form. */
  get whole(): WholeEntries | undefined {
    if (this.#whole === undefined) this.#whole = wholeOf(this.surds) ?? null;
    return this.#whole ?? undefined;
  }

  /** The numbers at the given places, in that order, conjugated where asked. */
  gather(order: ArrayLike<number>, conjugate: boolean): Entries {
    const whole = this.#whole;
    if (whole) {
      const { re, im, den } = whole;
      const pick = (list: Float64Array, sign: 1 | -1): Float64Array =>
        Float64Array.from(order, (k) => sign * (list[k] as number) + 0);
      return Entries.ofWhole({ re: pick(re, 1), im: im && pick(im, conjugate ? -1 : 1), den });
    }
    const { surds } = this;
    return Entries.ofSurds(
      Array.from(order, (k) => {
        const x = surds[k] as Surd;
        return conjugate ? x.conjugate() : x;
      }),
    );
  }

  /** Number k of the list. */
  at(k: number): Surd {
    return this.surds[k] as Surd;
  }
}

function surdsOf({ re, im, den }: WholeEntries): Surd[] {
  return Array.from(re, (x, k) => Surd.fromSafe(x, im === undefined ? 0 : (im[k] as number), den));
}

function wholeOf(surds: readonly Surd[]): WholeEntries | undefined {
  let den = 1;
  let complex = false;
  for (const x of surds) {
    const parts = x.safeParts;
    if (parts === undefined) return undefined;
    if (parts.im !== 0) complex = true;
    den *= parts.den / gcdSafe(den, parts.den);
    if (den > LARGEST_DENOMINATOR) return undefined;
  }
  const re = new Float64Array(surds.length);
  const im = complex ? new Float64Array(surds.length) : undefined;
  for (const [k, x] of surds.entries()) {
    const parts = x.safeParts;
    if (parts === undefined) return undefined;
    const factor = den / parts.den;
    const [u, v] = [parts.re * factor, parts.im * factor];
    if (!Number.isSafeInteger(u) || !Number.isSafeInteger(v)) return undefined;
    re[k] = u;
    if (im !== undefined) im[k] = v;
  }
  return { re, im, den };
}
