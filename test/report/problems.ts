import type { Problem } from "../../src/audit/problem.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { hopping } from "../../src/models/lattice.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { productSpace } from "../../src/models/product-space.js";

/** e z F on 1s, 2s, 2p−1, 2p0, 2p+1; the 1s–2p0 element is rounded. */
export const STARK: readonly (readonly number[])[] = [
  [0, 0, 0, 0.745, 0],
  [0, 0, 0, -3, 0],
  [0, 0, 0, 0, 0],
  [0.745, -3, 0, 0, 0],
  [0, 0, 0, 0, 0],
];

/** Hydrogen n = 1 and 2 in a field along z: L² is broken, and one pair is left to V. */
export function stark(): Problem<"L2" | "Lz"> {
  return {
    h0: { diagonal: [-0.5, -0.125, -0.125, -0.125, -0.125] },
    v: STARK,
    kets: ["1s", "2s", "2p−1", "2p0", "2p+1"],
    unit: "Eh",
    candidates: {
      L2: { operator: { diagonal: [0, 0, 2, 2, 2] }, label: "j" },
      Lz: { operator: { diagonal: [0, 0, -1, 0, 1] }, label: "m" },
    },
  };
}

/** A ring of six with nearest and next-nearest hopping: translation and reflection are conserved, but not together. */
export function ring(): Problem<"T" | "R"> {
  const around = (step: number): [number, number][] => [0, 1, 2, 3, 4, 5].map((i) => [i, (i + step) % 6]);
  return {
    h0: hopping(6, around(1), -2.4),
    v: hopping(6, around(2), -0.3),
    unit: "eV",
    kets: ["C1", "C2", "C3", "C4", "C5", "C6"],
    candidates: {
      T: { operator: ketPermutation([1, 2, 3, 4, 5, 0]), label: { root: 6 } },
      R: { operator: ketPermutation([0, 5, 4, 3, 2, 1]), label: "parity" },
    },
  };
}

/** A ²P term with spin–orbit coupling in a magnetic field: J² names the levels, J_z is conserved. */
export function doublet(): Problem<"J2" | "Jz" | "L2" | "Lz"> {
  const l = angularMomentum(1);
  const s = angularMomentum(0.5);
  const space = productSpace([3, 2]);
  const [lx, ly, lz] = [l.x, l.y, l.z].map((part) => space.embed(part, 0));
  const [sx, sy, sz] = [s.x, s.y, s.z].map((part) => space.embed(part, 1));
  if (!lx || !ly || !lz || !sx || !sy || !sz) throw new Error("three components each");
  const [jx, jy, jz] = [lx.plus(sx), ly.plus(sy), lz.plus(sz)];
  return {
    h0: lx.times(sx).plus(ly.times(sy)).plus(lz.times(sz)).scale(11.46),
    v: lz.plus(sz.scale(2)).scale(0.4669),
    kets: space.kets([l.kets, s.kets]).map((ket) => ket.replaceAll("-", "−")),
    unit: "cm⁻¹",
    candidates: {
      J2: { operator: jx.times(jx).plus(jy.times(jy)).plus(jz.times(jz)), label: "j" },
      Jz: { operator: jz, label: "m" },
      L2: { operator: space.embed(l.squared, 0), label: "j" },
      Lz: { operator: lz, label: "m" },
    },
  };
}
