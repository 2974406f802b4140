import { GoodBasisError } from "../errors.js";
import { batchedHermitianEigen, type HermitianEigenBatch } from "./eigen/batch.js";
import type { EigenOptions } from "./eigen.js";
import type { PoolAnswer, PoolRequest } from "./worker-protocol.js";

/** One thread that answers {@link PoolRequest}s, whatever the platform calls it. */
export interface PoolWorker {
  /** Sends a request; the arrays in `transfer` move to the worker. */
  post(request: PoolRequest, transfer: ArrayBuffer[]): void;
  /** Says once who hears the answers and who hears that the worker is gone or cannot be understood. */
  listen(onAnswer: (answer: PoolAnswer) => void, onDeath: (reason: string) => void): void;
  /** Ends the thread. */
  terminate(): void;
}

/** Starts a worker: `nodeWorker` of `goodbasis/node`, or `() => webWorker(new Worker(url, …))` in a browser. */
export type WorkerFactory = () => PoolWorker;

/** Settings of a {@link KernelPool}. */
export interface PoolOptions {
  /** How to start a worker. */
  readonly factory: WorkerFactory;
  /** Number of workers, the processors less one at most being sensible; 0 switches them off. */
  readonly size: number;
  /** Estimated nanoseconds of work below which the calling thread does it alone; 4e6 unless given. */
  readonly worthwhile?: number;
}

/** A stretch of matrices that one worker solves at a time. */
interface Task {
  readonly first: number;
  readonly orders: Int32Array;
  readonly rowStart: number;
  readonly rows: number;
  readonly start: number;
  readonly end: number;
}

/** A batch under way. */
interface Run {
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
  readonly options: Pick<EigenOptions, "upper">;
  readonly out: HermitianEigenBatch;
  readonly tasks: Task[];
  unfinished: number;
  readonly resolve: (batch: HermitianEigenBatch) => void;
  readonly reject: (error: unknown) => void;
}

/** A worker, and what it was given: what it is doing, and what it finds waiting when that is done. */
interface Seat {
  readonly worker: PoolWorker;
  readonly held: { readonly run: Run; readonly task: Task }[];
}

/** Tasks that a worker holds: one to work on and one more, so that it never waits for the calling thread. */
const HELD = 2;

/**
 * A kept pool of workers that share out independent eigenproblems. Workers are started at first need and kept, since
 * starting one costs as much as a thousand blocks of order twenty.
 *
 * Where threads can share memory, matrices are copied there once and results written where they stay: the arrays of a
 * result then lie in shared memory. Elsewhere they are moved to and fro.
 *
 * The result is the same, bit for bit, with any number of workers and with none: every matrix is solved by the same code,
 * whoever runs it. A worker that dies rejects the batch it worked for, naming the matrices; the next batch gets a new one.
 *
 * ```ts no-run
 * import { KernelPool } from "goodbasis/kernels";
 * import { nodeWorker } from "goodbasis/node";
 *
 * const pool = new KernelPool({ factory: () => nodeWorker(), size: 3 });
 * const orders = new Int32Array(1000).fill(20);
 * const batch = await pool.batchedHermitianEigen(orders, new Float64Array(1000 * 400), undefined);
 * pool.close();
 * console.log(batch.values);
 * ```
 */
export class KernelPool {
  readonly #factory: WorkerFactory;
  readonly #size: number;
  readonly #worthwhile: number;
  readonly #seats: Seat[] = [];
  readonly #queue: Run[] = [];
  #closed = false;

  /**
   * @param options - factory and number of workers
   * @throws GoodBasisError `option` for a number of workers that is not a whole number ≥ 0
   */
  constructor(options: PoolOptions) {
    const { factory, size, worthwhile = 4e6 } = options;
    if (!Number.isInteger(size) || size < 0) {
      throw new GoodBasisError("option", `KernelPool: expected a whole number of workers ≥ 0, got ${size}`, { size });
    }
    this.#factory = factory;
    this.#size = size;
    this.#worthwhile = worthwhile;
  }

  /** Workers that are running now. */
  get running(): number {
    return this.#seats.length;
  }

