// Spin pair: Pople, Schneider and Bernstein, High-resolution Nuclear Magnetic Resonance (1959); triangle and square:
// Kambe, J. Phys. Soc. Jpn. 5, 48 (1950); Griffiths and Schroeter (2018), problem 4.65 (−3/4 J four-fold; square −2 J);
// the rest confirmed numerically.
import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { dot, leafOf, lines, problemOf, product, proved, squareOfSum, textOf } from "./operators.js";

function three(): [ReturnType<typeof product>[0], ReturnType<typeof product>[0], ReturnType<typeof product>[0]] {
  return product(1, 1, 1) as [
    ReturnType<typeof product>[0],
    ReturnType<typeof product>[0],
    ReturnType<typeof product>[0],
  ];
}

/** The permutation of kets that moves the spin of site s to site f(s). */
function moved(sites: number, f: (site: number) => number): ExactOperator {
  const bit = (ket: number, site: number): number => (ket >> (sites - 1 - site)) & 1;
  return ExactOperator.permutation(
    Array.from({ length: 2 ** sites }, (_, ket) =>
      Array.from({ length: sites }, (_, site) => bit(ket, site) << (sites - 1 - f(site))).reduce(
        (sum, x) => sum + x,
        0,
      ),
    ),
  );
}

describe("two spins 1/2", () => {
  const [a, b] = product(1, 1) as [ReturnType<typeof product>[0], ReturnType<typeof product>[0]];
  const sz = a.z.plus(b.z);

  it("has E2 = ∓1 of the exchange dimer in a staggered field", () => {
    const proof = proved(problemOf(dot(a, b), a.z.minus(b.z), { Sz: sz }));
    expect(lines(proof)).toEqual(["-3/4; Sz 0; 0; -1", "1/4; Sz −1; 0; 0", "1/4; Sz 0; 0; 1", "1/4; Sz 1; 0; 0"]);
  });

  it("has E1 = −1/4 and E2 = ±1/4 of the weakly coupled pair", () => {
    const proof = proved(problemOf(a.z.minus(b.z).scale("1/2").plus(sz.scale(3)), dot(a, b), { Sz: sz }));
    expect(lines(proof)).toEqual([
      "-3; Sz −1; 1/4; 0",
      "-1/2; Sz 0; -1/4; -1/4",
      "1/2; Sz 0; -1/4; 1/4",
      "3; Sz 1; 1/4; 0",
    ]);
  });
});

describe("the triangle of spins 1/2", () => {
  const [a, b, c] = three();
  const h0 = ExactOperator.sum(dot(a, b), dot(b, c), dot(c, a));
  const s2 = squareOfSum(a, b, c);
  const sz = ExactOperator.sum(a.z, b.z, c.z);

  it("is split by one changed bond along S12", () => {
    const proof = proved(problemOf(h0, dot(a, b), { S2: s2, Sz: sz, S12: squareOfSum(a, b) }));
    const found = proof.leaves.map(({ energy, labels, shifts }) => [
      textOf(energy),
      labels.map(({ text }) => text).join(" "),
      textOf(shifts[0]?.value),
    ]);
    expect(found.sort()).toEqual(
      [
        ["-3/4", "1/2 −1/2 0", "-3/4"],
        ["-3/4", "1/2 1/2 0", "-3/4"],
        ["-3/4", "1/2 −1/2 1", "1/4"],
        ["-3/4", "1/2 1/2 1", "1/4"],
        ...["−3/2", "−1/2", "1/2", "3/2"].map((m) => ["3/4", `3/2 ${m} 1`, "1/4"]),
      ].sort(),
    );
  });

  it("has chirality ±√3/4 with the labels exp(±2πi/3) of the cyclic exchange", () => {
    const cross = (u: typeof a, v: typeof a, w: typeof a): ExactOperator =>
      ExactOperator.sum(
        u.x.times(v.y.times(w.z).minus(v.z.times(w.y))),
        u.y.times(v.z.times(w.x).minus(v.x.times(w.z))),
        u.z.times(v.x.times(w.y).minus(v.y.times(w.x))),
      );
    const v = cross(a, b, c);
    const c3 = moved(3, (site) => (site + 1) % 3);
    const proof = proved(problemOf(h0, v, { S2: s2, Sz: sz, C3: c3 }));
    expect(proof.status).toBe("exact");
    const shift = (label: string): string =>
      textOf(leafOf(proof, "-3/4", { Sz: "1/2", C3: `exp(2πi·${label}/3)` }).shifts[0]?.value);
    expect([shift("1"), shift("2")].sort()).toEqual(["-1/4*sqrt(3)", "1/4*sqrt(3)"]);
    expect(proved(problemOf(h0, v, { S12: squareOfSum(a, b) })).audit.candidates[0]?.conserved).toBe(false);
  });
});

