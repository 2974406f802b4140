import type { Dense } from "../dense.js";
import { type Kernels, withKernels } from "./runtime.js";

/**
 * The product of two dense n × n matrices by the WebAssembly kernels, three real products for two complex factors.
 *
 * @returns `undefined` where the platform cannot run the kernels
 */
export function wasmMultiplyDense(n: number, a: Dense, b: Dense): Dense | undefined {
  return withKernels((kernels) => multiply(kernels, n, a, b, true));
}

/** {@link wasmMultiplyDense} with four real products for two complex factors. */
export function wasmMultiplyParts(n: number, a: Dense, b: Dense): Dense | undefined {
  return withKernels((kernels) => multiply(kernels, n, a, b, false));
}

function multiply(kernels: Kernels, n: number, a: Dense, b: Dense, three: boolean): Dense {
  const { exports } = kernels;
  const size = 8 * n * n;
  const room = (m: Float64Array | undefined): number => (m === undefined ? 0 : size);
  const complex = a.im !== undefined || b.im !== undefined;
  // Unsigned; and where the sum passed the end of all addresses, what it must at least have been, so that the layout fails.
  const bothComplex = a.im !== undefined && b.im !== undefined;
  const scratch = Math.max(bothComplex ? size : 0, exports.denseScratch(n, bothComplex) >>> 0);
  const lengths = [size, room(a.im), size, room(b.im), size, complex ? size : 0, scratch];
  const [aRe = 0, aIm = 0, bRe = 0, bIm = 0, cRe = 0, cIm = 0, rest = 0] = kernels.layout(lengths);
  const memory = kernels.doubles;
  memory.set(a.re, aRe / 8);
  if (a.im !== undefined) memory.set(a.im, aIm / 8);
  memory.set(b.re, bRe / 8);
  if (b.im !== undefined) memory.set(b.im, bIm / 8);
  exports.multiplyDense(n, aRe, a.im ? aIm : 0, bRe, b.im ? bIm : 0, cRe, complex ? cIm : 0, three, rest);
  const part = (start: number): Float64Array => memory.slice(start / 8, start / 8 + n * n);
  return { re: part(cRe), im: complex ? part(cIm) : undefined };
}
