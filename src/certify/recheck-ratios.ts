import type { Certificate } from "./certificate-format.js";
import { smallerGap } from "./recheck-bounds.js";
import type { Sector } from "./recheck-intermediate.js";
import type { OwnLevel } from "./recheck-level.js";
import type { OwnProblem } from "./recheck-operators.js";

/** Ratios of one perturbation and one group of equal labels, at the guard's λ. */
export interface OwnPart {
  readonly perturbation: number;
  readonly first: number;
  readonly second: number;
  /** The ratio with each other level, by place. */
  readonly firstTo: ReadonlyMap<number, number>;
  readonly secondTo: ReadonlyMap<number, number>;
}

/** The own denominators guard of one level, and its second-order values. */
export interface OwnRatios {
  readonly parts: readonly OwnPart[];
  /** Largest λ|W_μν|/|E1_μ − E1_ν| between states that V tells apart; undefined with several perturbations. */
  readonly inside: number | undefined;
  /** ⟨W⟩ of each state; empty with several perturbations. */
  readonly second: readonly number[];
  readonly slack: number;
  readonly insideSlack: number;
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
  const work = new Work(certificate, l, own);
  const single = problem.perturbations.length === 1;
  const size = certificate.levels[l]?.states.length ?? 0;
  const second: number[] = single ? new Array<number>(size).fill(0) : [];
  let inside = single ? 0 : undefined;
  let smallest = Number.POSITIVE_INFINITY;
  for (const sector of sectors) {
    if (!sector.members.some((s) => work.levelOf(s) === l)) continue;
    problem.perturbations.forEach((_, p) => {
      const w = work.reach(sector, p);
      if (!single || inside === undefined) return;
      for (const [mu, row] of w) {
        second[mu] = row.get(mu)?.re ?? 0;
        for (const [nu, z] of row) {
          const difference = work.firstOrder(mu) - work.firstOrder(nu);
          if (!work.partedByV(mu, nu) || difference === 0) continue;
          smallest = Math.min(smallest, Math.abs(difference));
          inside = Math.max(inside, (work.lambda * Math.hypot(z.re, z.im)) / Math.abs(difference));
        }
      }
    });
  }
  const norm = problem.perturbations.reduce((most, v) => Math.max(most, v.norm), 0);
  const level = certificate.levels[l];
  const gap = level === undefined ? 1 : smallerGap(level);
  const noise = 1e-11 * norm;
  const width = certificate.levels.reduce((most, x) => Math.max(most, x.spread), 0);
  const x = (work.lambda * norm) / gap;
  const weight = gap === Number.POSITIVE_INFINITY ? 0 : (norm * norm) / gap;
  return {
    parts: work.parts(),
    inside,
    second,
    relative: Math.min(1, 1e-6 + (16 * width) / gap),
    slack: gap === Number.POSITIVE_INFINITY ? 0 : work.lambda * (noise / gap) + 1e-11 * x * x,
    insideSlack: smallest === Number.POSITIVE_INFINITY ? 0 : (work.lambda * 1e-11 * weight) / smallest,
    secondSlack: (1e-9 + (8 * width) / gap) * weight,
  };
}

interface Complex {
  readonly re: number;
  readonly im: number;
}

/** The arithmetic of one level. */
class Work {
  readonly #certificate: Certificate;
  readonly #l: number;
  readonly #own: OwnLevel;
  readonly #level: number[] = [];
  readonly #energies: number[] = [];
  readonly #first: number;
  readonly #firstSquares = new Map<string, Map<number, number>>();
  readonly #secondSquares = new Map<string, Map<number, number>>();
  readonly lambda: number;

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
    this.lambda = certificate.levels[l]?.guard.lambda ?? 1;
  }

  levelOf(s: number): number {
    return this.#level[s] as number;
  }

  firstOrder(state: number): number {
    return this.#own.perturbations[0]?.diagonal[state] ?? 0;
  }

  partedByV(a: number, b: number): boolean {
    const p = this.#own.tree.paths[a] ?? [];
    const q = this.#own.tree.paths[b] ?? [];
    for (let k = 0; k < Math.min(p.length, q.length); k += 2) {
      if (p[k] !== q[k]) return false;
      if (p[k + 1] === q[k + 1]) continue;
      return this.#certificate.levels[this.#l]?.nodes[p[k] as number]?.kind === "perturbation";
    }
    return false;
  }

  /** Adds a sector's share; returns W between its states of the level, by place within the level. */
  reach(sector: Sector, p: number): Map<number, Map<number, Complex>> {
    const { members } = sector;
    const d = members.length;
    const vr = sector.re[p] as Float64Array;
    const vi = sector.im[p] as Float64Array;
    const energy = this.#certificate.levels[this.#l]?.energy ?? 0;
    const outside = members.flatMap((s, k) => (this.levelOf(s) === this.#l ? [] : [k]));
    const out = new Map<number, Map<number, Complex>>();
    const zr = new Float64Array(d);
    const zi = new Float64Array(d);
    members.forEach((s, j) => {
      if (this.levelOf(s) !== this.#l) return;
      const state = s - this.#first;
      const key = `${p} ${this.#own.tree.labelGroup[state]}`;
      for (const k of outside) {
        const x = vr[k * d + j] as number;
        const y = vi[k * d + j] as number;
        this.#add(this.#firstSquares, key, members[k] as number, x * x + y * y);
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
        else this.#add(this.#secondSquares, key, to, re * re + im * im);
      }
      out.set(state, row);
    });
    return out;
  }

  #add(squares: Map<string, Map<number, number>>, key: string, s: number, square: number): void {
    const own = squares.get(key) ?? new Map<number, number>();
    squares.set(key, own);
    const level = this.levelOf(s);
    own.set(level, (own.get(level) ?? 0) + square);
  }

  /** The ratios of every perturbation and group of labels. */
  parts(): OwnPart[] {
    const perturbations = this.#own.perturbations.length;
    const parts: OwnPart[] = [];
    for (let p = 0; p < perturbations; p++) {
      for (let g = 0; g < this.#own.tree.labelGroups; g++) {
        const key = `${p} ${g}`;
        const firstTo = this.#ratios(this.#firstSquares.get(key), this.lambda);
        const secondTo = this.#ratios(this.#secondSquares.get(key), this.lambda ** 2);
        const most = (map: ReadonlyMap<number, number>): number => Math.max(0, ...map.values());
        parts.push({ perturbation: p, first: most(firstTo), second: most(secondTo), firstTo, secondTo });
      }
    }
    return parts;
  }

  #ratios(squares: ReadonlyMap<number, number> | undefined, factor: number): Map<number, number> {
    const energy = this.#certificate.levels[this.#l]?.energy ?? 0;
    const out = new Map<number, number>();
    for (const [level, square] of squares ?? []) {
      const other = this.#certificate.levels[level]?.energy ?? 0;
      out.set(level, (factor * Math.sqrt(square)) / Math.abs(other - energy));
    }
    return out;
  }
}