describe("four spins 1/2", () => {
  const sites = product(1, 1, 1, 1);
  const pairs = sites.map((site, k) => [site, sites[(k + 1) % 4]] as [typeof site, typeof site]);
  const sz = ExactOperator.sum(...sites.map(({ z }) => z));

  it("has the levels −2, −1, 0, 1 of the Heisenberg square", () => {
    const h0 = ExactOperator.sum(...pairs.map(([u, v]) => dot(u, v)));
    const proof = proved(problemOf(h0, ExactOperator.zero(16), { Sz: sz, T: moved(4, (site) => (site + 1) % 4) }));
    const levels = proof.levels.map(({ energy, degeneracy }) => [
      energy.kind === "value" ? energy.value.text() : "",
      degeneracy,
    ]);
    expect(levels).toEqual([
      ["-2", 1],
      ["-1", 3],
      ["0", 7],
      ["1", 5],
    ]);
  });

  it("splits the Néel pair of the XXZ ring at second order: −2 for T = +1, nothing for T = −1", () => {
    const kets = Array.from({ length: 16 }, (_, k) => k).filter((k) => sz.entry(k, k).isZero);
    const h0 = ExactOperator.sum(...pairs.map(([u, v]) => u.z.times(v.z))).principal(kets);
    const v = ExactOperator.sum(...pairs.map(([u, w]) => dot(u, w).minus(u.z.times(w.z)))).principal(kets);
    const t = moved(4, (site) => (site + 1) % 4).principal(kets);
    const proof = proved(problemOf(h0, v, { T: t }));
    expect(lines(proof).filter((line) => line.startsWith("-1;"))).toEqual(["-1; T −1; 0; 0", "-1; T +1; 0; -2"]);
  });
});

describe("a ring of six spins 1/2, Ising levels under exchange", () => {
  const sites = product(1, 1, 1, 1, 1, 1);
  const pairs = sites.map((site, k) => [site, sites[(k + 1) % 6]] as [typeof site, typeof site]);
  const h0 = ExactOperator.sum(...pairs.map(([u, v]) => u.z.times(v.z)));
  const v = ExactOperator.sum(...pairs.map(([u, w]) => dot(u, w).minus(u.z.times(w.z))));
  const sz = ExactOperator.sum(...sites.map(({ z }) => z));
  const [t, r] = [moved(6, (site) => (site + 1) % 6), moved(6, (site) => 5 - site)];

  it("has 64 exact states by Sz, translation and, where k is 0 or π, reflection", () => {
    const proof = proved(problemOf(h0, v, { Sz: sz, T: t, R: r }));
    expect(proof.status).toBe("exact");
    expect(proof.leaves).toHaveLength(64);
    expect(proof.levels.map(({ degeneracy, verdict }) => [degeneracy, verdict])).toEqual([
      [2, "good"],
      [30, "good"],
      [30, "good"],
      [2, "good"],
    ]);
    // R is used exactly where translation by k is its own inverse
    for (const { labels } of proof.leaves) {
      const own = labels.find(({ candidate }) => candidate === "T")?.text ?? "";
      expect(labels.some(({ candidate }) => candidate === "R")).toBe(own === "+1" || own === "−1");
    }
  });
});
