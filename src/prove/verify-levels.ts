import { Surd } from "../exact/surd.js";
import type { ExactProblem } from "./problem.js";
import type { ExactProof, ProvedBackground, ProvedLeaf, ProvedLevel } from "./proof.js";
import { verifyElements } from "./verify-elements.js";
import type { Faults } from "./verify-faults.js";
import { labelsApart, order, type Point, pointsOf } from "./verify-values.js";

/** An energy that some vectors have. */
interface Owned {
  readonly point: Point;
  /** Number of the leaf; undefined for background. */
  readonly leaf: number | undefined;
  readonly size: number;
}

/** Checks that the levels are what the energies say, that none is incomplete, and every element of V inside them. */
export function verifyLevels(proof: ExactProof, problem: ExactProblem, faults: Faults): void {
  const distinct = distinctEnergies(proof);
  const unknown = [...proof.leaves, ...proof.background].filter(({ energy }) => energy.kind === "unknown");
  const count = unknown.length === 0 ? distinct.length : undefined;
  faults.unless(proof.levelCount === count, "levels", `there are ${count ?? "an unknown number"} of them`);
  const undecided = proof.leaves.flatMap(({ energy }, k) => (energy.kind === "unknown" ? [k] : []));
  faults.unless(undecided.join() === proof.undecided.join(), "levels", "not all leaves of unknown energy are named");
  for (const [k, level] of proof.levels.entries()) {
    const place = `level ${k}`;
    const owners = distinct[level.place];
    const before = proof.levels[k - 1];
    faults.unless(before === undefined || before.place < level.place, place, "does not follow the one before");
    if (owners === undefined || !faults.unless(isEnergyOf(level, owners), place, "has another energy")) continue;
    const known = level.members.every(({ leaf }) => proof.leaves[leaf] !== undefined);
    if (!faults.unless(known, place, "names a leaf that is not there")) continue;
    verifyMembers(proof, level, owners, place, faults);
    verifyElements(proof, problem, level, place, faults);
    const open = unknown.some((block) => level.members.some(({ leaf }) => !labelsApart(proof.leaves[leaf], block)));
    if (open) faults.unless(level.verdict !== "good", place, "may have more states, of unknown energy");
  }
  verifyPlaces(proof, faults);
}

/** All energies in ascending order, those that are the same number together. */
function distinctEnergies(proof: ExactProof): Owned[][] {
  const owned = (block: ProvedLeaf | ProvedBackground, leaf: number | undefined): Owned[] => {
    const { energy, vectors } = block;
    const size = energy.kind === "roots" ? energy.roots.multiplicity : vectors.length;
    return pointsOf(energy).map((point) => ({ point, leaf, size }));
  };
  const all = [
    ...proof.leaves.flatMap((leaf, k) => owned(leaf, k)),
    ...proof.background.flatMap((block) => owned(block, undefined)),
  ].sort((a, b) => order(a.point, b.point));
  const groups: Owned[][] = [];
  for (const entry of all) {
    const group = groups[groups.length - 1];
    const last = group?.[0];
    if (group !== undefined && last !== undefined && order(last.point, entry.point) === 0) group.push(entry);
    else groups.push([entry]);
  }
  return groups;
}

/** Whether a level states the energy of a group, and all of the group have it in the same form. */
function isEnergyOf({ energy }: ProvedLevel, owners: readonly Owned[]): boolean {
  return owners.every(({ point }) => {
    if (energy.kind === "value") return point.polynomial === undefined && point.value.equals(energy.value);
    const { polynomial, intervals } = energy.roots;
    const interval = intervals[energy.place];
    if (point.polynomial === undefined || interval === undefined) return false;
    const same =
      polynomial.length === point.polynomial.length &&
      polynomial.every((c, k) => c.equals(point.polynomial?.[k] ?? Surd.zero));
    return same && point.low.compare(interval.high) <= 0 && interval.low.compare(point.high) <= 0;
  });
}

function verifyMembers(
  proof: ExactProof,
  level: ProvedLevel,
  owners: readonly Owned[],
  place: string,
  faults: Faults,
): void {
  const list = (entries: readonly { leaf: number | undefined; size: number }[]): string =>
    entries
      .map(({ leaf, size }) => `${leaf ?? "background"}: ${size}`)
      .sort()
      .join("; ");
  const found = list(owners);
  faults.unless(list(level.members) === found, place, `its members are ${found}`);
  const degeneracy = owners.reduce((sum, { size }) => sum + size, 0);
  faults.unless(level.degeneracy === degeneracy, place, `its degeneracy is ${degeneracy}`);
  for (const { leaf } of level.members) {
    const named = proof.leaves[leaf]?.levels.includes(level.place) ?? false;
    faults.unless(named, `leaf ${leaf}`, `does not name level ${level.place}`);
  }
}

/** A leaf may name the studied levels it is a member of, and those of its roots that are not studied. */
function verifyPlaces(proof: ExactProof, faults: Faults): void {
  for (const [k, { energy, levels }] of proof.leaves.entries()) {
    const right = levels.length === pointsOf(energy).length && new Set(levels).size === levels.length;
    faults.unless(right, `leaf ${k}`, "does not name one level for each of its energies");
    const listed = levels.length === 0 || levels.some((place) => proof.levels.some((level) => level.place === place));
    faults.unless(listed, `leaf ${k}`, "belongs to no level of the list");
    for (const place of levels) {
      const level = proof.levels.find((other) => other.place === place);
      const member = level === undefined || level.members.some(({ leaf }) => leaf === k);
      faults.unless(member, `leaf ${k}`, `names level ${place}, which has other members`);
    }
  }
}
