import type { PreparedProblem } from "../audit/problem.js";
import { LABEL_WIDTH, REFUSE_ABOVE, REFUSE_ABOVE_UNSTATED } from "../audit/resolution.js";
import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import { modulus } from "../numerics/complex.js";
import type { Csr } from "../numerics/csr.js";
import { roundDown } from "../numerics/rounding.js";
import { findEntry, submatrix } from "../numerics/sparse.js";
import { stackRows } from "../numerics/stack.js";
import type { ResolvedLevel, ResolvedPart } from "../refine/resolve.js";
import { inSpace, type Sector } from "../refine/sectors.js";
import type { PathStep, TreeNode } from "../refine/tree.js";
import { partingNode } from "./couplings.js";
import { pathTo } from "./level-states.js";

/** The λ and the threshold that the denominators guard uses. */
export interface GuardSetting {
  /** The λ at which ratios are taken: as stated, or 1, V as it stands. */
  readonly lambda: number;
  /** Whether the caller stated λ. */
  readonly stated: boolean;
  /** A ratio above this is refused. */
  readonly refuseAbove: number;
}

/** A ratio at the guard's λ and what it is with. */
export interface GuardFinding {
  /** λ‖P_k X P_n‖_F / |E_k − E_n| or, inside the level, λ|W_μν| / |E1_μ − E1_ν|. */
  readonly ratio: number;
  /** Energy of the other level; null where nothing is coupled, and inside the level. */
  readonly energy: number | null;
}

/** The guard of one level in one sector for one perturbation. */
export interface SectorGuard {
  /** Name of the perturbation. */
  readonly perturbation: string;
  /** Number of the sector among all of the whole space. */
  readonly sector: number;
  /** Largest ratio of V's blocks to other levels. */
  readonly first: GuardFinding;
  /** Largest ratio of the second-order operator's blocks to other levels. */
  readonly second: GuardFinding;
  /** The largest ratio inside the level for this perturbation alone; null where it tells no states of this sector apart. */
  readonly inside: GuardFinding | null;
}

/** The denominators guard of one level. */
export interface LevelGuard extends GuardSetting {
  /** One entry for each sector and perturbation. */
  readonly sectors: readonly SectorGuard[];
  /** Largest of all ratios over other levels. */
  readonly outside: number;
  /** Largest of all ratios inside the level. */
  readonly inside: number;
  /**
   * For each perturbation, Kato's lower bound on the radius of convergence, d/(2‖V‖) with d the level's isolation
   * (Perturbation Theory for Linear Operators, 1966, ch. II), for the level as a whole (its projection and mean energy): the
   * series of one state may converge less far where V splits the level. Null where there is no other level or V is zero.
   */
  readonly radius: readonly (number | null)[];
}

/** Options by which a caller states λ. */
export interface GuardOptions {
  /** The largest |λ| at which the basis is to be used; 1, V as it stands, where none is stated. */
  readonly lambda?: number;
  /** Ratios above this are refused; by default 1 where λ is stated, and 8 where it is not. */
  readonly refuseAbove?: number;
}

/**
 * The λ and threshold as stated; with no λ stated V is taken as it stands, and the threshold is one that only a strong V or a
 * near-degeneracy exceeds.
 *
 * @throws GoodBasisError `option` for a λ or threshold that is not a positive number
 */
export function guardSetting(options: GuardOptions): GuardSetting {
  const { lambda, refuseAbove } = options;
  for (const [name, value] of Object.entries({ lambda, refuseAbove })) {
    if (value !== undefined && !(typeof value === "number" && value > 0 && Number.isFinite(value))) {
      throw new GoodBasisError("option", `${name} is ${shown(value)}; give a positive number`, { [name]: value });
    }
  }
  const stated = lambda !== undefined;
  return {
    lambda: lambda ?? 1,
    stated,
    refuseAbove: refuseAbove ?? (stated ? REFUSE_ABOVE : REFUSE_ABOVE_UNSTATED),
  };
}

/**
 * Evaluates the guard of one level: blockwise, per sector, outside and inside the level.
 */
