import type { Certificate } from "./certificate-format.js";
import type { OwnCandidate } from "./recheck-commutators.js";
import type { OwnResiduals } from "./recheck-labels.js";
import { type OwnOperator, type OwnProblem, productRounding } from "./recheck-operators.js";
import type { Ledger } from "./recheck-report.js";
import { type Bench, modulusOf, type Vectors } from "./recheck-vectors.js";

/** Largest number of stored elements, and of multiplications, that the re-check spends on one perturbation. */
const MOST_ELEMENTS = 12_000_000;
const MOST_PRODUCTS = 4e9;

/** Labels of one sector differ by no more than this fraction of ‖A‖. */
const SAME_LABEL = 2 ** -30;

/** Labels that the refinement takes apart differ by more than this fraction of ‖A‖: half of the width that it states. */
export const APART: number = 2 ** -37;

/** One perturbation between all states of one symmetry sector, over all levels. */
export interface Sector {
  /** Its number in the certificate. */
  readonly number: number;
  /** Vectors of the sector, ascending. */
  readonly members: readonly number[];
  /** For each perturbation: elements q_i†V q_j, row-major over the members. */
  readonly re: readonly Float64Array[];
  readonly im: readonly Float64Array[];
}

/** What the re-check finds of the sectors. */
export interface OwnSectors {
  /** The operators inside every sector, everything that second order needs; undefined where it would take too long. */
  readonly sectors: Sector[] | undefined;
  /** Lower bounds on the largest element between different sectors: of H0, which need not be diagonal, and of each perturbation. */
  readonly h0: number;
  readonly perturbations: readonly number[];
}

/**
 * Checks the sectors that a certificate of all levels claims: a sharp conserved label has one value in a sector, and V does not couple
 * different sectors beyond what the commutators leave.
 *
 * @returns V inside every sector, and how much of H0 and V is certainly between them
 */
export function checkSectors(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  residuals: readonly OwnResiduals[],
  vectors: Vectors,
  bench: Bench,
): OwnSectors {
  const numbers = Int32Array.from(certificate.levels.flatMap((level) => level.states.map((state) => state.sector)));
  const paths = certificate.levels.flatMap((level, l) =>
    level.states.map((_, k) => `levels[${l}].states[${k}].sector`),
  );
  const byNumber = new Map<number, number[]>();
  numbers.forEach((number, s) => {
    const list = byNumber.get(number);
    if (list === undefined) byNumber.set(number, [s]);
    else list.push(s);
  });
  checkLabelsOf(ledger, certificate, problem, candidates, byNumber, paths);
  const leaks = problem.perturbations.map((_, p) => leakOf(certificate, problem, candidates, residuals, p));
  const members = [...byNumber].map(([number, list]) => ({ number, list }));
  const elements = members.reduce((sum, { list }) => sum + list.length ** 2, 0);
  const products = members.reduce((sum, { list }) => sum + list.length ** 3, 0);
  const few = elements * problem.perturbations.length <= MOST_ELEMENTS && products <= MOST_PRODUCTS;
  const place = new Int32Array(vectors.count);
  for (const { list } of members) {
    list.forEach((s, k) => {
      place[s] = k;
    });
  }
  const between = problem.perturbations.map(() => 0);
  const sectors = members.map(({ number, list }): Sector => {
    const re: Float64Array[] = [];
    const im: Float64Array[] = [];
    const d = list.length;
    problem.perturbations.forEach((v, p) => {
      const x = new Float64Array(few ? d * d : 0);
      const y = new Float64Array(few ? d * d : 0);
      const rounding = v.rounding + productRounding(vectors.n) * v.norm;
      const error = 2 * (rounding + v.operator.error) + (leaks[p] ?? 0);
      list.forEach((s, j) => {
        bench.image(v.columns, s);
        bench.project(0, vectors.count, v.columns.im === undefined);
        for (let t = 0; t < bench.met; t++) {
          const c = bench.partners[t] as number;
          const a = bench.re[c] as number;
          const b = bench.im[c] as number;
          if (numbers[c] === number) {
            if (!few) continue;
            x[(place[c] as number) * d + j] = a;
            y[(place[c] as number) * d + j] = b;
            continue;
          }
          const size = modulusOf(a, b);
          between[p] = Math.max(between[p] as number, size - 2 * rounding);
          if (size > error) {
            ledger.claim(
              false,
              paths[s] ?? "levels",
              () =>
                `sectors ${number} and ${numbers[c]} are claimed apart, but ${v.name} couples two of their states by ${size}`,
            );
          }
        }
      });
      re.push(x);
      im.push(y);
    });
    return { number, members: list, re, im };
  });
  return {
    sectors: few ? sectors : undefined,
    h0: betweenSectors(problem.h0, numbers, vectors, bench),
    perturbations: between,
  };
}

