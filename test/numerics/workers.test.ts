import { join } from "node:path";
import { pathToFileURL } from "node:url";
import { Worker } from "node:worker_threads";
import { afterEach, describe, expect, it, vi } from "vitest";
import { batchedHermitianEigen, type HermitianEigenBatch } from "../../src/numerics/eigen/batch.js";
import {
  type BrowserWorker,
  type BrowserWorkerScope,
  serveWebWorker,
  webWorker,
} from "../../src/numerics/web-worker.js";
import { answerRequest } from "../../src/numerics/worker-protocol.js";
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

  it.each([true, false])("sees nothing of what is changed after the call (shared memory: %s)", async (share) => {
    vi.resetModules();
    if (!share) vi.stubGlobal("SharedArrayBuffer", undefined);
    const { KernelPool: Fresh } = await import("../../src/numerics/workers.js");
    vi.unstubAllGlobals();
    const { orders, re, im } = batch(80);
    const known = bits(batchedHermitianEigen(orders, re, im));
    const there = new Float64Array(new SharedArrayBuffer(re.byteLength));
    there.set(re);
    const pool = new Fresh({ factory: later().factory, size: 1, worthwhile: 0 });
    for (const parts of [re.slice(), there]) {
      const [list, imaginary] = [orders.slice(), im.slice()];
      const waiting = pool.batchedHermitianEigen(list, parts, imaginary);
      for (const m of [list, parts, imaginary]) m.fill(1);
      expect(bits(await waiting)).toEqual(known);
    }
    pool.close();
  });

  it("refuses what the plain call refuses, in its words, and goes on", async () => {
    const { orders, re, im } = batch(20);
    const known = bits(batchedHermitianEigen(orders, re, im));
    const pool = open(() => nodeWorker(), 1);
    const cases: unknown[][] = [
      [[200], new Array(40_000).fill(1)],
      [[2.5, 2.5, 2.5, 2.5], new Float64Array(25)],
      [[-9, 100], new Float64Array(81 + 10_000)],
      [[Number.NaN], new Float64Array(0)],
      [["2"], new Float64Array(4)],
      [undefined, re],
      [7, re],
      [orders, Float32Array.from(re)],
      [orders, re.slice(1)],
      [orders, re, null],
      [orders, re, Float32Array.from(im)],
      [orders, re, im.slice(1)],
      [orders, re, im, null],
      [orders, re, im, { upper: (): number => 1 }],
      [orders, re, im, { upper: "bogus" }],
    ];
    for (const input of cases) {
      const [a, b, c, d] = input as [never, never, never, never];
      let plain: unknown;
      try {
        batchedHermitianEigen(a, b, c, ...(input.length > 3 ? [d] : []));
      } catch (error) {
        plain = error;
      }
      expect(plain).toMatchObject({ name: "GoodBasisError" });
      await expect(pool.batchedHermitianEigen(a, b, c, ...(input.length > 3 ? [d] : []))).rejects.toEqual(plain);
    }
    expect((await pool.batchedHermitianEigen([], new Float64Array(0), undefined)).values.length).toBe(0);
    expect((await pool.batchedHermitianEigen([0, 0], new Float64Array(0), undefined)).orders.length).toBe(2);
    expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(known);
  });

  it("names the first matrix that is wrong, whichever worker answers first", async () => {
    const { orders, re } = batch(60);
    const starts = [10, 50].map((k) => orders.subarray(0, k).reduce((sum, n) => sum + n * n, 0));
    const spoiled = re.map((x, k) => (starts.includes(k) ? Number.NaN : x));
    const { factory } = later((worker, count) => ({
      post: (request, transfer) => void setTimeout(() => worker.post(request, transfer), count === 1 ? 20 : 0),
    }));
    await expect(open(factory, 3).batchedHermitianEigen(orders, spoiled, undefined)).rejects.toMatchObject({
      code: "not-finite",
      details: { matrix: 10 },
    });
  });

  it("rejects and goes on where a worker cannot be reached or understood", async () => {
    const { orders, re, im } = batch(40);
    const known = bits(batchedHermitianEigen(orders, re, im));
    const broken =
      (when: number) =>
      (worker: PoolWorker): Partial<PoolWorker> => {
        let posts = 0;
        return {
          post: (request, transfer) => {
            if (++posts === when) throw new Error("not today");
            worker.post(request, transfer);
          },
          terminate: () => {
            worker.terminate();
            throw new Error("gone already");
          },
        };
      };
    const answering = (answer: unknown) => (): Partial<PoolWorker> => ({
      listen: (onAnswer) => {
        setTimeout(() => onAnswer(answer as never), 2);
      },
      post: () => undefined,
    });
    const dying = (): Partial<PoolWorker> => ({ listen: (_, onDeath) => onDeath("stillborn") });
    const deaf = (): Partial<PoolWorker> => ({
      listen: () => {
        throw new Error("deaf");
      },
    });
    const few = new Float64Array(1);
    const flaws = [
      broken(1),
      broken(2),
      broken(5),
      ...[null, undefined, 7, {}, { error: null }, { error: {} }].map(answering),
      ...[
        { values: few, re: few, im: few },
        { values: 1, re: 2, im: 3 },
      ].map(answering),
      dying,
      deaf,
    ];
    for (const flaw of flaws) {
      const { factory } = later((worker, count) => (count === 1 ? flaw(worker) : {}));
      const pool = open(factory, 1);
      await expect(pool.batchedHermitianEigen(orders, re, im)).rejects.toMatchObject({ code: "worker" });
      expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(known);
    }
  });

  it("gives what a dead worker had not begun to the next one", async () => {
    const jobs = [1, 2].map((k) => randomSample(20, true, k));
    const { factory } = later((worker, count) => {
      if (count > 1) return {};
      return {
        listen: (_, onDeath) => void setTimeout(() => onDeath("out of order"), 2),
        post: () => undefined,
        terminate: worker.terminate,
      };
    });
    const pool = open(factory, 1);
    const [first, second] = jobs.map(({ re, im }) => pool.batchedHermitianEigen([20], re, im));
    await expect(first).rejects.toMatchObject({ code: "worker" });
    const { re, im } = jobs[1] as (typeof jobs)[number];
    expect(bits((await second) as HermitianEigenBatch)).toEqual(bits(batchedHermitianEigen([20], re, im)));
  });

  it("refuses settings that are none", () => {
    const { factory } = later();
    for (const options of [undefined, null, { factory: 1, size: 1 }, { factory, size: "2" }, { size: 0 }]) {
      expect(() => new KernelPool(options as never)).toThrow(expect.objectContaining({ code: "option" }));
    }
    for (const worthwhile of [Number.NaN, -1, "1"]) {
      expect(() => new KernelPool({ factory, size: 1, worthwhile } as never)).toThrow(
        expect.objectContaining({ code: "option" }),
      );
    }
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
  function joinedPair(): BrowserWorker & { fail(message: string): void; leave(): void; ended: boolean } {
    const toWorker: ((event: { data: unknown }) => void)[] = [];
    const toPage: ((event: { data: unknown }) => void)[] = [];
    const failures: ((event: { message?: string }) => void)[] = [];
    const send = (listeners: typeof toPage, message: unknown, transfer: ArrayBuffer[]): void => {
      const data = structuredClone(message, { transfer });
      setTimeout(() => {
        for (const listener of listeners) listener({ data });
      });
    };
    let open = true;
    const scope: BrowserWorkerScope = {
      postMessage: (message, transfer) => open && send(toPage, message, transfer as ArrayBuffer[]),
      addEventListener: (_, listener) => void toWorker.push(listener),
      close: () => {
        open = false;
      },
    };
    serveWebWorker(scope);
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
      leave: (): void => scope.close?.(),
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
    // A worker that closes itself says so first; a browser would not.
    const left = pool.batchedHermitianEigen(orders, re, im);
    pairs[1]?.leave();
    await expect(left).rejects.toMatchObject({ code: "worker", details: { reason: "it closed itself" } });
    expect(bits(await pool.batchedHermitianEigen(orders, re, im))).toEqual(known);
    pool.close();
    expect(pairs.map(({ ended }) => ended)).toEqual([true, true, true]);
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
