import { spawnSync } from "node:child_process";
import { readFileSync } from "node:fs";
import { join } from "node:path";
import { fileURLToPath, pathToFileURL } from "node:url";
import { setFlagsFromString } from "node:v8";
import { runInNewContext } from "node:vm";
import { afterEach, describe, expect, it, vi } from "vitest";
import { productDense } from "../../../src/numerics/bounded/dense.js";
import type { Csr } from "../../../src/numerics/csr.js";
import { multiplyDense } from "../../../src/numerics/dense.js";
import { batchedHermitianEigen } from "../../../src/numerics/eigen/batch.js";
import { plainEigen } from "../../../src/numerics/eigen/plain.js";
import { hermitianEigen, hermitianEigenBy } from "../../../src/numerics/eigen.js";
import { fromDense } from "../../../src/numerics/sparse.js";
import { SparseArena } from "../../../src/numerics/wasm/arena.js";
import { wasmMultiplyDense } from "../../../src/numerics/wasm/dense.js";
import { wasmEigen } from "../../../src/numerics/wasm/eigen.js";
import {
  type KernelExports,
  kernelsAvailable,
  newKernels,
  type Platform,
  withKernels,
} from "../../../src/numerics/wasm/runtime.js";
import { builtPackage } from "../../build.js";
import { randomSample, U } from "../eigen/matrices.js";

const assembly = new URL("../../../src/numerics/wasm/assembly/", import.meta.url);

describe("the compiled kernels", () => {
  it("are what their sources compile to, byte for byte", async () => {
    const { compileKernels } = (await import(/* @vite-ignore */ new URL("build.js", assembly).href)) as {
      compileKernels: () => Promise<string>;
    };
    expect(await compileKernels()).toBe(readFileSync(fileURLToPath(new URL("../kernels.ts", assembly)), "utf8"));
  });

  it("run here, so that the tests of both engines test two things", () => {
    expect(kernelsAvailable()).toBe(true);
    const { n, re, im } = randomSample(40, true, 1);
    const fast = hermitianEigenBy(wasmEigen, n, re, im);
    expect(hermitianEigen(n, re, im)).toEqual(fast);
    expect(hermitianEigenBy(plainEigen, n, re, im).re).not.toEqual(fast.re);
  });
});

describe("the two implementations", () => {
  it.each([false, true])("find the same eigenvalues and the same invariant subspaces (complex: %s)", (complex) => {
    for (const n of [2, 3, 7, 30, 33, 80, 130]) {
      const { re, im } = randomSample(n, complex, n);
      const fast = hermitianEigenBy(wasmEigen, n, re, im);
      const plain = hermitianEigenBy(plainEigen, n, re, im);
      const norm = Math.max(...plain.values.map(Math.abs));
      for (let k = 0; k < n; k++) {
        expect(Math.abs((fast.values[k] as number) - (plain.values[k] as number))).toBeLessThanOrEqual(
          20 * n * U * norm,
        );
        let p = 0;
        let q = 0;
        for (let j = k * n; j < k * n + n; j++) {
          const [a, b] = [fast.re[j] as number, fast.im?.[j] ?? 0];
          const [c, d] = [plain.re[j] as number, plain.im?.[j] ?? 0];
          p += a * c + b * d;
          q += a * d - b * c;
        }
        // Random levels lie about norm / n apart, hardly ever a thousand times closer.
        expect(Math.abs(Math.hypot(p, q) - 1)).toBeLessThanOrEqual(1e-9);
      }
    }
  });
});

describe("without WebAssembly", () => {
  afterEach(() => {
    vi.unstubAllGlobals();
    vi.resetModules();
  });

  const broken = {
    Module: class {
      constructor() {
        throw new Error("no vectors here");
      }
    },
    Instance: class {},
  };
  const { Module, Instance } = (globalThis as { readonly WebAssembly?: Platform } as { readonly WebAssembly: Platform })
    .WebAssembly;
  /** Instances cannot be made, or their memory cannot grow, as where a process may have few addresses. */
  const crowded = {
    Module,
    Instance: class {
      constructor() {
        throw new RangeError("could not allocate memory");
      }
    },
  };
  const narrow = {
    Module,
    Instance: class {
      readonly exports: object;
      constructor(module: object) {
        const { exports } = new Instance(module);
        const grow = (): never => {
          throw new RangeError("no more memory");
        };
        this.exports = { ...exports, memory: { buffer: (exports as KernelExports).memory.buffer, grow } };
      }
    },
  };
  it.each([
    ["absent", undefined, false],
    ["refusing to compile", broken, false],
    ["without room for an instance", crowded, false],
    ["without memory", narrow, true],
  ])("the plain kernels take over (%s)", async (_, platform, available) => {
    vi.resetModules();
    const fresh = await import("../../../src/numerics/kernels.js");
    const { wasmEigen: absent } = await import("../../../src/numerics/wasm/eigen.js");
    const { n, re, im } = randomSample(40, true, 2);
    const square = { n, re, im };
    const csr = fromDense(n, n, re, im);
    // The platform itself uses WebAssembly now and then: it is gone only while nothing is awaited.
    vi.stubGlobal("WebAssembly", platform);
    const found = [
      fresh.kernelsAvailable(),
      absent({ count: 1, n, re, im, window: {} }),
      fresh.hermitianEigen(n, re, im),
      fresh.product(square, square),
      inArena(new fresh.SparseArena(), csr),
    ];
    vi.unstubAllGlobals();
    const value = { n, ...multiplyDense(n, square, square) };
    expect(found).toEqual([
      available,
      undefined,
      hermitianEigenBy(plainEigen, n, re, im),
      { value, error: productDense(square, square).error },
      inArena(new SparseArena({ own: undefined }), csr),
    ]);
  });

  it.skipIf(process.platform !== "linux")("a process that may have few addresses works all the same", () => {
    const kernels = pathToFileURL(join(builtPackage, "numerics/kernels.js")).href;
    const code = `
      const { hermitianEigen, kernelsAvailable, SparseArena } = await import(${JSON.stringify(kernels)});
      const { values } = hermitianEigen(3, new Float64Array(9).fill(1));
      const arena = new SparseArena();
      console.log(Math.abs(values[2] - 3) < 1e-14, typeof kernelsAvailable(), arena.mark().depth);
    `;
    const run = 'ulimit -v 9000000; exec "$0" --input-type=module -e "$1"';
    const { stdout, stderr } = spawnSync("sh", ["-c", run, process.execPath, code], { encoding: "utf8" });
    expect([stdout, stderr]).toEqual(["true boolean 0\n", ""]);
  });
});

