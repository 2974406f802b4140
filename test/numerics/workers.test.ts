import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { Worker } from "node:worker_threads";
import { afterEach, describe, expect, it, vi } from "vitest";
import { batchedHermitianEigen, type HermitianEigenBatch } from "../../src/numerics/eigen/batch.js";
import { type BrowserWorker, serveWebWorker, webWorker } from "../../src/numerics/web-worker.js";
import { answerRequest, type PoolRequest } from "../../src/numerics/worker-protocol.js";
import { KernelPool, type PoolWorker, type WorkerFactory } from "../../src/numerics/workers.js";
import { builtPackage } from "../build.js";
import { randomSample } from "./eigen/matrices.js";

/** Workers run compiled code: those of the package as it was built for the tests. */
const { nodeWorker } = (await import(pathToFileURL(join(builtPackage, "cli/node-worker.js")).href)) as {
  nodeWorker: (script?: URL) => PoolWorker;
};

function batch(count: number): { orders: Int32Array; re: Float64Array; im: Float64Array } {
  const orders = Int32Array.from({ length: count }, (_, k) => (k * 7) % 23);
  const matrices = Array.from(orders, (n, k) => randomSample(n, true, count + k));
  return {
    orders,
    re: Float64Array.from(matrices.flatMap(({ re }) => [...re])),
    im: Float64Array.from(matrices.flatMap(({ im = [] }) => [...im])),
  };
}

/** A worker inside this thread that answers a little later. */
function later(alter: (worker: PoolWorker, count: number) => Partial<PoolWorker> = () => ({})): {
  factory: WorkerFactory;
  started: () => number;
} {
  let started = 0;
  const factory = (): PoolWorker => {
    started++;
    let answer: Parameters<PoolWorker["listen"]>[0] | undefined;
    let alive = true;
    const worker: PoolWorker = {
      post: (request) => {
        setTimeout(() => alive && answer?.(answerRequest(request).answer), 1);
      },
      listen: (onAnswer) => {
        answer = onAnswer;
      },
      terminate: () => {
        alive = false;
      },
    };
    return { ...worker, ...alter(worker, started) };
  };
  return { factory, started: () => started };
}

const bits = ({ values, re, im }: HermitianEigenBatch): BigInt64Array[] =>
  [values, re, im ?? new Float64Array(0)].map((m) => new BigInt64Array(m.slice().buffer));

