import type { ErrorCode } from "../../../src/errors.js";
import type { Csr } from "../../../src/numerics/csr.js";

/** What is no sparse matrix, though it has its fields, and the code of its refusal. */
export function badMatrices(): [Csr, ErrorCode][] {
  const good: Csr = {
    rows: 2,
    cols: 2,
    ptr: Int32Array.of(0, 2, 4),
    col: Int32Array.of(0, 1, 0, 1),
    re: Float64Array.of(1, 2, 3, 4),
    im: undefined,
  };
  const shapes: Record<string, unknown>[] = [
    { col: Int32Array.of(0, 2, 0, 1) },
    { col: Int32Array.of(0, 1_000_000, 0, 1) },
    { col: Int32Array.of(-40, 1, 0, 1) },
    { col: Int32Array.of(1, 0, 0, 1) },
    { col: Int32Array.of(0, 0, 0, 1) },
    { col: Int32Array.of(0, 1, 0) },
    { col: [0, 1, 0, 1] },
    { ptr: Int32Array.of(0, 3, 2) },
    { ptr: Int32Array.of(0, 5, 4) },
    { ptr: Int32Array.of(1, 2, 4) },
    { ptr: Int32Array.of(0, 4) },
    { ptr: new Int32Array(10) },
    { re: Float64Array.of(5) },
    { re: Float32Array.of(1, 2, 3, 4) },
    { im: Float64Array.of(5) },
    { im: null },
    { rows: -1 },
    { rows: 2.5 },
    { cols: "2" },
  ];
  const values: Record<string, unknown>[] = [
    { re: Float64Array.of(1, 2, Number.NaN, 4) },
    { im: Float64Array.of(1, 2, 3, Number.POSITIVE_INFINITY) },
  ];
  const others: unknown[] = [undefined, null, 7, "x", {}, []];
  return [
    ...shapes.map((part): [Csr, ErrorCode] => [{ ...good, ...part }, "shape"]),
    ...values.map((part): [Csr, ErrorCode] => [{ ...good, ...part }, "not-finite"]),
    ...others.map((value): [Csr, ErrorCode] => [value as never, "shape"]),
  ];
}
