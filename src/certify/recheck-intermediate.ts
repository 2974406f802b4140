import type { Certificate } from "./certificate-format.js";
import type { OwnCandidate } from "./recheck-commutators.js";
import type { OwnProblem } from "./recheck-operators.js";
import type { Bench, Vectors } from "./recheck-vectors.js";

/** Largest number of stored elements, and of multiplications, that the re-check spends on one perturbation. */
const MOST_ELEMENTS = 12_000_000;
const MOST_PRODUCTS = 4e9;

/** One perturbation between all states of the same conserved labels, over all levels. */
export interface Sector {
  /** Vectors of the sector, ascending. */
  readonly members: readonly number[];
  /** For each perturbation: elements q_i†V q_j, row-major over the members. */
  readonly re: readonly Float64Array[];
  readonly im: readonly Float64Array[];
}

/**
 * V between all states that agree in their conserved labels: everything that second order needs, since V vanishes between the rest.
 * Undefined where it would take too long.
 */
export function gatherSectors(
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  vectors: Vectors,
  bench: Bench,
): Sector[] | undefined {
  const sector = sectorsByLabel(certificate, problem, candidates, vectors);
  const members: number[][] = [];
  sector.forEach((t, s) => {
    const list = members[t];
    if (list === undefined) members[t] = [s];
    else list.push(s);
  });
  const elements = members.reduce((sum, list) => sum + list.length ** 2, 0);
  const products = members.reduce((sum, list) => sum + list.length ** 3, 0);
  if (elements * problem.perturbations.length > MOST_ELEMENTS || products > MOST_PRODUCTS) return undefined;
  const place = new Int32Array(vectors.count);
  for (const list of members) {
    list.forEach((s, k) => {
      place[s] = k;
    });
  }
  return members.map((list): Sector => {
    const d = list.length;
    const own = sector[list[0] as number];
    const re: Float64Array[] = [];
    const im: Float64Array[] = [];
    for (const v of problem.perturbations) {
      const x = new Float64Array(d * d);
      const y = new Float64Array(d * d);
      list.forEach((s, j) => {
        bench.image(v.columns, s);
        bench.project(0, vectors.count, v.columns.im === undefined);
        for (let t = 0; t < bench.met; t++) {
          const c = bench.partners[t] as number;
          if (sector[c] !== own) continue;
          x[(place[c] as number) * d + j] = bench.re[c] as number;
          y[(place[c] as number) * d + j] = bench.im[c] as number;
        }
      });
      re.push(x);
      im.push(y);
    }
    return { members: list, re, im };
  });
}

/** Number of the sector of every state: states share one where no conserved sharp label tells them apart. */
function sectorsByLabel(
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  vectors: Vectors,
): Int32Array {
  let sector = new Int32Array(vectors.count);
  problem.candidates.forEach((candidate, place) => {
    if (candidates[place]?.role !== "conserved") return;
    const labels = certificate.levels.flatMap((level) =>
      level.states.map((state) =>
        Object.hasOwn(state.labels, candidate.name) ? state.labels[candidate.name] : undefined,
      ),
    );
    if (labels.some((label) => label === undefined || label.status === "not sharp")) return;
    const width = 2 ** -30 * candidate.norm;
    const re = clusters(
      labels.map((label) => label?.re ?? 0),
      width,
    );
    const im = clusters(
      labels.map((label) => label?.im ?? 0),
      width,
    );
    const numbers = new Map<string, number>();
    sector = sector.map((old, s) => {
      const key = `${old} ${re[s]} ${im[s]}`;
      const number = numbers.get(key) ?? numbers.size;
      numbers.set(key, number);
      return number;
    });
  });
  return sector;
}

/** Numbers values so that neighbours closer than `width` share one. */
function clusters(values: readonly number[], width: number): number[] {
  const order = values.map((_, k) => k).sort((a, b) => (values[a] as number) - (values[b] as number));
  const out = values.map(() => 0);
  let number = 0;
  order.forEach((k, at) => {
    const before = order[at - 1];
    if (before !== undefined && (values[k] as number) - (values[before] as number) > width) number++;
    out[k] = number;
  });
  return out;
}
