import { GoodBasisError } from "../errors.js";
import { batchedHermitianEigen, type HermitianEigenBatch } from "./eigen/batch.js";
import type { EigenOptions, UpperTriangle } from "./eigen/types.js";
import { readOptions, requireBatch } from "./eigen/validate.js";
import { costOf, type Stretch, split } from "./stretches.js";
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

/** A stretch of matrices that one worker solves at a time, with its own copy of them. */
interface Task {
  readonly stretch: Stretch;
  readonly re: Float64Array;
  readonly im: Float64Array | undefined;
}

/** A batch under way. */
interface Run {
  readonly upper: UpperTriangle;
  readonly out: HermitianEigenBatch;
  readonly tasks: Task[];
  /** What goes wrong in the first of the matrices where something does; known once those before it are solved. */
  failure: { readonly first: number; readonly error: GoodBasisError } | undefined;
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
 * Matrices are copied at the call: what is changed afterwards is not seen. Where threads can share memory the copies lie there
 * and results are written where they stay: the arrays of a result then lie in shared memory. Elsewhere they are moved to and fro.
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
   * @throws GoodBasisError `option` for a number of workers that is not a whole number ≥ 0, a factory that is no function, or a
   * `worthwhile` that is not a number ≥ 0
   */
  constructor(options: PoolOptions) {
    const { factory, size, worthwhile = 4e6 } = options ?? {};
    const refuse = (expected: string, got: unknown): GoodBasisError => {
      const said = typeof got === "number" ? got : typeof got;
      return new GoodBasisError("option", `KernelPool: expected ${expected}, got ${said}; see PoolOptions`, { size });
    };
    if (!Number.isInteger(size) || size < 0) throw refuse("a whole number of workers ≥ 0 as size", size);
    if (typeof factory !== "function") throw refuse("a function that starts a worker as factory", factory);
    if (!(typeof worthwhile === "number" && worthwhile >= 0)) throw refuse("nanoseconds ≥ 0 as worthwhile", worthwhile);
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
   * @param re - the matrices one after the other; copied at the call
   * @param im - imaginary parts, or absent where all are real; copied at the call
   * @param options - whether the upper triangles are checked; they are unless told
   * @throws GoodBasisError (as a rejection) as `batchedHermitianEigen`; `worker` when a worker dies or cannot be understood, with
   * the first and last matrix it was working on
   */
  async batchedHermitianEigen(
    orders: ArrayLike<number>,
    re: Float64Array,
    im: Float64Array | undefined,
    options: Pick<EigenOptions, "upper"> = {},
  ): Promise<HermitianEigenBatch> {
    const shape = requireBatch(orders, re, im);
    const { upper } = readOptions("batchedHermitianEigen", options);
    const work = Array.from(shape.orders, (n) => costOf(n, im !== undefined));
    const total = work.reduce((sum, cost) => sum + cost, 0);
    if (this.#closed || this.#size === 0 || total === 0 || total < this.#worthwhile) {
      return batchedHermitianEigen(orders, re, im, options);
    }
    return new Promise((resolve, reject) => {
      const out = {
        orders: shape.orders,
        values: numbersFor(shape.rows),
        re: numbersFor(shape.numbers),
        im: im && numbersFor(shape.numbers),
      };
      const stretches = split(shape.orders, work, total / (8 * this.#size));
      const unfinished = stretches.length;
      const run: Run = { upper, out, tasks: [], failure: undefined, unfinished, resolve, reject };
      this.#queue.push(run);
      // Dealt one by one, so that the first worker does not wait for the last copy.
      for (const stretch of stretches) {
        const part = (m: Float64Array): Float64Array => copied(m.subarray(stretch.start, stretch.end));
        run.tasks.push({ stretch, re: part(re), im: im && part(im) });
        this.#deal();
        if (!this.#queue.includes(run)) break;
      }
    });
  }

  /** Ends all workers; what is under way is rejected. The pool goes on in the calling thread. */
  close(): void {
    this.#closed = true;
    const busy = this.#seats.splice(0);
    for (const { worker } of busy) end(worker);
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
      const { request, transfer } = requestFor(run, task);
      try {
        seat.worker.post(request, transfer);
      } catch (error) {
        // Rejects a run, so that this comes to an end.
        this.#bury(seat, `nothing can be sent to it: ${String(error)}`);
      }
    }
  }

  #hire(run: Run): Seat | undefined {
    if (this.#seats.length >= this.#size) return undefined;
    let reason: string | undefined;
    let seat: Seat | undefined;
    try {
      const hired: Seat = { worker: this.#factory(), held: [] };
      seat = hired;
      this.#seats.push(hired);
      hired.worker.listen(
        (answer) => this.#finish(hired, answer),
        (why) => {
          reason = why;
          this.#bury(hired, why);
        },
      );
      if (this.#seats.includes(hired)) return hired;
    } catch (error) {
      reason = String(error);
      if (seat !== undefined) this.#bury(seat, reason);
    }
    const message = `KernelPool: a worker could not be started (${reason}); check the factory, or use size 0`;
    this.#fail(run, new GoodBasisError("worker", message, { reason }));
    return undefined;
  }

  #finish(seat: Seat, answer: PoolAnswer): void {
    // A worker that was given up may still answer.
    if (!this.#seats.includes(seat)) return;
    const [done] = seat.held;
    if (done === undefined) return;
    const { run, task } = done;
    const { first } = task.stretch;
    if (isError(answer)) {
      // The error of the first matrix is the answer, as in the plain call, whoever comes first.
      if (run.failure === undefined || first < run.failure.first) {
        run.failure = { first, error: shifted(answer.error, first) };
      }
      const before = run.tasks.filter(({ stretch }) => stretch.first < first);
      run.unfinished -= run.tasks.length - before.length;
      run.tasks.splice(0, run.tasks.length, ...before);
    } else if (!takeResults(answer, run.out, task.stretch)) {
      this.#bury(seat, "its answer cannot be understood");
      return;
    }
    seat.held.shift();
    run.unfinished--;
    if (run.unfinished === 0 && this.#drop(run)) {
      if (run.failure === undefined) run.resolve(run.out);
      else run.reject(run.failure.error);
    }
    this.#deal();
  }

  /** Gives up a worker: what it was doing is rejected, what it had not begun waits for another one. */
  #bury(seat: Seat, reason: string): void {
    const at = this.#seats.indexOf(seat);
    if (at < 0) return;
    this.#seats.splice(at, 1);
    // A browser's worker lives on after an error.
    end(seat.worker);
    const [current, ...waiting] = seat.held;
    for (const { run, task } of waiting) run.tasks.unshift(task);
    // One that dies before it has been given anything is for its employer to mourn.
    if (current === undefined) return;
    const { run, task } = current;
    const { first, orders } = task.stretch;
    const last = first + orders.length - 1;
    const which = last === first ? `matrix ${last}` : `matrices ${first} to ${last}`;
    const message = `KernelPool: a worker died while it solved ${which} of the batch (${reason}); run the batch again, or with size 0`;
    this.#fail(run, new GoodBasisError("worker", message, { first, last, reason }));
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

/** Ends a worker, whatever it says to that. */
function end(worker: PoolWorker): void {
  try {
    worker.terminate();
  } catch {
    // Gone already.
  }
}

/** What a worker is asked, and the arrays that move to it. */
function requestFor({ upper, out }: Run, { stretch, re, im }: Task): { request: PoolRequest; transfer: ArrayBuffer[] } {
  const { orders, rowStart, rows, start, end } = stretch;
  if (isShared(out.values)) {
    const part = (m: Float64Array): Float64Array => m.subarray(start, end);
    const values = out.values.subarray(rowStart, rowStart + rows);
    const into = { orders, values, re: part(out.re), im: out.im && part(out.im) };
    return { request: { orders, re, im, upper, into }, transfer: [] };
  }
  const transfer = [re, im].flatMap((m) => (m?.buffer instanceof ArrayBuffer ? [m.buffer] : []));
  return { request: { orders, re, im, upper, into: undefined }, transfer };
}

const isObject = (value: unknown): value is object => typeof value === "object" && value !== null;

/** Whether an answer is an error of which something can be made. */
function isError(answer: PoolAnswer): answer is Extract<PoolAnswer, { error: unknown }> {
  if (!isObject(answer) || !("error" in answer) || !isObject(answer.error)) return false;
  const { code, message, details } = answer.error;
  return typeof code === "string" && typeof message === "string" && isObject(details);
}

/** Puts results where they belong; false where the answer does not hold them. */
function takeResults(answer: PoolAnswer, out: HermitianEigenBatch, stretch: Stretch): boolean {
  if (!isObject(answer)) return false;
  if ("written" in answer) return isShared(out.values);
  if (!("values" in answer)) return false;
  const { values, re, im } = answer;
  const numbers = stretch.end - stretch.start;
  const holds = (m: unknown, length: number): boolean => m instanceof Float64Array && m.length === length;
  if (!holds(values, stretch.rows) || !holds(re, numbers)) return false;
  if (out.im === undefined ? im !== undefined : im === undefined || !holds(im, numbers)) return false;
  out.values.set(values, stretch.rowStart);
  out.re.set(re, stretch.start);
  if (im !== undefined) out.im?.set(im, stretch.start);
  return true;
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

/** A copy, in memory that threads may share where there is such memory. */
function copied(m: Float64Array): Float64Array {
  const copy = numbersFor(m.length);
  copy.set(m);
  return copy;
}

/** The error of a worker, its matrix counted from the beginning of the batch. */
function shifted(error: Extract<PoolAnswer, { error: unknown }>["error"], first: number): GoodBasisError {
  const own = error.details["matrix"];
  const matrix = first + (typeof own === "number" ? own : 0);
  const message = error.message.replace(/^matrix \d+ of the batch/, `matrix ${matrix} of the batch`);
  return new GoodBasisError(error.code, message, { ...error.details, matrix });
}
