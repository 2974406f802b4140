import type { Problem } from "../../src/audit/problem.js";
import type { FindOptions } from "../../src/certify/find.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { hopping } from "../../src/models/lattice.js";
import { ketPermutation, reflection, translation } from "../../src/models/permutations.js";
import { productSpace } from "../../src/models/product-space.js";
import { spinChain } from "../../src/models/spin-chain.js";
import { Operator } from "../../src/operator/operator.js";

/** A problem with the options it is studied with, and the verdict that it must have. */
export interface Case {
  readonly problem: Problem;
  readonly options: FindOptions;
  readonly verdict: "good" | "not good" | "undecided";
}

const fineStructure = (): Problem => {
  const l = angularMomentum(1);
  const s = angularMomentum(1 / 2);
  const space = productSpace([l.n, s.n]);
  const lx = space.embed(l.x, 0);
  const ly = space.embed(l.y, 0);
  const lz = space.embed(l.z, 0);
  const sx = space.embed(s.x, 1);
  const sy = space.embed(s.y, 1);
  const sz = space.embed(s.z, 1);
  const jx = lx.plus(sx);
  const jy = ly.plus(sy);
  const jz = lz.plus(sz);
  const coupling = Operator.sum(lx.times(sx), ly.times(sy), lz.times(sz));
  return {
    h0: Operator.identity(space.n).scale(2.5),
    v: coupling.scale(0.36),
    candidates: {
      J2: { operator: Operator.sum(jx.power(2), jy.power(2), jz.power(2)), label: "j" },
      Jz: { operator: jz, label: "m", ladder: jx.plus(jy.scale({ re: 0, im: 1 })) },
      Lz: lz,
    },
    unit: "cm⁻¹",
  };
};

/** The n = 2 shell of hydrogen, kets 2s, 2p+1, 2p0, 2p−1, in a field along z. */
const stark = (candidates: Problem["candidates"]): Problem => ({
  h0: { diagonal: [-0.125, -0.125, -0.125, -0.125] },
  v: {
    n: 4,
    entries: [
      [0, 2, -3],
      [2, 0, -3],
    ],
  },
  candidates: candidates ?? {},
  kets: ["2s", "2p+1", "2p0", "2p-1"],
  unit: "hartree",
});

const benzene = (): Problem => {
  const bonds = Array.from({ length: 6 }, (_, k) => [k, (k + 1) % 6] as const);
  const field = Operator.diagonal([0.3, 0, 0, 0.3, 0, 0]);
  return {
    h0: hopping(6, bonds, -1),
    v: field,
    candidates: {
      T: { operator: ketPermutation([1, 2, 3, 4, 5, 0]), label: { root: 6 } },
      S: { operator: ketPermutation([0, 5, 4, 3, 2, 1]), label: "parity" },
      S3: { operator: ketPermutation([3, 2, 1, 0, 5, 4]), label: "parity" },
    },
  };
};

const ring = (sites: number): Problem => {
  const chain = spinChain(sites);
  const bonds = Array.from({ length: sites }, (_, k) => [k, (k + 1) % sites] as const);
  return {
    h0: Operator.sum(...bonds.map(([i, k]) => chain.szsz(i, k))),
    v: Operator.sum(...bonds.map(([i, k]) => chain.exchange(i, k))).scale(0.1),
    candidates: {
      Sz: { operator: chain.totalSz, label: "m" },
      T: { operator: translation(sites, 2), label: { root: sites } },
      R: { operator: reflection(sites, 2), label: "parity" },
    },
    kets: chain.kets(),
  };
};

/** H0 that is not diagonal in the kets: exchange between neighbours, disturbed by exchange between next neighbours. */
const heisenberg = (sites: number): Problem => {
  const chain = spinChain(sites);
  const exchange = (distance: number): Operator =>
    Operator.sum(
      ...Array.from({ length: sites }, (_, i) => {
        const k = (i + distance) % sites;
        return chain.szsz(i, k).plus(chain.exchange(i, k));
      }),
    );
  return {
    h0: exchange(1),
    v: exchange(2).scale(0.1),
    candidates: { Sz: { operator: chain.totalSz, label: "m" }, T: translation(sites, 2), R: reflection(sites, 2) },
  };
};

const rotor: Problem = {
  h0: { diagonal: [4, 1, 0, 1, 4] },
  v: [
    [0, 0.5, 0, 0, 0],
    [0.5, 0, 0.5, 0, 0],
    [0, 0.5, 0, 0.5, 0],
    [0, 0, 0.5, 0, 0.5],
    [0, 0, 0, 0.5, 0],
  ],
};

