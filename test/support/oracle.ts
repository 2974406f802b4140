import type { Csr } from "../../src/numerics/csr.js";
import type { Operator } from "../../src/operator/operator.js";
import { DUST, double, type FixedMatrix, fixed, matrix, zeros } from "./fixed.js";

/** The entries of an operator times 2^shift, exactly. */
export function fixedOperator(operator: Operator, shift = 0): FixedMatrix {
  return matrix(operator.n, operator.n, (i, j) => {
    const { re, im } = operator.entry(i, j);
    return [fixed(re, shift), fixed(im, shift)];
  });
}

/** Rows of a sparse matrix as columns. */
export function fixedColumns(rows: Csr): FixedMatrix {
  const out = zeros(rows.cols, rows.rows);
  for (let r = 0; r < rows.rows; r++) {
    for (let p = rows.ptr[r] ?? 0; p < (rows.ptr[r + 1] ?? 0); p++) {
      const place = (rows.col[p] ?? 0) * out.cols + r;
      out.re[place] = fixed(rows.re[p] ?? 0);
      out.im[place] = fixed(rows.im?.[p] ?? 0);
    }
  }
  return out;
}

/** State vectors as columns. */
export function fixedStates(
  states: readonly {
    readonly vector: { readonly kets: Int32Array; readonly re: Float64Array; readonly im: Float64Array | undefined };
  }[],
  n: number,
): FixedMatrix {
  const out = zeros(n, states.length);
  states.forEach(({ vector }, s) => {
    vector.kets.forEach((ket, k) => {
      out.re[ket * out.cols + s] = fixed(vector.re[k] ?? 0);
      out.im[ket * out.cols + s] = fixed(vector.im?.[k] ?? 0);
    });
  });
  return out;
}

/** Collects broken bounds, so that one run shows them all. */
export class Claims {
  readonly broken: string[] = [];
  checked = 0;

  /** The truth (never negative) must not exceed the bound, which is in units of 2^−shift. */
  atMost(truth: bigint, bound: number, what: string, shift = 0): void {
    this.checked++;
    if (bound === Number.POSITIVE_INFINITY) return;
    const limit = Number.isNaN(bound) ? -DUST : fixed(bound, shift);
    if (truth <= limit + DUST) return;
    this.broken.push(`${what}: ${double(truth)} exceeds the bound ${bound} (2^${shift})`);
  }

  /** The truth must not be below a stated lower bound. */
  atLeast(truth: bigint, bound: number, what: string, shift = 0): void {
    this.checked++;
    if (!Number.isNaN(bound) && truth + DUST >= fixed(bound, shift)) return;
    this.broken.push(`${what}: ${double(truth)} is below the lower bound ${bound} (2^${shift})`);
  }
}