describe("KernelPool", () => {
  const pools: KernelPool[] = [];
  const open = (factory: WorkerFactory, size: number, worthwhile = 0): KernelPool => {
    const pool = new KernelPool({ factory, size, worthwhile });
    pools.push(pool);
    return pool;
  };
  afterEach(() => {
    for (const pool of pools.splice(0)) pool.close();
  });

  it("finds the same bits with any number of threads, and keeps them", async () => {
    const { orders, re, im } = batch(200);
    const known = bits(batchedHermitianEigen(orders, re, im));
    const knownReal = bits(batchedHermitianEigen(orders, re, undefined));
    const before = re.slice();
    for (const size of [0, 1, 3]) {
      const pool = open(() => nodeWorker(), size);
      expect(pool.running).toBe(0);
      expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(known);
      expect(pool.running).toBe(size);
      expect(bits(await pool.batchedHermitianEigen(orders, re, undefined))).toEqual(knownReal);
      expect(pool.running).toBe(size);
    }
    expect(re).toEqual(before);
  });

  it("does small work alone, and all work once it is closed", async () => {
    const { orders, re, im } = batch(12);
    const { factory, started } = later();
    const pool = open(factory, 2, 1e12);
    await pool.batchedHermitianEigen(orders, re, im);
    expect(started()).toBe(0);
    const other = open(factory, 2);
    other.close();
    expect(bits(await other.batchedHermitianEigen(orders, re, im))).toEqual(
      bits(batchedHermitianEigen(orders, re, im)),
    );
    expect(started()).toBe(0);
  });

  it("serves batches that overlap, each with its own answer", async () => {
    const { factory, started } = later();
    const pool = open(factory, 2);
    const jobs = [30, 1, 17, 50].map(batch);
    const found = await Promise.all(jobs.map(({ orders, re, im }) => pool.batchedHermitianEigen(orders, re, im)));
    jobs.forEach(({ orders, re, im }, k) => {
      expect(bits(found[k] as HermitianEigenBatch)).toEqual(bits(batchedHermitianEigen(orders, re, im)));
    });
    expect(started()).toBe(2);
  });

  it("hands on what is wrong with a matrix, counted from the beginning of the batch", async () => {
    const { orders, re, im } = batch(60);
    const start = orders.subarray(0, 40).reduce((sum, n) => sum + n * n, 0);
    const spoiled = re.map((x, k) => (k === start ? Number.NaN : x));
    const pool = open(() => nodeWorker(), 2);
    await expect(pool.batchedHermitianEigen(orders, spoiled, im)).rejects.toMatchObject({
      code: "not-finite",
      message: expect.stringMatching(/^matrix 40 of the batch/),
      details: { matrix: 40 },
    });
    await expect(pool.batchedHermitianEigen(orders, re.slice(1), im)).rejects.toMatchObject({ code: "shape" });
    expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(bits(batchedHermitianEigen(orders, re, im)));
  });

  it("rejects with the matrices that a dying thread worked on, and goes on with a new one", async () => {
    const { orders, re, im } = batch(40);
    let starts = 0;
    const dying = (code: string): URL => new URL(`data:text/javascript,${encodeURIComponent(code)}`);
    const factory = (): PoolWorker => {
      starts++;
      const code = 'import { parentPort } from "node:worker_threads"; parentPort.on("message", () => process.exit(3));';
      return starts === 1 ? nodeWorker(dying(code)) : nodeWorker();
    };
    const pool = open(factory, 1);
    await expect(pool.batchedHermitianEigen(orders, re, im)).rejects.toMatchObject({
      code: "worker",
      message: expect.stringMatching(/matrices 0 to \d+ of the batch \(exit code 3\)/),
      details: { first: 0, reason: "exit code 3" },
    });
    expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(bits(batchedHermitianEigen(orders, re, im)));
    const throwing = open(
      () =>
        nodeWorker(
          dying(
            'import { parentPort } from "node:worker_threads"; parentPort.on("message", () => { throw new Error("broken"); });',
          ),
        ),
      2,
    );
    await expect(throwing.batchedHermitianEigen(orders, re, im)).rejects.toMatchObject({
      code: "worker",
      details: { reason: "Error: broken" },
    });
  });

  it("rejects what waits when no worker can be started, and when it is closed", async () => {
    const { orders, re, im } = batch(20);
    const broken = open(() => {
      throw new Error("no threads today");
    }, 2);
    const both = [1, 2].map(() => broken.batchedHermitianEigen(orders, re, im));
    for (const result of await Promise.allSettled(both)) {
      expect(result).toMatchObject({ status: "rejected", reason: { code: "worker" } });
    }
    const { factory } = later();
    const pool = open(factory, 1);
    const waiting = [1, 2].map(() => pool.batchedHermitianEigen(orders, re, im));
    pool.close();
    for (const result of await Promise.allSettled(waiting)) {
      expect(result).toMatchObject({ status: "rejected", reason: { code: "worker" } });
    }
    expect(pool.running).toBe(0);
  });

  it("moves matrices and results where threads cannot share memory", async () => {
    vi.resetModules();
    vi.stubGlobal("SharedArrayBuffer", undefined);
    const fresh = await import("../../src/numerics/workers.js");
    vi.unstubAllGlobals();
    const { orders, re, im } = batch(50);
    const pool = new fresh.KernelPool({ factory: () => nodeWorker(), size: 2, worthwhile: 0 });
    const found = await pool.batchedHermitianEigen(orders, re, im);
    const real = await pool.batchedHermitianEigen(orders, re, undefined);
    pool.close();
    expect(bits(found)).toEqual(bits(batchedHermitianEigen(orders, re, im)));
    expect(bits(real)).toEqual(bits(batchedHermitianEigen(orders, re, undefined)));
    expect(found.re.buffer).toBeInstanceOf(ArrayBuffer);
  });

  it("reads matrices where they lie in shared memory already", async () => {
    const { orders, re } = batch(50);
    const there = new Float64Array(new SharedArrayBuffer(re.byteLength));
    there.set(re);
    const requests: PoolRequest[] = [];
    const { factory } = later((worker) => ({
      post: (request, transfer) => {
        requests.push(request);
        worker.post(request, transfer);
      },
    }));
    const found = await open(factory, 2).batchedHermitianEigen(orders, there, undefined);
    expect(bits(found)).toEqual(bits(batchedHermitianEigen(orders, re, undefined)));
    expect(requests.length).toBeGreaterThan(2);
    expect(new Set(requests.map((request) => request.re.buffer))).toEqual(new Set([there.buffer]));
  });

  it("refuses a number of workers that is none", () => {
    for (const size of [-1, 0.5, Number.NaN]) {
      expect(() => new KernelPool({ factory: later().factory, size })).toThrow(
        expect.objectContaining({ code: "option" }),
      );
    }
  });
});

