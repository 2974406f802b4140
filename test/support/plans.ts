import fc from "fast-check";
import type { ExactPlan } from "./exact-problem.js";

/** Energies: alone, apart, a neighbour 1e-6 away, graded over many powers of two. */
const ENERGIES: readonly (readonly number[])[] = [
  [0],
  [1],
  [0, 1],
  [-5, 0, 5],
  [0, 2 ** -20],
  [1, 1 + 2 ** -20],
  [1, 1 + 2 ** -20, 3],
  [2 ** -18, 1, 1024],
  [3, 3 + 2 ** -10],
];

/** Plans of exactly solvable problems with 1 to 10 kets, n evenly spread so that small ones occur without shrinking. */
export function plans(fixed: Partial<ExactPlan> = {}): fc.Arbitrary<ExactPlan> {
  return fc
    .record({
      seed: fc.integer({ min: 1, max: 2 ** 31 - 1 }),
      n: fc.integer({ min: 1, max: 10 }),
      complex: fc.boolean(),
      energies: fc.constantFrom(...ENERGIES),
      labels: fc.constantFrom([], [1], [2], [3], [4], [2, 2], [2, 3]),
      unitary: fc.boolean(),
      inside: fc.constantFrom("full", "close", "scalar", "zero"),
      perturbations: fc.constantFrom(1, 1, 1, 2),
      breaking: fc.constantFrom(0, 0, 0, 2 ** -20, 2 ** -36, 2 ** -44, 2 ** -50),
      scale: fc.constant(0),
      uncertainty: fc.constantFrom("exact", "default"),
    })
    .map((plan): ExactPlan => ({ ...plan, ...fixed }));
}