export function levelGuard(
  problem: PreparedProblem,
  sectors: readonly Sector[],
  resolved: ResolvedLevel,
  nodes: readonly TreeNode[],
  levelEnergies: Float64Array,
  enclosure: number,
  setting: GuardSetting,
): LevelGuard {
  const { lambda } = setting;
  const entries = resolved.parts.flatMap((part) => {
    const insides = insideRatios(problem, sectors[part.sector] as Sector, part, nodes);
    return part.outward.map((outward, p): SectorGuard => {
      const finding = (x: { readonly ratio: number; readonly level: number }): GuardFinding => ({
        ratio: lambda * x.ratio,
        energy: x.level < 0 ? null : (levelEnergies[x.level] as number),
      });
      const inside = insides[p];
      return {
        perturbation: problem.perturbations[p]?.name ?? "",
        sector: part.sector,
        first: finding(outward.first),
        second: { ...finding(outward.second), ratio: lambda * lambda * outward.second.ratio },
        inside: inside === undefined ? null : { ratio: lambda * inside, energy: null },
      };
    });
  });
  const isolation = Math.min(resolved.level.gapBelow, resolved.level.gapAbove) - 2 * enclosure;
  return {
    ...setting,
    sectors: entries,
    outside: Math.max(0, ...entries.map((s) => Math.max(s.first.ratio, s.second.ratio))),
    inside: Math.max(0, ...entries.map((s) => s.inside?.ratio ?? 0)),
    radius: problem.perturbations.map(({ operator }) => {
      const norm = operator.norm + operator.error;
      return norm > 0 && Number.isFinite(isolation) ? roundDown(Math.max(0, isolation) / (2 * norm)) : null;
    }),
  };
}

/**
 * For each perturbation alone, the largest |W_μν| / |E1_μ − E1_ν| over states of one sector that perturbations tell apart and to which
 * this one gives different shifts; undefined if there are none. Labels found inside the level need no denominator.
 */
function insideRatios(
  problem: PreparedProblem,
  sector: Sector,
  part: ResolvedPart,
  nodes: readonly TreeNode[],
): (number | undefined)[] {
  const { leaves } = part;
  const paths = leaves.length < 2 ? [] : leaves.map((leaf) => pathTo(leaf.from, nodes));
  const split = paths.some((path) => path.some((step) => nodes[step.node]?.kind === "perturbation"));
  if (!split) return part.outward.map(() => undefined);
  const leafOf = leaves.flatMap((leaf, index) => new Array<number>(leaf.rows.rows).fill(index));
  const all = stackRows(
    leaves.map((leaf) => leaf.rows),
    part.indices.length,
  );
  const partedByPerturbation = (a: number, b: number): boolean => {
    const node = partingNode(paths[a] as PathStep[], paths[b] as PathStep[]);
    return node !== undefined && nodes[node]?.kind === "perturbation";
  };
  const frame = { rows: all, indices: undefined };
  return part.outward.map(({ w }, p): number | undefined => {
    const { operator } = problem.perturbations[p] as (typeof problem.perturbations)[number];
    const shifts = realDiagonal(inSpace(frame, submatrix(sector.perturbations[p] as Csr, part.indices)));
    const equal = LABEL_WIDTH * operator.norm;
    if (Math.max(...shifts) - Math.min(...shifts) <= equal) return undefined;
    const rotated = inSpace(frame, w);
    let ratio = 0;
    for (let r = 0; r < rotated.rows; r++) {
      const own = leafOf[r] as number;
      for (let e = rotated.ptr[r] as number; e < (rotated.ptr[r + 1] as number); e++) {
        const c = rotated.col[e] as number;
        const other = leafOf[c] as number;
        const apart = Math.abs((shifts[r] as number) - (shifts[c] as number));
        if (other === own || apart <= equal || !partedByPerturbation(own, other)) continue;
        const size = modulus(rotated.re[e] as number, rotated.im === undefined ? 0 : (rotated.im[e] as number));
        ratio = Math.max(ratio, size / apart);
      }
    }
    return ratio;
  });
}

function realDiagonal(matrix: Csr): Float64Array {
  return Float64Array.from({ length: matrix.rows }, (_, r) => {
    const e = findEntry(matrix, r, r);
    return e < 0 ? 0 : (matrix.re[e] as number);
  });
}