describe("web workers", () => {
  /** A browser's worker and its scope, joined inside this thread; messages are cloned as a browser does. */
  function joinedPair(): BrowserWorker & { fail(message: string): void; ended: boolean } {
    const toWorker: ((event: { data: unknown }) => void)[] = [];
    const toPage: ((event: { data: unknown }) => void)[] = [];
    const failures: ((event: { message?: string }) => void)[] = [];
    const send = (listeners: typeof toPage, message: unknown, transfer: ArrayBuffer[]): void => {
      const data = structuredClone(message, { transfer });
      setTimeout(() => {
        for (const listener of listeners) listener({ data });
      });
    };
    serveWebWorker({
      postMessage: (message, transfer) => send(toPage, message, transfer as ArrayBuffer[]),
      addEventListener: (_, listener) => void toWorker.push(listener),
    });
    const worker = {
      ended: false,
      postMessage: (message: unknown, transfer: ArrayBuffer[]): void => send(toWorker, message, transfer),
      addEventListener: (kind: string, listener: (event: { data: unknown; message?: string }) => void): void => {
        if (kind === "message") toPage.push(listener);
        else failures.push((event) => listener({ data: undefined, ...event }));
      },
      terminate: () => {
        worker.ended = true;
      },
      fail: (message: string): void => {
        for (const listener of failures) listener({ message });
      },
    };
    return worker;
  }

  it("answer a pool through the same protocol, and are ended with it", async () => {
    const { orders, re, im } = batch(50);
    const pairs: ReturnType<typeof joinedPair>[] = [];
    const factory = (): PoolWorker => {
      const pair = joinedPair();
      pairs.push(pair);
      return webWorker(pair);
    };
    const pool = new KernelPool({ factory, size: 1, worthwhile: 0 });
    const known = bits(batchedHermitianEigen(orders, re, im));
    expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(known);
    const waiting = pool.batchedHermitianEigen(orders, re, im);
    pairs[0]?.fail("out of memory");
    await expect(waiting).rejects.toMatchObject({ code: "worker", details: { reason: "out of memory" } });
    // The first one still answers what it was asked: nobody listens.
    expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(known);
    pool.close();
    expect(pairs.map(({ ended }) => ended)).toEqual([true, true]);
  });
});

describe("the script of a Node worker", () => {
  it("keeps a process alive while it works, and no longer", async () => {
    const pool = join(builtPackage, "numerics/workers.js");
    const node = join(builtPackage, "cli/node-worker.js");
    const code = `
      import { KernelPool } from ${JSON.stringify(pathToFileURL(pool).href)};
      import { nodeWorker } from ${JSON.stringify(pathToFileURL(node).href)};
      const pool = new KernelPool({ factory: () => nodeWorker(), size: 1, worthwhile: 0 });
      const { values } = await pool.batchedHermitianEigen(Array(40).fill(3), new Float64Array(360).fill(1), undefined);
      if (Math.abs(values[119] - 3) > 1e-14) throw new Error("wrong");
      process.exitCode = 7;
    `;
    const worker = new Worker(new URL(`data:text/javascript,${encodeURIComponent(code)}`));
    const exit = await new Promise((resolve) => worker.on("exit", resolve));
    // Reached the end, and only then.
    expect(exit).toBe(7);
  });
});