  /**
   * `batchedHermitianEigen`, shared out where there is enough work to pay for it.
   *
   * @param orders - the order n of each matrix
   * @param re - the matrices one after the other; copied before they are sent
   * @param im - imaginary parts, or absent where all are real
   * @param options - whether the upper triangles are checked; they are unless told
   * @throws GoodBasisError (as a rejection) as `batchedHermitianEigen`; `worker` when a worker dies, with the first and
   * last matrix it was working on
   */
  async batchedHermitianEigen(
    orders: ArrayLike<number>,
    re: Float64Array,
    im: Float64Array | undefined,
    options: Pick<EigenOptions, "upper"> = {},
  ): Promise<HermitianEigenBatch> {
    const work = Array.from(orders, (n) => costOf(n, im !== undefined));
    const total = work.reduce((sum, cost) => sum + cost, 0);
    const numbers = Array.from(orders).reduce((sum, n) => sum + n * n, 0);
    const fits = re.length === numbers && (im === undefined || im.length === numbers);
    // What does not fit is refused by the plain call, in its words.
    if (this.#closed || this.#size === 0 || total < this.#worthwhile || !fits) {
      return batchedHermitianEigen(orders, re, im, options);
    }
    const tasks = split(Int32Array.from(orders), work, total / (8 * this.#size));
    return new Promise((resolve, reject) => {
      const out = {
        orders: Int32Array.from(orders),
        values: numbersFor(Array.from(orders).reduce((sum, n) => sum + n, 0)),
        re: numbersFor(numbers),
        im: im && numbersFor(numbers),
      };
      this.#queue.push({ re, im, options, out, tasks, unfinished: tasks.length, resolve, reject });
      this.#deal();
    });
  }

  /** Ends all workers; what is under way is rejected. The pool goes on in the calling thread. */
  close(): void {
    this.#closed = true;
    const busy = this.#seats.splice(0);
    for (const { worker } of busy) worker.terminate();
    const error = new GoodBasisError("worker", "KernelPool: closed before the batch was finished; await it first");
    for (const run of new Set([...this.#queue.splice(0), ...busy.flatMap(({ held }) => held.map(({ run }) => run))])) {
      run.reject(error);
    }
  }

  /** Gives waiting tasks to idle workers, starting those that are missing. */
  #deal(): void {
    for (;;) {
      const run = this.#queue.find(({ tasks }) => tasks.length > 0);
      const task = run?.tasks[0];
      if (run === undefined || task === undefined) return;
      const idle = this.#seats.find(({ held }) => held.length === 0);
      const seat = idle ?? this.#hire(run) ?? this.#seats.find(({ held }) => held.length < HELD);
      // Where a worker could not be started that run has been rejected; the next one gets its own try.
      if (!this.#queue.includes(run)) continue;
      if (seat === undefined) return;
      run.tasks.shift();
      seat.held.push({ run, task });
      const { orders, rowStart, rows, start, end } = task;
      const upper = run.options.upper ?? "check";
      if (isShared(run.out.values)) {
        const part = (m: Float64Array): Float64Array => m.subarray(start, end);
        const values = run.out.values.subarray(rowStart, rowStart + rows);
        const into = { orders, values, re: part(run.out.re), im: run.out.im && part(run.out.im) };
        // Copied part by part, so that the first worker does not wait for the last copy.
        const matrices = { re: shared(part(run.re)), im: run.im && shared(part(run.im)) };
        seat.worker.post({ orders, ...matrices, upper, into }, []);
      } else {
        const re = run.re.slice(start, end);
        const im = run.im?.slice(start, end);
        const transfer = im === undefined ? [re.buffer] : [re.buffer, im.buffer];
        seat.worker.post({ orders, re, im, upper, into: undefined }, transfer);
      }
    }
  }

  #hire(run: Run): Seat | undefined {
    if (this.#seats.length >= this.#size) return undefined;
    try {
      const seat: Seat = { worker: this.#factory(), held: [] };
      seat.worker.listen(
        (answer) => this.#finish(seat, answer),
        (reason) => this.#bury(seat, reason),
      );
      this.#seats.push(seat);
      return seat;
    } catch (error) {
      const message = `KernelPool: a worker could not be started (${String(error)}); check the factory, or use size 0`;
      this.#fail(run, new GoodBasisError("worker", message));
      return undefined;
    }
  }

  #finish(seat: Seat, answer: PoolAnswer): void {
    // A worker that was given up may still answer.
    if (!this.#seats.includes(seat)) return;
    const done = seat.held.shift();
    if (done !== undefined) {
      const { run, task } = done;
      if ("error" in answer) this.#fail(run, shifted(answer.error, task.first));
      else {
        if ("values" in answer) {
          run.out.values.set(answer.values, task.rowStart);
          run.out.re.set(answer.re, task.start);
          if (answer.im !== undefined) run.out.im?.set(answer.im, task.start);
        }
        run.unfinished--;
        if (run.unfinished === 0 && this.#drop(run)) run.resolve(run.out);
      }
    }
    this.#deal();
  }

  #bury(seat: Seat, reason: string): void {
    const at = this.#seats.indexOf(seat);
    if (at < 0) return;
    this.#seats.splice(at, 1);
    // A browser's worker lives on after an error.
    seat.worker.terminate();
    const [current, ...waiting] = seat.held;
    for (const { run, task } of waiting) run.tasks.unshift(task);
    if (current !== undefined) {
      const { run, task } = current;
      const last = task.first + task.orders.length - 1;
      const which = last === task.first ? `matrix ${last}` : `matrices ${task.first} to ${last}`;
      const message = `KernelPool: a worker died while it solved ${which} of the batch (${reason}); run the batch again, or with size 0`;
      this.#fail(run, new GoodBasisError("worker", message, { first: task.first, last, reason }));
    }
    this.#deal();
  }

  #fail(run: Run, error: GoodBasisError): void {
    if (this.#drop(run)) run.reject(error);
  }

  /** Takes a run out of the queue; false when it has been taken out before. */
  #drop(run: Run): boolean {
    const at = this.#queue.indexOf(run);
    if (at >= 0) this.#queue.splice(at, 1);
    return at >= 0;
  }
}

/** Memory that threads may share, where the platform has it: everywhere in Node, in browsers on isolated pages. */
const Shared: (new (bytes: number) => ArrayBufferLike) | undefined = (
  globalThis as { readonly SharedArrayBuffer?: new (bytes: number) => ArrayBufferLike }
).SharedArrayBuffer;

/** Zeros, shared where possible, so that workers write results where they stay. */
function numbersFor(length: number): Float64Array {
  return Shared === undefined ? new Float64Array(length) : new Float64Array(new Shared(8 * length));
}

const isShared = (m: Float64Array): boolean => Shared !== undefined && m.buffer instanceof Shared;

/** A copy that threads may read; the array itself where there is no such memory, or where it lies there already. */
function shared(m: Float64Array): Float64Array {
  if (Shared === undefined || isShared(m)) return m;
  const copy = numbersFor(m.length);
  copy.set(m);
  return copy;
}

/** Rough nanoseconds for one matrix. */
function costOf(n: number, complex: boolean): number {
  return (complex ? 3 : 1) * (n ** 3 + 10 * n ** 2);
}

/** Stretches of about the given amount of work each. */
function split(orders: Int32Array, work: readonly number[], share: number): Task[] {
  const tasks: Task[] = [];
  let first = 0;
  let rowStart = 0;
  let start = 0;
  let load = 0;
  let row = 0;
  let at = 0;
  orders.forEach((n, k) => {
    load += work[k] as number;
    row += n;
    at += n * n;
    if (load < share && k < orders.length - 1) return;
    tasks.push({ first, orders: orders.slice(first, k + 1), rowStart, rows: row - rowStart, start, end: at });
    first = k + 1;
    rowStart = row;
    start = at;
    load = 0;
  });
  return tasks;
}

/** The error of a worker, its matrix counted from the beginning of the batch. */
function shifted(error: Extract<PoolAnswer, { error: unknown }>["error"], first: number): GoodBasisError {
  const own = error.details["matrix"];
  const matrix = first + (typeof own === "number" ? own : 0);
  const message = error.message.replace(/^matrix \d+ of the batch/, `matrix ${matrix} of the batch`);
  return new GoodBasisError(error.code, message, { ...error.details, matrix });
}
