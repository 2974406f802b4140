import type { Certificate } from "./certificate-format.js";
import { smallerGap } from "./recheck-bounds.js";
import type { Sector } from "./recheck-sectors.js";
import { partingPlace } from "./recheck-tree.js";

/** Shifts closer than this fraction of ‖V‖ do not tell two states apart, as the refinement states it. */
const SHIFT_WIDTH = 2 ** -36;

import type { OwnLevel } from "./recheck-level.js";
import type { OwnProblem } from "./recheck-operators.js";

/** Ratios of one perturbation in one sector, at the λ that the certificate states for them. */
export interface OwnPart {
  readonly perturbation: number;
  /** Number of the sector. */
  readonly sector: number;
  /** The λ where nobody stated one. */
  readonly natural: number;
  /** Largest |W_μν|/|E1_μ − E1_ν| for this perturbation alone, without λ; 0 where there is none. */
  readonly inside: number;
  readonly insideSlack: number;
  readonly first: number;
  readonly second: number;
  /** The ratio with each other level, by place. */
  readonly firstTo: ReadonlyMap<number, number>;
  readonly secondTo: ReadonlyMap<number, number>;
}

/** The own denominators guard of one level, and its second-order values. */
export interface OwnRatios {
  readonly parts: readonly OwnPart[];
  /** ⟨W⟩ of each state; empty with several perturbations. */
  readonly second: readonly number[];
  /** Absolute uncertainty of a ratio at λ. */
  readonly slack: (lambda: number) => number;
  readonly secondSlack: number;
  /** Relative difference that the width of the levels explains. */
  readonly relative: number;
}

/**
 * ‖P_k V P_n‖_F/|E_k − E_n| and ‖P_k W P_n‖_F/|E_k − E_n| of level n, W = V R V, blockwise over the other levels k.
 */
export function ratiosOf(
  certificate: Certificate,
  problem: OwnProblem,
  l: number,
  own: OwnLevel,
  sectors: readonly Sector[],
): OwnRatios {
  const single = problem.perturbations.length === 1;
  const size = certificate.levels[l]?.states.length ?? 0;
  const second: number[] = single ? new Array<number>(size).fill(0) : [];
  const norm = problem.perturbations.reduce((most, v) => Math.max(most, v.norm), 0);
  const level = certificate.levels[l];
  const gap = level === undefined ? 1 : smallerGap(level);
  const width = certificate.levels.reduce((most, x) => Math.max(most, x.spread), 0);
  const weight = gap === Number.POSITIVE_INFINITY ? 0 : (norm * norm) / gap;
  const parts: OwnPart[] = [];
  const work = new Work(certificate, l, own);
  for (const sector of sectors) {
    if (!sector.members.some((s) => work.levelOf(s) === l)) continue;
    problem.perturbations.forEach((v, p) => {
      const reach = work.reach(sector, p);
      const equal = SHIFT_WIDTH * v.operator.norm;
      let inside = 0;
      let smallest = Number.POSITIVE_INFINITY;
      for (const [mu, row] of reach.w) {
        if (single) second[mu] = row.get(mu)?.re ?? 0;
        for (const [nu, z] of row) {
          const difference = Math.abs(work.firstOrder(mu, p) - work.firstOrder(nu, p));
          // differences next to the limit may be taken either way
          if (difference <= 2 * equal || !work.partedByPerturbation(mu, nu)) continue;
          smallest = Math.min(smallest, difference);
          inside = Math.max(inside, Math.hypot(z.re, z.im) / difference);
        }
      }
      const most = (map: ReadonlyMap<number, number>): number => Math.max(0, ...map.values());
      parts.push({
        perturbation: p,
        sector: sector.number,
        natural: work.naturalLambda(sector, p),
        inside,
        insideSlack: smallest === Number.POSITIVE_INFINITY ? 0 : ((1e-11 + (16 * width) / gap) * weight) / smallest,
        first: most(reach.firstTo),
        second: most(reach.secondTo),
        firstTo: reach.firstTo,
        secondTo: reach.secondTo,
      });
    });
  }
  const noise = 1e-11 * norm;
  return {
    parts,
    second,
    relative: Math.min(1, 1e-6 + (16 * width) / gap),
    slack: (lambda) => {
      const x = (lambda * norm) / gap;
      return gap === Number.POSITIVE_INFINITY ? 0 : lambda * (noise / gap) + 1e-11 * x * x;
    },
    secondSlack: (1e-9 + (8 * width) / gap) * weight,
  };
}

interface Complex {
  readonly re: number;
  readonly im: number;
}

/** What one perturbation does in one sector, seen from one level; ratios without λ. */
interface Reach {
  /** ‖P_k V P_n‖_F/|E_k − E_n| for every other level k. */
  readonly firstTo: ReadonlyMap<number, number>;
  /** ‖P_k (V − v) R V P_n‖_F/|E_k − E_n|, v the level's mean shift in the sector. */
  readonly secondTo: ReadonlyMap<number, number>;
  /** W between states of the level, by place within the level. */
  readonly w: ReadonlyMap<number, ReadonlyMap<number, Complex>>;
}