/** What an arena makes of a matrix and its square. */
function inArena(arena: SparseArena, csr: Csr): unknown[] {
  const a = arena.load(csr);
  const { value, error } = arena.product(a, a);
  return [arena.read(a), arena.read(value), Math.fround(error)];
}

/** Bytes that are in use after everything that can be collected has been. */
function used(): number {
  setFlagsFromString("--expose-gc");
  const collect = runInNewContext("gc") as () => void;
  collect();
  collect();
  const { heapUsed, arrayBuffers } = process.memoryUsage();
  return heapUsed + arrayBuffers;
}

describe("memory", () => {
  const bytes = (): number => withKernels((kernels) => kernels.bytes) ?? 0;

  it("does not grow over a hundred thousand small calls", () => {
    const small = [2, 3, 5, 8].map((n) => randomSample(n, true, n));
    const solve = (times: number): void => {
      for (let k = 0; k < times; k++) {
        const { n, re, im } = small[k % 4] as (typeof small)[number];
        hermitianEigen(n, re, im);
      }
    };
    solve(2000);
    const before = bytes();
    const usedBefore = used();
    solve(100_000);
    expect(bytes()).toBe(before);
    // A leak of eleven bytes a call would show.
    expect(used() - usedBefore).toBeLessThan(2 ** 20);
    expect(before).toBeLessThanOrEqual(2 ** 21);
  });

  it("does not grow with the length of a batch", () => {
    const orders = new Int32Array(5000).fill(12);
    const re = Float64Array.from({ length: 5000 * 144 }, (_, k) => Math.sin((k % 12) * (Math.floor(k / 12) % 12)));
    batchedHermitianEigen(orders.subarray(0, 500), re.subarray(0, 500 * 144), undefined);
    const before = bytes();
    batchedHermitianEigen(orders, re, undefined);
    expect(bytes()).toBe(before);
  });

  it("is let go after a call that needed much, and views are made anew after it has grown", () => {
    const { n, re, im } = randomSample(1200, false, 1);
    expect(hermitianEigen(n, re, im, { window: { from: 0, to: 1 } }).values.length).toBe(1);
    expect(bytes()).toBeLessThanOrEqual(2 ** 21);
    const kernels = newKernels();
    const [start = 0] = kernels?.layout([8 * 2 ** 18]) ?? [];
    kernels?.doubles.fill(7, start / 8, start / 8 + 2 ** 18);
    kernels?.layout([8 * 2 ** 20]);
    expect(kernels?.doubles[start / 8 + 2 ** 18 - 1]).toBe(7);
  });

  it("is not written where a matrix would need more than addresses reach: the sizes are counted without a sign", () => {
    const none = new Float64Array(0);
    // Below the first order the scratch of a real matrix is a negative number; near the second one it passes all addresses.
    for (const n of [
      11_585,
      11_600,
      13_000,
      ...Array.from({ length: 50 }, (_, k) => 16_340 + k),
      23_171,
      46_341,
      65_536,
    ]) {
      for (const im of [undefined, none]) {
        expect(wasmEigen({ count: 1, n, re: none, im, window: {} })).toBeUndefined();
      }
      if (n > 13_377)
        expect(wasmMultiplyDense(n, { re: none, im: undefined }, { re: none, im: undefined })).toBeUndefined();
      expect(wasmMultiplyDense(n, { re: none, im: none }, { re: none, im: none })).toBeUndefined();
    }
  });

  it("that is not to be had is an error in an instance of one's own, and otherwise leaves the work to the plain twin", () => {
    expect(() => newKernels()?.layout([2 ** 40])).toThrow(RangeError);
    expect(withKernels((kernels) => kernels.layout([2 ** 40]))).toBeUndefined();
    expect(() =>
      withKernels(() => {
        throw new Error("anything else");
      }),
    ).toThrow("anything else");
  });
});
