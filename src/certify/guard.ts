import type { PreparedProblem } from "../audit/problem.js";
import { REFUSE_ABOVE, REFUSE_ABOVE_UNSTATED } from "../audit/resolution.js";
import { GoodBasisError } from "../errors.js";
import { shown } from "../misuse.js";
import type { Csr } from "../numerics/csr.js";
import { roundDown } from "../numerics/rounding.js";
import { stackRows } from "../numerics/stack.js";
import type { Leaf, ResolvedLevel, ResolvedPart } from "../refine/resolve.js";
import { inSpace } from "../refine/sectors.js";
import type { PathStep, TreeNode } from "../refine/tree.js";
import { partingNode } from "./couplings.js";
import { pathTo } from "./level-states.js";

/** The λ and the threshold that the denominators guard uses. */
export interface GuardSetting {
  /** The λ at which ratios are taken. */
  readonly lambda: number;
  /** Whether the caller stated λ; otherwise it is the smaller of 1 and spread(H0)/‖V‖. */
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
  /** Which sector, as an index into the level's sectors. */
  readonly sector: number;
  /** Largest ratio of V's blocks to other levels. */
  readonly first: GuardFinding;
  /** Largest ratio of the second-order operator's blocks to other levels. */
  readonly second: GuardFinding;
  /** Null where V tells no states of this sector apart, or several perturbations are studied together. */
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
  /** The largest |λ| at which the basis is to be used; 1 means V as it stands. */
  readonly lambda?: number;
  /** Ratios above this are refused; 1 where λ is stated. */
  readonly refuseAbove?: number;
}

/**
 * The λ and threshold for a problem: as stated, or, with no λ stated, a λ that makes V at most as strong as H0's range and a
 * threshold that only a near-degeneracy exceeds.
 *
 * @throws GoodBasisError `option` for a λ or threshold that is not a positive number
 */
export function guardSetting(problem: PreparedProblem, energyRange: number, options: GuardOptions): GuardSetting {
  const { lambda, refuseAbove } = options;
  for (const [name, value] of Object.entries({ lambda, refuseAbove })) {
    if (value !== undefined && !(typeof value === "number" && value > 0 && Number.isFinite(value))) {
      throw new GoodBasisError("option", `${name} is ${shown(value)}; give a positive number`, { [name]: value });
    }
  }
  if (lambda !== undefined) return { lambda, stated: true, refuseAbove: refuseAbove ?? REFUSE_ABOVE };
  const norm = Math.max(...problem.perturbations.map(({ operator }) => operator.norm));
  const natural = norm > 0 && energyRange > 0 ? Math.min(1, energyRange / norm) : 1;
  return { lambda: natural, stated: false, refuseAbove: refuseAbove ?? REFUSE_ABOVE_UNSTATED };
}

/** Evaluates the guard of one level: blockwise, per sector, outside and inside the level. */
export function levelGuard(
  problem: PreparedProblem,
  resolved: ResolvedLevel,
  nodes: readonly TreeNode[],
  levelEnergies: Float64Array,
  enclosure: number,
  setting: GuardSetting,
): LevelGuard {
  const { lambda } = setting;
  const sectors = resolved.parts.flatMap((part, sector) =>
    part.outward.map((outward, p): SectorGuard => {
      const finding = (x: { readonly ratio: number; readonly level: number }): GuardFinding => ({
        ratio: lambda * x.ratio,
        energy: x.level < 0 ? null : (levelEnergies[x.level] as number),
      });
      const inside = part.outward.length === 1 ? insideRatio(part, outward.w, nodes) : undefined;
      return {
        perturbation: problem.perturbations[p]?.name ?? "",
        sector,
        first: finding(outward.first),
        second: { ...finding(outward.second), ratio: lambda * lambda * outward.second.ratio },
        inside: inside === undefined ? null : { ratio: lambda * inside, energy: null },
      };
    }),
  );
  const isolation = Math.min(resolved.level.gapBelow, resolved.level.gapAbove) - 2 * enclosure;
  return {
    ...setting,
    sectors,
    outside: Math.max(0, ...sectors.map((s) => Math.max(s.first.ratio, s.second.ratio))),
    inside: Math.max(0, ...sectors.map((s) => s.inside?.ratio ?? 0)),
    radius: problem.perturbations.map(({ operator }) => {
      const norm = operator.norm + operator.error;
      return norm > 0 && Number.isFinite(isolation) ? roundDown(Math.max(0, isolation) / (2 * norm)) : null;
    }),
  };
}

/** Largest |W_μν| / |E1_μ − E1_ν| over states of one sector that V tells apart; undefined if it tells none apart. */
function insideRatio(part: ResolvedPart, w: Csr, nodes: readonly TreeNode[]): number | undefined {
  const { leaves } = part;
  const values = new Set(leaves.map((leaf) => firstOrder(leaf.from, nodes)).filter((e1) => e1 !== undefined));
  if (values.size < 2) return undefined;
  const paths = leaves.map((leaf) => pathTo(leaf.from, nodes));
  const leafOf = leaves.flatMap((leaf, index) => new Array<number>(leaf.rows.rows).fill(index));
  const all = stackRows(
    leaves.map((leaf) => leaf.rows),
    w.rows,
  );
  const rotated = inSpace({ rows: all, indices: undefined }, w);
  let ratio = 0;
  for (let r = 0; r < rotated.rows; r++) {
    const own = leafOf[r] as number;
    for (let p = rotated.ptr[r] as number; p < (rotated.ptr[r + 1] as number); p++) {
      const other = leafOf[rotated.col[p] as number] as number;
      if (other === own) continue;
      // only where V itself tells the two apart: a label found inside the level needs no denominator
      const node = partingNode(paths[own] as PathStep[], paths[other] as PathStep[]);
      if (node === undefined || nodes[node]?.kind !== "perturbation") continue;
      const e1 = (leaf: number): number => firstOrder((leaves[leaf] as Leaf).from, nodes) ?? Number.NaN;
      const x = rotated.re[p] as number;
      const y = rotated.im === undefined ? 0 : (rotated.im[p] as number);
      ratio = Math.max(ratio, Math.sqrt(x * x + y * y) / Math.abs(e1(own) - e1(other)));
    }
  }
  return ratio;
}

/** The eigenvalue at the last perturbation node on the way to a leaf. */
function firstOrder(from: PathStep, nodes: readonly TreeNode[]): number | undefined {
  for (let at: PathStep | undefined = from; at !== undefined; at = nodes[at.node]?.from) {
    const node = nodes[at.node];
    if (node?.kind === "perturbation") return node.values[at.child]?.re;
  }
  return undefined;
}
