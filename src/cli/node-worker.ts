import { Worker } from "node:worker_threads";
import type { PoolAnswer } from "../numerics/worker-protocol.js";
import type { PoolWorker } from "../numerics/workers.js";

/**
 * Starts a worker thread of Node for a `KernelPool`. An idle one does not keep the process alive.
 *
 * @param script - what the thread runs; the kernels' own script unless given
 */
export function nodeWorker(script: URL = new URL("./kernel-worker.js", import.meta.url)): PoolWorker {
  const worker = new Worker(script);
  worker.unref();
  let unanswered = 0;
  return {
    post: (request, transfer) => {
      if (unanswered++ === 0) worker.ref();
      worker.postMessage(request, transfer);
    },
    listen: (onAnswer, onDeath) => {
      let reason: string | undefined;
      worker.on("message", (answer: PoolAnswer) => {
        if (--unanswered === 0) worker.unref();
        onAnswer(answer);
      });
      worker.on("messageerror", (error) => onDeath(String(error)));
      worker.on("error", (error) => {
        reason = String(error);
      });
      worker.on("exit", (code) => onDeath(reason ?? `exit code ${code}`));
    },
    terminate: () => {
      void worker.terminate();
    },
  };
}