/** Problems of many kinds by name. */
export const CASES: Readonly<Record<string, Case>> = {
  "three kets and a label": {
    problem: {
      h0: { diagonal: [1, 1, 2] },
      v: [
        [-1, 0, 0],
        [0, 0, 1],
        [0, 1, 0],
      ],
      candidates: { A: { diagonal: [1, 0, 0] } },
    },
    options: {},
    verdict: "good",
  },
  "spin-orbit coupling": { problem: fineStructure(), options: {}, verdict: "good" },
  "hydrogen n = 2 in a field, finished by V": {
    problem: stark({ Lz: { diagonal: [0, 1, 0, -1] }, L2: { diagonal: [0, 2, 2, 2] } }),
    options: {},
    verdict: "good",
  },
  "hydrogen n = 2 in a field, Runge–Lenz": {
    problem: stark({
      Lz: { diagonal: [0, 1, 0, -1] },
      Az: {
        n: 4,
        entries: [
          [0, 2, 1],
          [2, 0, 1],
        ],
      },
    }),
    options: {},
    verdict: "good",
  },
  "hydrogen n = 2 in a field, labels alone": {
    problem: stark({ Lz: { diagonal: [0, 1, 0, -1] } }),
    options: { depth: "labels" },
    verdict: "not good",
  },
  "a benzene ring with reflections": { problem: benzene(), options: {}, verdict: "good" },
  "momenta on a ring of five spins": { problem: ring(5), options: {}, verdict: "good" },
  "some levels of a ring of six spins": { problem: ring(6), options: { levels: { lowest: 2 } }, verdict: "good" },
  "all levels of a ring of six spins with exchange": { problem: heisenberg(6), options: {}, verdict: "good" },
  "the lowest of them": { problem: heisenberg(6), options: { levels: { lowest: 3 } }, verdict: "good" },
  "two in the middle": { problem: heisenberg(6), options: { levels: { nearest: 0, count: 2 } }, verdict: "good" },
  "second order on three kets": {
    problem: {
      h0: { diagonal: [0, 0, 2] },
      v: [
        [0, 0, 0.6],
        [0, 0, 0.8],
        [0.6, 0.8, 0],
      ],
    },
    options: {},
    verdict: "good",
  },
  "the same with labels only": {
    problem: {
      h0: { diagonal: [0, 0, 2] },
      v: [
        [0, 0, 0.6],
        [0, 0, 0.8],
        [0.6, 0.8, 0],
      ],
    },
    options: { depth: "labels" },
    verdict: "undecided",
  },
  "a plane rotor": { problem: rotor, options: {}, verdict: "good" },
  "one inner level of a rotor": { problem: rotor, options: { levels: { nearest: 1 } }, verdict: "good" },
  "two perturbations": {
    problem: {
      h0: { diagonal: [0, 0, 0, 1, 1] },
      v: {
        zeeman: { diagonal: [1, 0, -1, 0.5, -0.5] },
        stark: [
          [0, 0, 0, 0.2, 0],
          [0, 0, 0, 0, 0],
          [0, 0, 0, 0, 0.2],
          [0.2, 0, 0, 0, 0],
          [0, 0, 0.2, 0, 0],
        ],
      },
      candidates: { M: { operator: { diagonal: [1, 0, -1, 1, -1] }, label: "m" } },
    },
    options: {},
    verdict: "good",
  },
  "an ambiguous level": {
    problem: {
      h0: { diagonal: [0, 1e-10, 1] },
      v: [
        [0, 1e-12, 0],
        [1e-12, 0, 0],
        [0, 0, 0],
      ],
    },
    options: { levelWidth: 1e-9 },
    verdict: "undecided",
  },
  "a merged level with λ stated": {
    problem: {
      h0: { diagonal: [0, 1e-9, 1] },
      v: [
        [0, 1e-3, 0],
        [1e-3, 0, 0.1],
        [0, 0.1, 0],
      ],
    },
    options: { levelWidth: 1e-7, lambda: 0.1 },
    verdict: "good",
  },
  "a merged level, λ too large": {
    problem: {
      h0: { diagonal: [0, 1e-9, 1] },
      v: [
        [0, 1e-3, 0],
        [1e-3, 0, 0.1],
        [0, 0.1, 0],
      ],
    },
    options: { levelWidth: 1e-7, lambda: 1 },
    verdict: "undecided",
  },
  "a near-degeneracy": {
    problem: {
      h0: { diagonal: [0, 1e-9, 1] },
      v: [
        [0, 1e-3, 0],
        [1e-3, 0, 0.1],
        [0, 0.1, 0],
      ],
    },
    options: {},
    verdict: "undecided",
  },
};
