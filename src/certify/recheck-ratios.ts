import type { Certificate } from "./certificate-format.js";
import type { OwnLevel } from "./recheck-level.js";
import type { OwnOperator, OwnProblem } from "./recheck-operators.js";
import type { Sector } from "./recheck-sectors.js";
import { partingPlace } from "./recheck-tree.js";

/** Shifts closer than this fraction of ‖V‖ do not tell two states apart, as the refinement states it. */
const SHIFT_WIDTH = 2 ** -36;

/** Values of the second-order operator are clustered to this fraction of its scale. */
const CLUSTER = 2 ** -34;

/** Relative difference that two evaluations of one sum may show beside what is counted. */
const EVALUATION = 1e-9;

/** A number, and how far another honest evaluation may be from it. */
export interface Estimate {
  readonly value: number;
  readonly error: number;
}

/** Ratios of one perturbation in one sector, seen from one level, without λ. */
export interface OwnPart {
  readonly perturbation: number;
  /** Number of the sector. */
  readonly sector: number;
  /** Largest |W_μν|/|E1_μ − E1_ν| for this perturbation alone; 0 where there is none. */
  readonly inside: Estimate;
  /** ‖P_k V P_n‖_F/|E_k − E_n| with every other level k, by place. */
  readonly firstTo: ReadonlyMap<number, Estimate>;
  /** ‖P_k (V − v) R V P_n‖_F/|E_k − E_n|, v the level's mean shift in the sector. */
  readonly secondTo: ReadonlyMap<number, Estimate>;
}

/** The own denominators guard of one level, and its second-order values. */
export interface OwnRatios {
  readonly parts: readonly OwnPart[];
  /** ⟨W⟩ of each state; empty with several perturbations. */
  readonly second: readonly Estimate[];
}

/** The guard of level l, evaluated anew from V between the states of every sector. */
export function ratiosOf(
  certificate: Certificate,
  problem: OwnProblem,
  l: number,
  own: OwnLevel,
  sectors: readonly Sector[],
): OwnRatios {
  const single = problem.perturbations.length === 1;
  const size = certificate.levels[l]?.states.length ?? 0;
  const second: Estimate[] = single ? new Array<Estimate>(size).fill({ value: 0, error: 0 }) : [];
  const parts: OwnPart[] = [];
  const work = new Work(certificate, problem, l, own);
  for (const sector of sectors) {
    if (!sector.members.some((s) => work.levelOf(s) === l)) continue;
    problem.perturbations.forEach((v, p) => {
      const { firstTo, secondTo, w } = work.reach(sector, v, p);
      parts.push({ perturbation: p, sector: sector.number, inside: work.inside(w, v, p), firstTo, secondTo });
      if (!single) return;
      const own = [...w].map(([mu, row]) => ({ mu, ...(row.get(mu) ?? { re: 0, error: 0, scale: 0 }) }));
      const widest = own.reduce((most, { scale }) => Math.max(most, scale), 0);
      for (const { mu, re, error } of own) {
        second[mu] = { value: re, error: error + CLUSTER * widest + work.blur(v) };
      }
    });
  }
  return { parts, second };
}

/** An element of W, how far another evaluation may be from it, and the size of its terms. */
interface Element {
  readonly re: number;
  readonly im: number;
  readonly error: number;
  readonly scale: number;
}

/** What one perturbation does in one sector, seen from one level; ratios without λ. */
interface Reach {
  readonly firstTo: ReadonlyMap<number, Estimate>;
  readonly secondTo: ReadonlyMap<number, Estimate>;
  /** W between states of the level, by place within the level. */
  readonly w: ReadonlyMap<number, ReadonlyMap<number, Element>>;
}

/** Another level of a sector. */
interface Block {
  readonly level: number;
  /** How unsure its share of W is, in units of what reaches it. */
  readonly unsure: number;
  /** √Σ|V_ik|² over its states k, for every vector i of the sector. */
  readonly reach: Float64Array;
}