/** A lower bound on the largest element of H0 between different sectors; 0 where H0 is diagonal, which the commutators cover. */
function betweenSectors(h0: OwnOperator, numbers: Int32Array, vectors: Vectors, bench: Bench): number {
  if (h0.operator.isDiagonal) return 0;
  const error = 2 * (h0.rounding + productRounding(vectors.n) * h0.norm);
  let most = 0;
  for (let s = 0; s < vectors.count; s++) {
    bench.image(h0.columns, s);
    bench.project(0, s, h0.columns.im === undefined);
    for (let t = 0; t < bench.met; t++) {
      const c = bench.partners[t] as number;
      if (numbers[c] !== numbers[s]) most = Math.max(most, modulusOf(bench.re[c] as number, bench.im[c] as number));
    }
  }
  return Math.max(0, most - error);
}

/** A conserved label that every state of a sector carries sharply has one value there. */
function checkLabelsOf(
  ledger: Ledger,
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  byNumber: ReadonlyMap<number, readonly number[]>,
  paths: readonly string[],
): void {
  const states = certificate.levels.flatMap((level) => level.states);
  problem.candidates.forEach(({ name, norm }, place) => {
    if (candidates[place]?.role !== "conserved") return;
    for (const members of byNumber.values()) {
      const labels = members.map((s) => {
        const all = states[s]?.labels ?? {};
        return Object.hasOwn(all, name) ? all[name] : undefined;
      });
      const [first] = labels;
      if (first === undefined || labels.some((label) => label === undefined || label.status === "not sharp")) continue;
      const off = (label: typeof first | undefined): number =>
        label === undefined ? 0 : modulusOf(label.re - first.re, label.im - first.im);
      const apart = labels.findIndex((label) => off(label) > SAME_LABEL * norm);
      ledger.claim(
        apart < 0,
        paths[members[apart] ?? 0] ?? "levels",
        () => `this state is claimed to share a sector with another one from which ${name} tells it apart`,
      );
    }
  });
}

/**
 * How much of one perturbation its commutators with the labels may leave between sectors, ‖C‖_F/gap and the residuals' share, the gap
 * being the smallest distance between two values that the label has anywhere.
 */
function leakOf(
  certificate: Certificate,
  problem: OwnProblem,
  candidates: readonly OwnCandidate[],
  residuals: readonly OwnResiduals[],
  p: number,
): number {
  const norm = problem.perturbations[p]?.norm ?? 0;
  const states = certificate.levels.flatMap((level) => level.states);
  let sum = certificate.whole.orthonormality * norm;
  problem.candidates.forEach(({ name, norm: size }, place) => {
    const candidate = candidates[place];
    if (candidate?.role !== "conserved") return;
    const values: (readonly [number, number])[] = [];
    let residual = 0;
    states.forEach((state, s) => {
      const label = Object.hasOwn(state.labels, name) ? state.labels[name] : undefined;
      if (label === undefined || label.status === "not sharp") return;
      values.push([label.re, label.im]);
      residual = Math.max(residual, residuals[place]?.loose[s] ?? 0);
    });
    const gap = smallestApart(values, APART * size);
    if (gap === Number.POSITIVE_INFINITY) return;
    sum += ((candidate.withPerturbations[p]?.frobeniusBound ?? 0) + 2 * norm * residual) / gap;
  });
  return sum;
}

/** Smallest distance above `width` between two of the points; both coordinates sorted into clusters first. */
export function smallestApart(points: readonly (readonly [number, number])[], width: number): number {
  const distinct = [...new Map(points.map((point) => [`${point[0]} ${point[1]}`, point])).values()].sort(
    (a, b) => a[0] - b[0],
  );
  let least = Number.POSITIVE_INFINITY;
  for (let k = 0; k < distinct.length; k++) {
    for (let j = k + 1; j < distinct.length; j++) {
      const a = distinct[k] as readonly [number, number];
      const b = distinct[j] as readonly [number, number];
      if (b[0] - a[0] > least) break;
      const distance = modulusOf(a[0] - b[0], a[1] - b[1]);
      if (distance > width) least = Math.min(least, distance);
    }
  }
  return least;
}
