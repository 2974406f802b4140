import { wasmEigen } from "../wasm/eigen.js";
import { plainEigen } from "./plain.js";
import type { EigenEngine } from "./types.js";

/** The WebAssembly kernels where the platform runs them, else their plain twin. */
export const defaultEngine: EigenEngine = (job, tuning) => wasmEigen(job, tuning) ?? plainEigen(job, tuning);
