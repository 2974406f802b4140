import { KERNELS } from "./kernels.js";

/** What the compiled kernels export; addresses are in bytes. The functions are documented at their sources. */
export interface KernelExports {
  readonly memory: { readonly buffer: ArrayBuffer; grow(pages: number): number };
  readonly heapStart: { readonly value: number };
  readonly windowStart: { readonly value: number };
  eigenScratch(n: number, complex: boolean, leaf: number, blockedFrom: number, blockWidth: number): number;
  solveHermitian(
    count: number,
    n: number,
    re: number,
    im: number,
    values: number,
    vectorsRe: number,
    vectorsIm: number,
    from: number,
    to: number,
    low: number,
    high: number,
    leaf: number,
    blockedFrom: number,
    blockWidth: number,
    scratch: number,
  ): number;
  denseScratch(n: number, bothComplex: boolean): number;
  multiplyDense(
    n: number,
    aRe: number,
    aIm: number,
    bRe: number,
    bIm: number,
    cRe: number,
    cIm: number,
    three: boolean,
    scratch: number,
  ): void;
  readonly errorSquares: { readonly value: number };
  readonly mostTerms: { readonly value: number };
  combineSparse(
    rows: number,
    commutes: boolean,
    upper: boolean,
    aPtr: number,
    aCol: number,
    aRe: number,
    aIm: number,
    normsA: number,
    bPtr: number,
    bCol: number,
    bRe: number,
    bIm: number,
    normsB: number,
    ptr: number,
    col: number,
    re: number,
    im: number,
    places: number,
  ): number;
  productCount(rows: number, upper: boolean, aPtr: number, aCol: number, bPtr: number, bCol: number): number;
  countEntries(
    rows: number,
    commutes: boolean,
    upper: boolean,
    aPtr: number,
    aCol: number,
    bPtr: number,
    bCol: number,
    places: number,
  ): number;
  rowNorms(rows: number, ptr: number, re: number, im: number, norms: number): void;
  sumOfSquares(rows: number, upper: boolean, ptr: number, col: number, re: number, im: number): number;
  sortSparseRows(rows: number, ptr: number, col: number, re: number, im: number): void;
}

/** The part of the WebAssembly interface that is used; every platform names it the same. */
export interface Platform {
  readonly Module: new (bytes: Uint8Array) => object;
  readonly Instance: new (module: object) => { readonly exports: object };
}

/** The platform does not give the memory, or more than the four gigabytes that addresses reach were asked for. */
export class OutOfMemory extends RangeError {}

const PAGE = 65536;
/** Memory up to this size is kept from call to call; an instance that grew beyond is let go after the call. */
const KEPT_BYTES = 32 * 2 ** 20;

/**
 * One instance of the kernels and its memory, laid out anew in every call: {@link Kernels.layout} reserves stretches from
 * the first free byte on, and nothing outlives the call that asked for it.
 */
export class Kernels {
  readonly exports: KernelExports;
  #doubles: Float64Array;

  /** @internal */
  constructor(exports: KernelExports) {
    this.exports = exports;
    this.#doubles = new Float64Array(exports.memory.buffer);
  }

  /** Bytes of memory, used or not. */
  get bytes(): number {
    return this.exports.memory.buffer.byteLength;
  }

  /** All of memory as doubles; made again when memory has grown, which detaches every earlier view. */
  get doubles(): Float64Array {
    if (this.#doubles.length === 0) this.#doubles = new Float64Array(this.exports.memory.buffer);
    return this.#doubles;
  }

  /**
   * Addresses of stretches of the given lengths in bytes from the first free byte on, each a multiple of 16.
   *
   * @throws RangeError when the platform does not give the memory
   */
  layout(lengths: readonly number[]): number[] {
    return this.stretches(this.exports.heapStart.value, lengths);
  }

  /** {@link Kernels.layout} from a given address on. */
  stretches(from: number, lengths: readonly number[]): number[] {
    let end = align(from);
    const starts = lengths.map((length) => {
      const start = end;
      end += align(length);
      return start;
    });
    const missing = end - this.bytes;
    if (missing > 0 && !this.#grow(Math.ceil(missing / PAGE))) {
      throw new OutOfMemory(`kernels: ${end} bytes of memory are not to be had; split the problem into smaller blocks`);
    }
    return starts;
  }

  #grow(pages: number): boolean {
    try {
      return this.exports.memory.grow(pages) >= 0;
    } catch {
      return false;
    }
  }
}

const align = (bytes: number): number => Math.ceil(bytes / 16) * 16;

/** Compiled at the first use; `null` where the platform has no WebAssembly with vectors of two doubles. */
let compiled: { readonly platform: Platform; readonly module: object } | null | undefined;
/** The instance that serves the calls of this thread, one after the other. */
let kept: Kernels | undefined;

function compile(): typeof compiled {
  const platform = (globalThis as { readonly WebAssembly?: Platform }).WebAssembly;
  if (platform === undefined) return null;
  try {
    return { platform, module: new platform.Module(fromBase64(KERNELS)) };
  } catch {
    // No vector instructions, or a page whose policy forbids to compile.
    return null;
  }
}

/**
 * A new instance with a memory of its own, or `undefined` where the platform cannot run the kernels or has no addresses left
 * for another memory (a memory takes more of them than bytes).
 */
export function newKernels(): Kernels | undefined {
  compiled ??= compile();
  if (!compiled) return undefined;
  let instance: { readonly exports: object };
  try {
    instance = new compiled.platform.Instance(compiled.module);
  } catch {
    return undefined;
  }
  return new Kernels(instance.exports as KernelExports);
}

/**
 * Runs something on the kept instance; `undefined` where the platform cannot run the kernels or does not give the memory,
 * so that the plain ones can take over.
 */
export function withKernels<T>(run: (kernels: Kernels) => T): T | undefined {
  kept ??= newKernels();
  if (kept === undefined) return undefined;
  try {
    return run(kept);
  } catch (error) {
    if (error instanceof OutOfMemory) return undefined;
    throw error;
  } finally {
    if (kept.bytes > KEPT_BYTES) kept = undefined;
  }
}

/** Whether this platform runs the WebAssembly kernels; elsewhere the plain TypeScript ones take over. */
export function kernelsAvailable(): boolean {
  kept ??= newKernels();
  return kept !== undefined;
}

const DIGITS = "ABCDEFGHIJKLMNOPQRSTUVWXYZabcdefghijklmnopqrstuvwxyz0123456789+/";

/** Bytes of a base64 text. */
function fromBase64(text: string): Uint8Array {
  const digits = text.replace(/=+$/, "");
  const bytes = new Uint8Array((digits.length * 3) >> 2);
  const value = new Uint8Array(128);
  for (let i = 0; i < DIGITS.length; i++) value[DIGITS.charCodeAt(i)] = i;
  let bits = 0;
  let held = 0;
  let at = 0;
  for (let i = 0; i < digits.length; i++) {
    held = ((held << 6) | (value[digits.charCodeAt(i)] as number)) & 0xffff;
    bits += 6;
    if (bits < 8) continue;
    bits -= 8;
    bytes[at++] = held >> bits;
  }
  return bytes;
}
