import type { Csr } from "../numerics/csr.js";
import { adjoint, multiply } from "../numerics/sparse.js";
import type { LevelPart } from "./levels.js";
import type { Sector } from "./sectors.js";

/** The largest ratio of one kind in the denominators guard, and the level it is with. */
export interface GuardRatio {
  /** ‖P_k X P_n‖_F / |E_k − E_n|, an upper bound up to the rounding of its evaluation. */
  readonly ratio: number;
  /** Place of the other level k; −1 if nothing is coupled. */
  readonly level: number;
}

/** What reaches out of a level inside one sector, and what comes back at second order. */
export interface SecondOrder {
  /** W = V R V over the vectors of the part: W_ij = Σ_k V_ik V_kj / (E0 − E_k), k outside the level. */
  readonly w: Csr;
  /** Largest √(Σ|V_ik|²) √(Σ|V_ik/(E0 − E_k)|²) over the vectors i: the scale of W. */
  readonly scale: number;
  /** Blockwise over the other levels of the sector: ‖P_k V P_n‖ / |E_k − E_n|. */
  readonly first: GuardRatio;
  /** Blockwise: ‖P_k W P_n‖ / |E_k − E_n|. */
  readonly second: GuardRatio;
}

/**
 * The second-order effective operator of a level inside one sector, with the blockwise denominators guard.
 *
 * R = Σ_{k outside the level} |k⟩⟨k| / (E0 − E_k) excludes the whole level (Bloch, Nucl. Phys. 6, 329 (1958);
 * Messiah, Quantum Mechanics II, ch. XVI). V conserves the sector, so only its own vectors are intermediate states.
 *
 * @param v - the perturbation in the sector's basis
 * @param levelOf - level number of each vector of the sector
 * @param level - number of the level under study
 * @param energy - its energy E0
 * @param levelEnergies - energy of every level
 */
export function secondOrder(
  sector: Sector,
  v: Csr,
  part: LevelPart,
  levelOf: Int32Array,
  level: number,
  energy: number,
  levelEnergies: Float64Array,
): SecondOrder {
  const out = outgoing(sector, v, part, levelOf, level, energy);
  const w = multiply(out.scaled, adjoint(out.bare));
  return {
    w,
    scale: out.scale,
    first: firstGuard(out, levelOf, energy, levelEnergies),
    second: secondGuard(out, v, levelOf, level, energy, levelEnergies),
  };
}

interface Outgoing {
  /** V_ik, k outside the level, columns renumbered to those that occur. */
  readonly bare: Csr;
  /** V_ik / (E0 − E_k). */
  readonly scaled: Csr;
  /** The sector's vector behind each column. */
  readonly columns: Int32Array;
  readonly scale: number;
}

function outgoing(
  sector: Sector,
  v: Csr,
  part: LevelPart,
  levelOf: Int32Array,
  level: number,
  energy: number,
): Outgoing {
  const rows = part.indices.length;
  const ptr = new Int32Array(rows + 1);
  let total = 0;
  for (let r = 0; r < rows; r++) {
    const i = part.indices[r] as number;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      if (levelOf[v.col[p] as number] !== level) total++;
    }
    ptr[r + 1] = total;
  }
  const place = new Map<number, number>();
  const source = new Int32Array(total);
  let at = 0;
  for (let r = 0; r < rows; r++) {
    const i = part.indices[r] as number;
    for (let p = v.ptr[i] as number; p < (v.ptr[i + 1] as number); p++) {
      const k = v.col[p] as number;
      if (levelOf[k] === level) continue;
      source[at++] = p;
      place.set(k, 0);
    }
  }
  const columns = Int32Array.from(place.keys()).sort();
  columns.forEach((k, c) => {
    place.set(k, c);
  });
  const col = new Int32Array(total);
  const re = new Float64Array(total);
  const im = v.im === undefined ? undefined : new Float64Array(total);
  const scaledRe = new Float64Array(total);
  const scaledIm = v.im === undefined ? undefined : new Float64Array(total);
  let scale = 0;
  for (let r = 0; r < rows; r++) {
    let bare = 0;
    let weighted = 0;
    for (let q = ptr[r] as number; q < (ptr[r + 1] as number); q++) {
      const p = source[q] as number;
      const k = v.col[p] as number;
      const weight = 1 / (energy - (sector.energies[k] as number));
      const x = v.re[p] as number;
      const y = v.im === undefined ? 0 : (v.im[p] as number);
      col[q] = place.get(k) as number;
      re[q] = x;
      scaledRe[q] = x * weight;
      if (im !== undefined && scaledIm !== undefined) {
        im[q] = y;
        scaledIm[q] = y * weight;
      }
      const square = x * x + y * y;
      bare += square;
      weighted += square * weight * weight;
    }
    scale = Math.max(scale, Math.sqrt(bare) * Math.sqrt(weighted));
  }
  const shape = { rows, cols: columns.length, ptr, col };
  return { bare: { ...shape, re, im }, scaled: { ...shape, re: scaledRe, im: scaledIm }, columns, scale };
}

