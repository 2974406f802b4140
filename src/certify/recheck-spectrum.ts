import { roundUp } from "../numerics/rounding.js";
import type { Operator } from "../operator/operator.js";
import { type Count, countBelow } from "./recheck-count.js";

/** Largest connected part of H0 that is factorised. */
const LARGEST_PART = 1500;

/** H0 as connected parts, whose eigenvalues below a number can be counted. */
export interface Spectrum {
  /** Dimension of the largest connected part. */
  readonly largest: number;
  /** Whether every part is small enough to be counted. */
  readonly countable: boolean;
  /** Number of eigenvalues of H0 below σ, entry uncertainties included in the error. */
  count(sigma: number): Count;
}

/** Finds the connected parts of H0 for counting. */
export function spectrumOf(h0: Operator): Spectrum {
  const parts = connectedParts(h0);
  const largest = parts.reduce((most, part) => Math.max(most, part.length), 0);
  const known = new Map<number, Count>();
  return {
    largest,
    countable: largest <= LARGEST_PART,
    count: (sigma) => {
      let found = known.get(sigma);
      if (found === undefined) {
        found = countParts(h0, parts, sigma);
        known.set(sigma, found);
      }
      return found;
    },
  };
}

function connectedParts({ csr }: Operator): number[][] {
  const part = new Int32Array(csr.rows).fill(-1);
  const parts: number[][] = [];
  for (let start = 0; start < csr.rows; start++) {
    if ((part[start] as number) >= 0) continue;
    const members = [start];
    part[start] = parts.length;
    for (let at = 0; at < members.length; at++) {
      const i = members[at] as number;
      for (let e = csr.ptr[i] as number; e < (csr.ptr[i + 1] as number); e++) {
        const j = csr.col[e] as number;
        const zero = csr.re[e] === 0 && (csr.im === undefined || csr.im[e] === 0);
        if (zero || (part[j] as number) >= 0) continue;
        part[j] = parts.length;
        members.push(j);
      }
    }
    parts.push(members.sort((a, b) => a - b));
  }
  return parts;
}

function countParts(h0: Operator, parts: readonly (readonly number[])[], sigma: number): Count {
  const { csr } = h0;
  const place = new Int32Array(csr.rows);
  let below = 0;
  let error = 0;
  for (const members of parts) {
    const n = members.length;
    members.forEach((i, k) => {
      place[i] = k;
    });
    const re = new Float64Array(n * n);
    const im = new Float64Array(n * n);
    members.forEach((i, k) => {
      for (let e = csr.ptr[i] as number; e < (csr.ptr[i + 1] as number); e++) {
        const x = csr.re[e] as number;
        const y = csr.im === undefined ? 0 : (csr.im[e] as number);
        if (x === 0 && y === 0) continue;
        const at = k * n + (place[csr.col[e] as number] as number);
        re[at] = x;
        im[at] = y;
      }
    });
    if (n === 1) {
      if ((re[0] as number) < sigma) below++;
      continue;
    }
    const count = countBelow(n, re, im, sigma);
    below += count.below;
    error = Math.max(error, count.error);
  }
  return { below, error: roundUp(error + h0.error) };
}
