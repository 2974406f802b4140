import { GoodBasisError } from "../errors.js";
import type { ExactTriplet } from "../exact/rows.js";
import { Surd } from "../exact/surd.js";
import { shown } from "../misuse.js";
import { gamma } from "../numerics/rounding.js";
import { EntryList, exactRoot } from "../operator/builder.js";
import { Operator } from "../operator/operator.js";
import { wholeRoot } from "./roots.js";

/** Operators of a harmonic oscillator on its lowest kets |0⟩, |1⟩, …, in its natural units (ħ = m = ω = 1). */
export interface Oscillator {
  /** Number of kets. */
  readonly n: number;
  /** a |k⟩ = √k |k − 1⟩. */
  readonly a: Operator;
  /** a† |k⟩ = √(k + 1) |k + 1⟩, cut off at the last ket. */
  readonly adagger: Operator;
  /** a†a = diag(0, 1, 2, …), exact. */
  readonly number: Operator;
  /** x = (a + a†)/√2. */
  readonly x: Operator;
  /** p = i (a† − a)/√2. */
  readonly p: Operator;
  /**
   * The matrix elements ⟨k| x^power |l⟩ of the whole oscillator: unlike a power of the truncated x they are right up to the last
   * ket.
   *
   * @param power - 0, 1, 2, …
   * @throws GoodBasisError `option` - not a whole number from 0 to 64
   */
  xPower(power: number): Operator;
  /** Names of the kets, `"0"`, `"1"`, … */
  readonly kets: readonly string[];
}

/**
 * Operators of a harmonic oscillator on its lowest kets; ⟨k + 1| a† |k⟩ = +√(k + 1) (Messiah, Quantum Mechanics I, ch. XII).
 *
 * The space is truncated: [a, a†] = 1 fails at the last ket, and results for high levels belong to the matrix, not to the
 * oscillator. All elements are known exactly, see {@link Operator.exact}.
 *
 * @param levels - number of kets, at least 1
 * @throws GoodBasisError `option` - not a positive whole number
 *
 * @example
 * ```ts
 * import { oscillator } from "goodbasis";
 *
 * const { xPower } = oscillator(6);
 * console.log(xPower(4).entry(0, 0).re); // 0.75
 * ```
 */
export function oscillator(levels: number): Oscillator {
  if (!Number.isInteger(levels) || levels < 1 || levels > 2 ** 24) {
    throw new GoodBasisError("option", `oscillator: the number of levels must be 1, 2, …, got ${shown(levels)}`, {
      levels,
    });
  }
  const lower = new EntryList(levels);
  const position = new EntryList(levels);
  const momentum = new EntryList(levels);
  for (let k = 1; k < levels; k++) {
    const root = exactRoot(k);
    lower.add(k - 1, k, root.value, 0, root.radius);
    const half = exactRoot(k / 2);
    position.add(k - 1, k, half.value, 0, half.radius);
    position.add(k, k - 1, half.value, 0, half.radius);
    momentum.add(k - 1, k, 0, -half.value, half.radius);
    momentum.add(k, k - 1, 0, half.value, half.radius);
  }
  const a = lower.finish("oscillator", () => steps(levels, (root) => [root, undefined]));
  const numbers = Array.from({ length: levels }, (_, k) => k);
  return {
    n: levels,
    a,
    adagger: a.adjoint(),
    number: Operator.diagonal(numbers, { uncertainty: "exact" }),
    x: position.finish("oscillator", () => steps(levels, (root) => [root.over(SQRT2), root.over(SQRT2)])),
    p: momentum.finish("oscillator", () =>
      steps(levels, (root) => [root.over(SQRT2).times("-i"), root.over(SQRT2).times("i")]),
    ),
    xPower: (power) => xPower(levels, power),
    kets: numbers.map(String),
  };
}

const SQRT2: Surd = Surd.from("sqrt(2)");

/** The exact elements ⟨k − 1|…|k⟩ and, where there is one, ⟨k|…|k − 1⟩ of an operator, made from √k. */
function* steps(levels: number, elements: (root: Surd) => readonly [Surd, Surd | undefined]): Generator<ExactTriplet> {
  for (let k = 1; k < levels; k++) {
    const [down, up] = elements(wholeRoot(k));
    yield [k - 1, k, down];
    if (up !== undefined) yield [k, k - 1, up];
  }
}

/**
 * With unnormalised kets |k) = √k! |k⟩ the ladder operators have whole matrix elements, a |k) = k |k − 1), a† |k) = |k + 1), so
 * (a + a†)^power |l) = Σ N_kl |k) is found in whole numbers, and ⟨k| x^power |l⟩ = 2^{−power/2} N_kl √(k!/l!).
 */
function xPower(levels: number, power: number): Operator {
  if (!Number.isInteger(power) || power < 0 || power > 64) {
    throw new GoodBasisError("option", `xPower: the power must be 0, 1, …, 64, got ${shown(power)}`, { power });
  }
  const list = new EntryList(levels);
  for (const { row, col, whole } of wholeElements(levels, power)) {
    const { value, radius } = element(whole, col, row, power);
    list.add(row, col, value, 0, radius);
    if (row !== col) list.add(col, row, value, 0, radius);
  }
  return list.finish("xPower", () => exactElements(levels, power));
}

/** An element N_kl with k ≥ l: row k, column l. */
interface WholeElement {
  readonly row: number;
  readonly col: number;
  readonly whole: bigint;
}

function* wholeElements(levels: number, power: number): Generator<WholeElement> {
  for (let l = 0; l < levels; l++) {
    let column = new Map<number, bigint>([[l, 1n]]);
    for (let step = 0; step < power; step++) {
      const next = new Map<number, bigint>();
      for (const [k, value] of column) {
        next.set(k + 1, (next.get(k + 1) ?? 0n) + value);
        if (k > 0) next.set(k - 1, (next.get(k - 1) ?? 0n) + BigInt(k) * value);
      }
      column = next;
    }
    for (let k = l; k < Math.min(levels, l + power + 1); k++) {
      const whole = column.get(k);
      if (whole !== undefined) yield { row: k, col: l, whole };
    }
  }
}

/** 2^{−power/2} N √(k!/l!), one factor of the root after the other, so that no large number need be searched for squares. */
function* exactElements(levels: number, power: number): Generator<ExactTriplet> {
  const unit = Surd.sqrt(Surd.from("1/2").power(power)) ?? Surd.zero;
  for (const { row, col, whole } of wholeElements(levels, power)) {
    let value = unit.times(whole);
    for (let m = col + 1; m <= row; m++) value = value.times(wholeRoot(m));
    yield [row, col, value];
    if (row !== col) yield [col, row, value];
  }
}

/** 2^{−power/2} N √(k!/l!) for k ≥ l: at most four roundings, none where all factors and the root are short. */
function element(whole: bigint, l: number, k: number, power: number): { value: number; radius: number } {
  let square = power % 2 === 0 ? 1n : 2n;
  for (let m = l + 1; m <= k; m++) square *= BigInt(m);
  const factor = Number(whole);
  const root = Math.sqrt(Number(square));
  const product = factor * root;
  const exact =
    Number.isSafeInteger(factor) &&
    Number.isSafeInteger(root) &&
    Number.isSafeInteger(product) &&
    BigInt(root) * BigInt(root) === square;
  const value = product * 2 ** -Math.ceil(power / 2);
  return { value, radius: exact ? 0 : gamma(4) * value };
}
