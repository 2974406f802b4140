// Benzene: Hückel, Z. Phys. 70, 204 (1931); Coulson and Longuet-Higgins, Proc. R. Soc. A 191, 39 (1947). Butadiene,
// cyclobutadiene and naphthalene: Coulson and Streitwieser, Dictionary of π-Electron Calculations (1965); naphthalene
// confirmed in a public page, the others from memory.
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { bonds, leafOf, lines, problemOf, proved, textOf } from "./operators.js";

const ring = (n: number, hop = 1): ExactOperator =>
  bonds(
    n,
    Array.from({ length: n }, (_, k) => [k, (k + 1) % n, hop] as const),
  );
const map = (n: number, f: (k: number) => number): ExactOperator =>
  ExactOperator.permutation(Array.from({ length: n }, (_, k) => ((f(k) % n) + n) % n));

describe("benzene", () => {
  const h0 = ring(6, -1);
  const sigma = map(6, (k) => -k);

  it("has the shifts of one substituted atom by the reflection through it", () => {
    const v = ExactOperator.fromTriplets(6, [[0, 0, 1]]);
    const proof = proved(problemOf(h0, v, { sigma, C6: map(6, (k) => k + 1) }));
    expect(proof.audit.candidates.map(({ conserved, descriptive }) => [conserved, descriptive])).toEqual([
      [true, false],
      [false, true],
    ]);
    const shift = (energy: string, label: string): string =>
      textOf(leafOf(proof, energy, { sigma: label }).shifts[0]?.value);
    expect([shift("-2", "+1"), shift("-1", "+1"), shift("-1", "−1")]).toEqual(["1/6", "1/3", "0"]);
    expect([shift("1", "+1"), shift("1", "−1"), shift("2", "+1")]).toEqual(["1/3", "0", "1/6"]);
    expect(leafOf(proof, "-2").second?.[0]?.[0]?.text()).toBe("-35/432");
    expect(leafOf(proof, "1", { sigma: "−1" }).second?.[0]?.[0]?.text()).toBe("0");
    const square = proof.audit.candidates[1]?.withPerturbations[0]?.elements.map(({ value }) => value.text());
    expect(square?.map(Number).reduce((sum, x) => sum + x * x, 0)).toBe(2);
  });

  it("has the six labels of C6 where V has its symmetry, with exact complex vectors", () => {
    const proof = proved(problemOf(h0, h0.times(h0), { C6: map(6, (k) => k + 1) }));
    expect(proof.status).toBe("exact");
    expect(proof.leaves.map(({ labels: [label], energy }) => `${textOf(energy)} ${label?.text}`)).toEqual([
      "-2 +1",
      "-1 exp(2πi·5/6)",
      "-1 exp(2πi·1/6)",
      "1 exp(2πi·2/3)",
      "1 exp(2πi·1/3)",
      "2 −1",
    ]);
  });
});

describe("polyenes", () => {
  it("has the golden energies of butadiene, which the field holds", () => {
    const chain = bonds(4, [
      [0, 1],
      [1, 2],
      [2, 3],
    ]);
    const proof = proved(problemOf(chain, ExactOperator.diagonal([1, 0, 0, 1]), { sigma: map(4, (k) => 3 - k) }));
    expect(proof.status).toBe("exact");
    const golden = "1/2*sqrt(5)";
    expect(proof.leaves.map(({ energy }) => textOf(energy))).toEqual([
      `-1/2-${golden}`,
      `1/2-${golden}`,
      `-1/2+${golden}`,
      `1/2+${golden}`,
    ]);
    // √(5 + √5) is a nested root: the vectors stay unnormalised, their squared norms exact
    expect(proof.leaves.every(({ vectors: [q] }) => q?.normalised() === undefined)).toBe(true);
    expect(proof.leaves.every(({ vectors: [q] }) => q?.squaredNorm.isRational === false)).toBe(true);
  });

  it("splits the non-bonding pair of cyclobutadiene by ±2", () => {
    const v = bonds(4, [
      [0, 1],
      [2, 3],
      [1, 2, -1],
      [3, 0, -1],
    ]);
    const sigma = ExactOperator.permutation([1, 0, 3, 2]);
    const proof = proved(problemOf(ring(4), v, { sigma, C2: map(4, (k) => k + 2) }));
    expect(lines(proof).map((line) => line.split("; ").filter((_, k) => k % 2 === 0))).toEqual([
      ["-2", "0"],
      ["0", "-2"],
      ["0", "2"],
      ["2", "0"],
    ]);
    expect(proof.leaves.every(({ safe }) => safe.energies === "all")).toBe(true);
  });

  it("has the ten levels of naphthalene in the fields of √5 and √13", () => {
    const h0 = ring(10).plus(bonds(10, [[0, 5]]));
    const proof = proved(
      problemOf(h0, ExactOperator.identity(10), { sx: map(10, (k) => -k), sy: map(10, (k) => 5 - k) }),
    );
    expect(proof.status).toBe("exact");
    const energies = proof.levels.map(({ energy }) => (energy.kind === "value" ? energy.value : undefined));
    expect(energies.map((x) => x?.text())).toEqual([
      "-1/2-1/2*sqrt(13)",
      "-1/2-1/2*sqrt(5)",
      "1/2-1/2*sqrt(13)",
      "-1",
      "1/2-1/2*sqrt(5)",
      "-1/2+1/2*sqrt(5)",
      "1",
      "-1/2+1/2*sqrt(13)",
      "1/2+1/2*sqrt(5)",
      "1/2+1/2*sqrt(13)",
    ]);
    expect(energies[9]?.toNumber()).toBeCloseTo(2.302775637732, 11);
  });
});