function firstGuard(out: Outgoing, levelOf: Int32Array, energy: number, levelEnergies: Float64Array): GuardRatio {
  const squares = new Map<number, number>();
  const { bare, columns } = out;
  for (let q = 0; q < bare.re.length; q++) {
    const k = levelOf[columns[bare.col[q] as number] as number] as number;
    const x = bare.re[q] as number;
    const y = bare.im === undefined ? 0 : (bare.im[q] as number);
    squares.set(k, (squares.get(k) ?? 0) + x * x + y * y);
  }
  return largestRatio(squares, energy, levelEnergies);
}

function secondGuard(
  out: Outgoing,
  v: Csr,
  levelOf: Int32Array,
  level: number,
  energy: number,
  levelEnergies: Float64Array,
): GuardRatio {
  const squares = new Map<number, number>();
  const { scaled, columns } = out;
  const size = v.rows;
  const re = new Float64Array(size);
  const im = new Float64Array(v.im === undefined ? 0 : size);
  const mark = new Int32Array(size).fill(-1);
  const touched = new Int32Array(size);
  for (let r = 0; r < scaled.rows; r++) {
    let count = 0;
    for (let q = scaled.ptr[r] as number; q < (scaled.ptr[r + 1] as number); q++) {
      const k = columns[scaled.col[q] as number] as number;
      const a = scaled.re[q] as number;
      const b = scaled.im === undefined ? 0 : (scaled.im[q] as number);
      const end = v.ptr[k + 1] as number;
      for (let p = v.ptr[k] as number; p < end; p++) {
        const to = v.col[p] as number;
        if (mark[to] !== r) {
          mark[to] = r;
          touched[count++] = to;
          re[to] = 0;
          if (v.im !== undefined) im[to] = 0;
        }
        const x = v.re[p] as number;
        if (v.im === undefined) {
          re[to] = (re[to] as number) + a * x;
        } else {
          const y = v.im[p] as number;
          re[to] = (re[to] as number) + a * x - b * y;
          im[to] = (im[to] as number) + a * y + b * x;
        }
      }
    }
    for (let t = 0; t < count; t++) {
      const to = touched[t] as number;
      const k = levelOf[to] as number;
      if (k === level) continue;
      const x = re[to] as number;
      const y = v.im === undefined ? 0 : (im[to] as number);
      squares.set(k, (squares.get(k) ?? 0) + x * x + y * y);
    }
  }
  return largestRatio(squares, energy, levelEnergies);
}

function largestRatio(squares: Map<number, number>, energy: number, levelEnergies: Float64Array): GuardRatio {
  let ratio = 0;
  let level = -1;
  for (const [k, square] of squares) {
    const value = Math.sqrt(square) / Math.abs((levelEnergies[k] as number) - energy);
    if (value > ratio) {
      ratio = value;
      level = k;
    }
  }
  return { ratio, level };
}