function reachOf(blocks: readonly Block[], level: number): Float64Array | undefined {
  return blocks.find((block) => block.level === level)?.reach;
}

/** Sums of squares by level: of values, and of their errors. */
type Squares = Map<number, { value: number; error: number }>;

/** The arithmetic of one level. */
class Work {
  readonly #certificate: Certificate;
  readonly #problem: OwnProblem;
  readonly #l: number;
  readonly #own: OwnLevel;
  readonly #level: number[] = [];
  readonly #energies: number[] = [];
  readonly #first: number;

  constructor(certificate: Certificate, problem: OwnProblem, l: number, own: OwnLevel) {
    this.#certificate = certificate;
    this.#problem = problem;
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

  /** Splittings of W below this are told apart by nobody: what rounding leaves of energies, and of V. */
  blur({ operator }: OwnOperator): number {
    const { norm, error } = this.#problem.h0.operator;
    return 4 * ((2 ** -42 + 8 * Math.sqrt(this.#problem.n) * 2 ** -53) * norm + 32 * error + 2 ** -40 * operator.norm);
  }

  /** The largest |W_μν|/|E1_μ − E1_ν| between states that a perturbation tells apart and to which this one gives different shifts. */
  inside(w: Reach["w"], { operator }: OwnOperator, p: number): Estimate {
    const elements = this.#own.perturbations[p];
    let largest = { value: 0, error: 0 };
    for (const [mu, row] of w) {
      for (const [nu, { re, im, error }] of row) {
        const difference = Math.abs((elements?.diagonal[mu] ?? 0) - (elements?.diagonal[nu] ?? 0));
        // differences next to the limit may be taken either way
        if (difference <= 2 * SHIFT_WIDTH * operator.norm || !this.#partedByPerturbation(mu, nu)) continue;
        const value = Math.hypot(re, im) / difference;
        const off = (error + 2 * value * (elements?.looseError ?? 0)) / difference + EVALUATION * value;
        if (value - off > largest.value - largest.error) largest = { value, error: off };
      }
    }
    return largest;
  }

  #partedByPerturbation(a: number, b: number): boolean {
    const node = partingPlace(this.#own.tree, a, b);
    return this.#certificate.levels[this.#l]?.nodes[node]?.kind === "perturbation";
  }

  /**
   * What a sector's states of the level reach. Another evaluation may differ by the rounding of each element of V, a few n u ‖V‖, and
   * where a level is wide by the energy that it gives to each of its states.
   */
  reach({ members, re, im }: Sector, v: OwnOperator, p: number): Reach {
    const d = members.length;
    const vr = re[p] as Float64Array;
    const vi = im[p] as Float64Array;
    const energy = this.#certificate.levels[this.#l]?.energy ?? 0;
    const noise = 64 * this.#problem.n * 2 ** -53 * v.norm;
    const own = members.flatMap((s, k) => (this.levelOf(s) === this.#l ? [k] : []));
    const outside = members.flatMap((s, k) => (this.levelOf(s) === this.#l ? [] : [k]));
    const shift = own.reduce((sum, k) => sum + (vr[k * d + k] as number), 0) / own.length;
    const moduli = vr.map((x, k) => (vi[k] === 0 ? Math.abs(x) : Math.hypot(x, vi[k] as number)));
    const weight = new Float64Array(d);
    for (const k of outside) {
      const distance = energy - (this.#energies[members[k] as number] as number);
      weight[k] = 1 / distance;
    }
    const blocks = this.#blocks(members, outside, moduli, weight);
    const w = new Map<number, Map<number, Element>>();
    const first: Squares = new Map();
    const second: Squares = new Map();
    for (const j of own) {
      const row = new Map<number, Element>();
      for (const k of outside) add(first, this.levelOf(members[k] as number), moduli[k * d + j] as number, noise);
      for (let i = 0; i < d; i++) {
        let x = 0;
        let y = 0;
        let error = 0;
        let scale = 0;
        for (const k of outside) {
          const a = vr[i * d + k] as number;
          const b = vi[i * d + k] as number;
          const c = vr[k * d + j] as number;
          const e = vi[k * d + j] as number;
          const u = weight[k] as number;
          x += u * (a * c - b * e);
          y += u * (a * e + b * c);
          const left = moduli[i * d + k] as number;
          const right = moduli[k * d + j] as number;
          error += Math.abs(u) * noise * (left + right + noise);
          scale += Math.abs(u) * left * right;
        }
        for (let b = 0; b < blocks.length; b++) {
          const { unsure, reach } = blocks[b] as Block;
          error += unsure * (reach[i] as number) * (reach[j] as number);
        }
        const to = members[i] as number;
        if (this.levelOf(to) === this.#l) {
          row.set(to - this.#first, { re: x, im: y, error, scale });
          continue;
        }
        // the level's mean shift v taken off: (V − v) R V, which no offset of V changes
        const u = shift * (weight[i] as number);
        x -= u * (vr[i * d + j] as number);
        y -= u * (vi[i * d + j] as number);
        error += Math.abs(u) * (EVALUATION * (moduli[i * d + j] as number) + 2 * noise);
        error += Math.abs(shift) * this.#widthTo(this.levelOf(to)) * (reachOf(blocks, this.levelOf(to))?.[j] ?? 0);
        add(second, this.levelOf(to), Math.hypot(x, y), error);
      }
      w.set((members[j] as number) - this.#first, row);
    }
    return { firstTo: this.#ratios(first), secondTo: this.#ratios(second), w };
  }

  /** How unsure 1/(E0 − E_k) is for the states of level k: its and the own width, over the square of the distance. */
  #widthTo(level: number): number {
    const { levels, whole } = this.#certificate;
    const [own, other] = [levels[this.#l], levels[level]];
    const width = (own?.spread ?? 0) + (other?.spread ?? 0) + 8 * whole.energyEnclosure;
    return (2 * width) / ((own?.energy ?? 0) - (other?.energy ?? 0)) ** 2;
  }

  /** The other levels of a sector: which states of one serve as intermediate ones is free, only their norms together are not. */
  #blocks(members: readonly number[], outside: readonly number[], moduli: Float64Array, weight: Float64Array): Block[] {
    const d = members.length;
    const byLevel = new Map<number, number[]>();
    for (const k of outside) {
      const level = this.levelOf(members[k] as number);
      const list = byLevel.get(level);
      if (list === undefined) byLevel.set(level, [k]);
      else list.push(k);
    }
    return [...byLevel].map(([level, list]): Block => {
      const reach = new Float64Array(d);
      for (let i = 0; i < d; i++) {
        let sum = 0;
        for (const k of list) sum += (moduli[i * d + k] as number) ** 2;
        reach[i] = Math.sqrt(sum);
      }
      const largest = list.reduce((most, k) => Math.max(most, Math.abs(weight[k] as number)), 0);
      return { level, unsure: EVALUATION * largest + this.#widthTo(level), reach };
    });
  }

  #ratios(squares: Squares): Map<number, Estimate> {
    const energy = this.#certificate.levels[this.#l]?.energy ?? 0;
    const out = new Map<number, Estimate>();
    for (const [level, { value, error }] of squares) {
      const distance = Math.abs((this.#certificate.levels[level]?.energy ?? 0) - energy);
      const ratio = Math.sqrt(value) / distance;
      out.set(level, { value: ratio, error: Math.sqrt(error) / distance + EVALUATION * ratio });
    }
    return out;
  }
}

function add(squares: Squares, level: number, value: number, error: number): void {
  const own = squares.get(level) ?? { value: 0, error: 0 };
  own.value += value * value;
  own.error += error * error;
  squares.set(level, own);
}
