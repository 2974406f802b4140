// The script of a worker thread: answers the requests of a KernelPool until it is ended.

import { parentPort } from "node:worker_threads";
import { answerRequest, type PoolRequest } from "../numerics/worker-protocol.js";

parentPort?.on("message", (request: PoolRequest) => {
  const { answer, transfer } = answerRequest(request);
  parentPort?.postMessage(
    answer,
    transfer.filter((buffer) => buffer instanceof ArrayBuffer),
  );
});
