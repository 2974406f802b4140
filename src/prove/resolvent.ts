import { exactKernel } from "../exact/elimination.js";
import { ExactOperator } from "../exact/operator.js";
import type { Surd } from "../exact/surd.js";
import { ExactVector } from "../exact/vector.js";
import type { ProofBudget } from "./budget.js";
import type { EnergyBlock, ExactSector } from "./descent.js";

/**
 * The reduced resolvent R = Σ_{k outside the level} |k⟩⟨k| / (E − E_k) of one sector, applied to its vectors.
 *
 * Blocks of a known energy are divided by E − E_k; in the others (E − H0) x = b is solved exactly, without their
 * eigenvalues.
 */
export class Resolvent {
  readonly #h0: ExactOperator;
  readonly #energy: Surd;
  readonly #others: readonly EnergyBlock[];
  readonly #budget: ProofBudget;
  readonly #shifted = new Map<EnergyBlock, ExactOperator>();

  constructor(h0: ExactOperator, sector: ExactSector, energy: Surd, budget: ProofBudget) {
    this.#h0 = h0;
    this.#energy = energy;
    this.#others = sector.blocks.filter((block) => block.energy.kind !== "value" || !block.energy.value.equals(energy));
    this.#budget = budget;
  }

  /**
   * x = R b: (E − H0) x is b without its part in the level, and x is orthogonal to the level.
   *
   * @returns undefined where a block of unknown energies has this one among them
   * @throws GoodBasisError `budget`
   */
  apply(b: ExactVector): ExactVector | undefined {
    let sum = b.scale(0);
    for (const block of this.#others) {
      const part = block.frame.coefficients(b);
      if (part.size === 0) continue;
      const coordinates = ExactVector.fromEntries(block.frame.size, part);
      const solved = this.#solve(block, coordinates);
      if (solved === undefined) return undefined;
      sum = sum.plus(ExactVector.combination(block.frame.vectors, solved));
    }
    return sum;
  }

  #solve(block: EnergyBlock, b: ExactVector): ExactVector | undefined {
    if (block.energy.kind === "value") return b.scale(this.#energy.minus(block.energy.value).inverse());
    const { size } = block.frame;
    // the null space of (E − H0, −b) is one vector (x, 1) where the matrix is not singular
    const column = b.values.map((value, k) => [b.index[k] as number, size, value.negate()] as const);
    const matrix = [...this.#minusH0(block).elements()].map(({ row, col, value }) => [row, col, value] as const);
    this.#budget.ledger.spendProducts(matrix.length * size);
    const solutions = exactKernel(ExactOperator.fromTriplets(size + 1, [...matrix, ...column]), this.#budget);
    const [solution, ...more] = solutions;
    const last = solution?.component(size);
    if (solution === undefined || last === undefined || last.isZero || more.length > 0) return undefined;
    const inverse = last.inverse();
    return ExactVector.fromEntries(
      size,
      solution.values.flatMap((value, k) => {
        const at = solution.index[k] as number;
        return at < size ? [[at, value.times(inverse)] as const] : [];
      }),
    );
  }

  #minusH0(block: EnergyBlock): ExactOperator {
    const found =
      this.#shifted.get(block) ??
      ExactOperator.identity(block.frame.size)
        .scale(this.#energy)
        .minus(block.frame.matrix(this.#h0, this.#budget).matrix);
    this.#shifted.set(block, found);
    return found;
  }
}