/** The arithmetic of one level. */
class Work {
  readonly #certificate: Certificate;
  readonly #l: number;
  readonly #own: OwnLevel;
  readonly #level: number[] = [];
  readonly #energies: number[] = [];
  readonly #first: number;

  constructor(certificate: Certificate, l: number, own: OwnLevel) {
    this.#certificate = certificate;
    this.#l = l;
    this.#own = own;
    certificate.levels.forEach((level, place) => {
      for (const state of level.states) {
        this.#level.push(place);
        this.#energies.push(state.energy);
      }
    });
    this.#first = this.#level.indexOf(l);
  }

  levelOf(s: number): number {
    return this.#level[s] as number;
  }

  firstOrder(state: number, p: number): number {
    return this.#own.perturbations[p]?.diagonal[state] ?? 0;
  }

  partedByPerturbation(a: number, b: number): boolean {
    const node = partingPlace(this.#own.tree, a, b);
    return this.#certificate.levels[this.#l]?.nodes[node]?.kind === "perturbation";
  }

  /** V's strongest reach out of a level, max ‖(1 − P_n) V P_n‖_F, as large as H0's range in the sector; at most 1. */
  naturalLambda({ members, re, im }: Sector, p: number): number {
    const d = members.length;
    const vr = re[p] as Float64Array;
    const vi = im[p] as Float64Array;
    const squares = new Map<number, number>();
    let low = Number.POSITIVE_INFINITY;
    let high = Number.NEGATIVE_INFINITY;
    members.forEach((s, i) => {
      const level = this.levelOf(s);
      low = Math.min(low, this.#energies[s] as number);
      high = Math.max(high, this.#energies[s] as number);
      let sum = squares.get(level) ?? 0;
      members.forEach((t, j) => {
        if (this.levelOf(t) !== level) sum += (vr[i * d + j] as number) ** 2 + (vi[i * d + j] as number) ** 2;
      });
      squares.set(level, sum);
    });
    const reach = Math.sqrt(Math.max(...squares.values()));
    return reach > 0 ? Math.min(1, (high - low) / reach) : 1;
  }

  /** What a sector's states of the level reach. */
  reach(sector: Sector, p: number): Reach {
    const { members } = sector;
    const d = members.length;
    const vr = sector.re[p] as Float64Array;
    const vi = sector.im[p] as Float64Array;
    const energy = this.#certificate.levels[this.#l]?.energy ?? 0;
    const inside = members.flatMap((s, k) => (this.levelOf(s) === this.#l ? [k] : []));
    const shift = inside.reduce((sum, k) => sum + (vr[k * d + k] as number), 0) / inside.length;
    const outside = members.flatMap((s, k) => (this.levelOf(s) === this.#l ? [] : [k]));
    const w = new Map<number, Map<number, Complex>>();
    const first = new Map<number, number>();
    const second = new Map<number, number>();
    const zr = new Float64Array(d);
    const zi = new Float64Array(d);
    members.forEach((s, j) => {
      if (this.levelOf(s) !== this.#l) return;
      for (const k of outside) {
        const x = vr[k * d + j] as number;
        const y = vi[k * d + j] as number;
        this.#add(first, members[k] as number, x * x + y * y);
        const weight = 1 / (energy - (this.#energies[members[k] as number] as number));
        zr[k] = x * weight;
        zi[k] = y * weight;
      }
      const row = new Map<number, Complex>();
      for (let i = 0; i < d; i++) {
        let re = 0;
        let im = 0;
        for (const k of outside) {
          const x = vr[i * d + k] as number;
          const y = vi[i * d + k] as number;
          re += x * (zr[k] as number) - y * (zi[k] as number);
          im += x * (zi[k] as number) + y * (zr[k] as number);
        }
        const to = members[i] as number;
        if (this.levelOf(to) === this.#l) row.set(to - this.#first, { re, im });
        else {
          // the level's mean shift v taken off: (V − v) R V, which no offset of V changes
          re -= shift * (zr[i] as number);
          im -= shift * (zi[i] as number);
          this.#add(second, to, re * re + im * im);
        }
      }
      w.set(s - this.#first, row);
    });
    return { firstTo: this.#ratios(first), secondTo: this.#ratios(second), w };
  }

  #add(squares: Map<number, number>, s: number, square: number): void {
    const level = this.levelOf(s);
    squares.set(level, (squares.get(level) ?? 0) + square);
  }

  #ratios(squares: ReadonlyMap<number, number>): Map<number, number> {
    const energy = this.#certificate.levels[this.#l]?.energy ?? 0;
    const out = new Map<number, number>();
    for (const [level, square] of squares) {
      const other = this.#certificate.levels[level]?.energy ?? 0;
      out.set(level, Math.sqrt(square) / Math.abs(other - energy));
    }
    return out;
  }
}
