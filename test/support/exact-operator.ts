import { expect } from "vitest";
import type { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import type { Operator } from "../../src/operator/operator.js";
import { type Radius, radiusAt } from "../../src/operator/radius.js";

function exactOf(operator: Operator): ExactOperator {
  const { exact } = operator;
  if (exact === undefined) throw new Error("the operator is not known exactly");
  return exact;
}

function* entriesOf({ csr }: Operator): Generator<{ e: number; row: number; col: number; re: number; im: number }> {
  for (let row = 0; row < csr.rows; row++) {
    for (let e = csr.ptr[row] as number; e < (csr.ptr[row + 1] as number); e++) {
      yield { e, row, col: csr.col[e] as number, re: csr.re[e] as number, im: csr.im?.[e] ?? 0 };
    }
  }
}

/** Every double is within its radius of the exact number, and what is not stored is exactly zero. */
export function expectWithinRadii(operator: Operator): void {
  const exact = exactOf(operator);
  const radius: Radius = operator.isExact ? "exact" : (operator.radius ?? "default");
  let stored = 0;
  for (const { e, row, col, re, im } of entriesOf(operator)) {
    const value = exact.entry(row, col);
    if (!value.isZero) stored++;
    const off = value.minus(Surd.from({ re, im })).squaredModulus();
    const allowed = Surd.from(radiusAt({ csr: operator.csr, radius }, e)).power(2);
    expect(off.compare(allowed), `entry (${row}, ${col})`).toBeLessThanOrEqual(0);
  }
  expect(stored).toBe(exact.count);
}

/** Every double is the one nearest to the exact number, and within its radius. */
export function expectRounded(operator: Operator): void {
  expectWithinRadii(operator);
  const exact = exactOf(operator);
  for (const { row, col, re, im } of entriesOf(operator)) {
    // + 0 turns −0 into 0
    expect({ re: re + 0, im: im + 0 }, `entry (${row}, ${col})`).toEqual(exact.entry(row, col).toComplex());
  }
}
