import type { PreparedProblem } from "../audit/problem.js";
import type { Csr } from "../numerics/csr.js";
import { turnRow } from "./phase.js";
import type { BlockLabel } from "./sectors.js";

/** What the alignment needs to know of a state. */
interface Laddered {
  readonly labels: readonly BlockLabel[];
  readonly together: number;
}

/** Imaginary parts below this, left over from turning a row, are dropped. */
export const DROPPED_PART: number = 2 ** -54;

/** A ladder element below this fraction of ‖L‖ fixes no phase. */
const SMALLEST_ELEMENT = 1e-6;

/**
 * Fixes relative phases inside multiplets: for every candidate with a ladder operator L, ⟨upper|L|lower⟩ becomes real and
 * positive (Condon and Shortley, The Theory of Atomic Spectra, 1935). The topmost state of a chain keeps its phase.
 *
 * Two states are linked where L maps one to the other and to no other state of the level, and each is alone in its leaf.
 *
 * @param vectors - states as rows, phases fixed one by one
 */
export function alignByLadders(problem: PreparedProblem, states: readonly Laddered[], vectors: Csr): Csr {
  const laddered = problem.candidates.some((candidate) => candidate.ladder !== undefined);
  if (!laddered || states.length < 2) return vectors;
  const re = vectors.re.slice();
  const im = vectors.im?.slice() ?? new Float64Array(re.length);
  problem.candidates.forEach((candidate, place) => {
    const ladder = candidate.ladder;
    if (ladder === undefined) return;
    const value = (state: number): number | undefined =>
      states[state]?.labels.find((label) => label.candidate === place)?.value.re;
    const order = states.map((_, k) => k).filter((k) => value(k) !== undefined && states[k]?.together === 1);
    order.sort((a, b) => (value(b) as number) - (value(a) as number) || a - b);
    for (const lower of order) {
      const image = applyToRow(ladder.csr, vectors, re, im, lower);
      let partner = -1;
      let links = 0;
      let element = { re: 0, im: 0 };
      for (const upper of order) {
        if ((value(upper) as number) <= (value(lower) as number)) break;
        const e = product(vectors, re, im, upper, image);
        if (Math.hypot(e.re, e.im) <= SMALLEST_ELEMENT * ladder.norm) continue;
        links++;
        partner = upper;
        element = e;
      }
      if (links !== 1 || partner < 0) continue;
      turnRow(re, im, vectors.ptr[lower] as number, vectors.ptr[lower + 1] as number, element.re, -element.im);
    }
  });
  for (let p = 0; p < im.length; p++) if (Math.abs(im[p] as number) < DROPPED_PART) im[p] = 0;
  return { ...vectors, re, im: im.some((y) => y !== 0) ? im : undefined };
}

function applyToRow(
  ladder: Csr,
  vectors: Csr,
  re: Float64Array,
  im: Float64Array,
  row: number,
): Map<number, { re: number; im: number }> {
  const place = new Map<number, number>();
  for (let p = vectors.ptr[row] as number; p < (vectors.ptr[row + 1] as number); p++) {
    place.set(vectors.col[p] as number, p);
  }
  const image = new Map<number, { re: number; im: number }>();
  for (let i = 0; i < ladder.rows; i++) {
    let x = 0;
    let y = 0;
    for (let q = ladder.ptr[i] as number; q < (ladder.ptr[i + 1] as number); q++) {
      const p = place.get(ladder.col[q] as number);
      if (p === undefined) continue;
      const a = ladder.re[q] as number;
      const b = ladder.im === undefined ? 0 : (ladder.im[q] as number);
      x += a * (re[p] as number) - b * (im[p] as number);
      y += a * (im[p] as number) + b * (re[p] as number);
    }
    if (x !== 0 || y !== 0) image.set(i, { re: x, im: y });
  }
  return image;
}

function product(
  vectors: Csr,
  re: Float64Array,
  im: Float64Array,
  row: number,
  image: ReadonlyMap<number, { re: number; im: number }>,
): { re: number; im: number } {
  let x = 0;
  let y = 0;
  for (let p = vectors.ptr[row] as number; p < (vectors.ptr[row + 1] as number); p++) {
    const z = image.get(vectors.col[p] as number);
    if (z === undefined) continue;
    const a = re[p] as number;
    const b = im[p] as number;
    x += a * z.re + b * z.im;
    y += a * z.im - b * z.re;
  }
  return { re: x, im: y };
}
