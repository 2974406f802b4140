import { answerRequest, type PoolAnswer, type PoolRequest } from "./worker-protocol.js";
import type { PoolWorker } from "./workers.js";

/** The part of a browser's `Worker` that a pool uses. */
export interface BrowserWorker {
  /** Sends something; the arrays in `transfer` move to the worker. */
  postMessage(message: unknown, transfer: ArrayBuffer[]): void;
  /** Who hears what the worker sends. */
  addEventListener(kind: "message", listener: (event: { readonly data: unknown }) => void): void;
  /** Who hears that something went wrong in the worker. */
  addEventListener(kind: "error" | "messageerror", listener: (event: { readonly message?: string }) => void): void;
  /** Ends the worker. */
  terminate(): void;
}

/** The part of a worker's global scope that it needs to answer. */
export interface BrowserWorkerScope {
  /** Sends something to the page; the arrays in `transfer` move there. */
  postMessage(message: unknown, transfer: ArrayBufferLike[]): void;
  /** Who hears what the page sends. */
  addEventListener(kind: "message", listener: (event: { readonly data: unknown }) => void): void;
  /** Ends the worker from inside; no event tells the page of it. */
  close?(): void;
}

/** What a worker sends last when it ends itself. */
const CLOSED = "goodbasis: the worker closed itself";

/**
 * A browser's worker as one of a pool. Its script is one line: `serveWebWorker(self)`.
 *
 * @param worker - a module worker whose script calls {@link serveWebWorker}
 */
export function webWorker(worker: BrowserWorker): PoolWorker {
  return {
    post: (request, transfer) => worker.postMessage(request, transfer),
    listen: (onAnswer, onDeath) => {
      worker.addEventListener("message", ({ data }) => {
        if (data === CLOSED) onDeath("it closed itself");
        else onAnswer(data as PoolAnswer);
      });
      for (const kind of ["error", "messageerror"] as const) {
        worker.addEventListener(kind, ({ message }) => onDeath(message ?? kind));
      }
    },
    terminate: () => worker.terminate(),
  };
}

/**
 * Makes a browser's worker answer a pool; what goes wrong beyond the mathematics reaches the pool as an `error` event. A
 * script that calls `self.close()` afterwards tells the pool first, since browsers send no event for that.
 *
 * @param scope - `self` of the worker
 */
export function serveWebWorker(scope: BrowserWorkerScope): void {
  scope.addEventListener("message", ({ data }) => {
    const { answer, transfer } = answerRequest(data as PoolRequest);
    scope.postMessage(answer, transfer);
  });
  const close = scope.close?.bind(scope);
  if (close === undefined) return;
  scope.close = () => {
    scope.postMessage(CLOSED, []);
    close();
  };
}
