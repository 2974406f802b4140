import { describe, expect, it } from "vitest";
import { auditCommutators, findGoodBasis, GoodBasisError, Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { ketPermutation } from "../../src/models/permutations.js";
import { perturb } from "../../src/perturb/perturb.js";
import {
  expectAllOrders,
  expectEnclosed,
  expectNear,
  expectValues,
  goodBasis,
  levelAt,
  pick,
  second,
  shift,
  shifts,
  solved,
  symmetric,
  weight,
} from "./support.js";

/** A d shell |2 m⟩, m = 2 … −2, in a cubic field, with the candidates C4z + C4z⁻¹ and C2x = exp(−iπL_x). */
const octahedron = symmetric(5, [
  [0, 0, 1],
  [0, 4, 5],
  [1, 1, -4],
  [2, 2, 6],
  [3, 3, -4],
  [4, 4, 1],
]);
const K = Operator.diagonal([-2, 0, 2, 0, -2]);
const C2x = { operator: ketPermutation([4, 3, 2, 1, 0]), label: "parity" } as const;
const orbitals = [
  { name: "z2", K: 2, C2x: 1 },
  { name: "x2-y2", K: -2, C2x: 1 },
  { name: "xy", K: -2, C2x: -1 },
  { name: "xz", K: 0, C2x: -1 },
  { name: "yz", K: 0, C2x: 1 },
];

// Bethe, Ann. Phys. 3, 133 (1929); Ballhausen, Introduction to Ligand Field Theory (1962). Octahedral 6 and −4 Dq, tetrahedral
// −2.67 and 1.78 Dq seen in a public copy (table after Day and Selbin, 1962); the cube's −8/9 from memory.
describe("d orbitals in cubic fields", () => {
  const fields = [
    {
      field: "octahedral",
      scale: 1,
      values: [
        [6, 2],
        [-4, 3],
      ] as const,
    },
    {
      field: "tetrahedral",
      scale: -4 / 9,
      values: [
        [-8 / 3, 2],
        [16 / 9, 3],
      ] as const,
    },
    {
      field: "cubic",
      scale: -8 / 9,
      values: [
        [-16 / 3, 2],
        [32 / 9, 3],
      ] as const,
    },
  ];
  const h0 = Operator.zero(5);

  it.each(fields)("$field: E1/Dq", ({ scale, values }) => {
    const basis = goodBasis({ h0, v: octahedron.scale(scale), candidates: { K, C2x } }, { depth: "labels" });
    expectAllOrders(basis.study);
    expectValues(shifts(basis.states), values, 1e-9);
  });

  it.each(orbitals)("$name carries its labels and shift", ({ name, K: k, C2x: c }) => {
    const basis = goodBasis({ h0, v: octahedron, candidates: { K, C2x } }, { depth: "labels" });
    expectEnclosed(shift(pick(basis, 0, { K: k, C2x: c })), name === "z2" || name === "x2-y2" ? 6 : -4, 1e-9);
  });

  it("has the matrix of (105/2)(x⁴ + y⁴ + z⁴ − 3/5) and the ratios of the rank-4 sums of point charges", () => {
    const { matrix, ratio } = cubicHarmonic();
    for (let i = 0; i < 5; i++) {
      for (let j = 0; j < 5; j++) expectNear(matrix(i, j), octahedron.entry(i, j).re, 1e-10);
    }
    expectNear(ratio("tetrahedron"), -4 / 9, 1e-10);
    expectNear(ratio("cube"), -8 / 9, 1e-10);
  });

  it("refuses L_z: [L_z, V] has norm 20√2", () => {
    const Lz = angularMomentum(2).z;
    const [finding] = auditCommutators({ h0, v: octahedron, candidates: { Lz } }).candidates;
    expect(finding?.withPerturbations[0]?.verdict).toBe("broken");
    expectNear(finding?.withPerturbations[0]?.norm ?? 0, 20 * Math.SQRT2, 1e-9);
    expect(finding?.reason).toContain("does not commute with V");
  });
});

// Day and Selbin, Theoretical Inorganic Chemistry (1962), table of d-orbital energies in Dq, seen in a public copy: square
// planar 12.28, −4.28, 2.28, −5.14 and square pyramid 9.14, 0.86, −0.86, −4.57 are the octahedron less its axial ligands.
describe("square-planar and square-pyramidal d levels", () => {
  const linear = Operator.diagonal([1, -4, 6, -4, 1])
    .scale(4 / 7)
    .plus(Operator.diagonal([-2, 1, 2, 1, -2]).scale(24 / 7));
  const basis = goodBasis({ h0: octahedron, v: linear.scale(-1), candidates: { K, C2x } }, { depth: "labels" });
  const table = [
    { name: "x2-y2", e0: 6, planar: 86 / 7, printedPlanar: 12.28, pyramid: 64 / 7, printedPyramid: 9.14 },
    { name: "z2", e0: 6, planar: -30 / 7, printedPlanar: -4.28, pyramid: 6 / 7, printedPyramid: 0.86 },
    { name: "xy", e0: -4, planar: 16 / 7, printedPlanar: 2.28, pyramid: -6 / 7, printedPyramid: -0.86 },
    { name: "xz", e0: -4, planar: -36 / 7, printedPlanar: -5.14, pyramid: -32 / 7, printedPyramid: -4.57 },
    { name: "yz", e0: -4, planar: -36 / 7, printedPlanar: -5.14, pyramid: -32 / 7, printedPyramid: -4.57 },
  ];

  it.each(table)("$name", ({ name, e0, planar, printedPlanar, pyramid, printedPyramid }) => {
    const labels = orbitals.find((orbital) => orbital.name === name);
    const state = pick(basis, e0, { K: labels?.K ?? 0, C2x: labels?.C2x ?? 0 });
    const e1 = shift(state);
    expectEnclosed(e1, planar - e0, 1e-10);
    expectNear(state.energy + e1.value, planar, 1e-10);
    expectNear(state.energy + e1.value, printedPlanar, 6e-3);
    expectNear(state.energy + e1.value / 2, pyramid, 1e-10);
    expectNear(state.energy + e1.value / 2, printedPyramid, 6e-3);
    expectEnclosed(second(basis, state), 0, 1e-10); // first order is exact here
  });

  it("the rank-4 share of two axial ligands is 4/7 of the octahedron's", () => {
    expectNear(cubicHarmonic().ratio("axis"), 4 / 7, 1e-12);
  });
});

// Abragam and Bleaney, Electron Paramagnetic Resonance of Transition Ions (1970); Wertz and Bolton, Electron Spin Resonance
// (1972): D/3 ± E and −2D/3; from memory.
describe("spin-1 zero-field splitting", () => {
  const spin = angularMomentum(1);
  const D = 1;
  const E = 0.1;
  const axial = Operator.diagonal([D / 3, (-2 * D) / 3, D / 3]);
  const rhombic = symmetric(3, [[0, 2, E]]); // E (S_x² − S_y²)
  // exp(−iπS_x) sends m to −m with a minus sign for spin 1.
  const rotation = ketPermutation([2, 1, 0], [-1, -1, -1]);

  it("writes E(S_x² − S_y²) as the matrix used", () => {
    const built = spin.x.times(spin.x).minus(spin.y.times(spin.y)).scale(E);
    expect(built.minus(rhombic).norm).toBeLessThanOrEqual(1e-16);
  });

  it("first order gives D/3 + E, D/3 − E, −2D/3, labelled by C2x", () => {
    const basis = goodBasis({ h0: axial, v: rhombic, candidates: { C2x: rotation } }, { depth: "labels" });
    expectAllOrders(basis.study);
    const sums = basis.states.map((state) => state.energy + shift(state).value);
    expectValues(
      sums,
      [
        [D / 3 + E, 1],
        [D / 3 - E, 1],
        [(-2 * D) / 3, 1],
      ],
      1e-10,
    );
  });

  it("T_x, with S_x T_x = 0, lies at D/3 − E", () => {
    const basis = goodBasis({ h0: axial, v: rhombic, candidates: { C2x: rotation } });
    const Tx = basis.states.filter((state) => Math.abs(weight(state, 0) - 0.5) < 1e-9 && shift(state).value < 0);
    expect(Tx).toHaveLength(1);
    const [state] = Tx;
    if (state === undefined) return;
    expectNear(state.energy + shift(state).value, D / 3 - E, 1e-12);
    // S_x on (1, 0, −1)/√2 vanishes.
    const { re } = state.vector;
    expect([...state.vector.kets]).toEqual([0, 2]);
    expectNear((re[0] ?? 0) + (re[1] ?? 0), 0, 1e-15);
  });

  it("the longitudinal field shifts by ±b²/2E at second order", () => {
    const h0 = axial.plus(rhombic);
    const basis = goodBasis({ h0, v: spin.z });
    expectEnclosed(second(basis, pick(basis, D / 3 + E)), 1 / (2 * E), 1e-9);
    expectEnclosed(second(basis, pick(basis, D / 3 - E)), -1 / (2 * E), 1e-9);
    expectEnclosed(second(basis, pick(basis, (-2 * D) / 3)), 0, 1e-9);
  });

  it("S_z² alone does not tell m = 1 from m = −1: refused with labels, good when V may finish", () => {
    const problem = { h0: axial, v: rhombic, candidates: { Sz2: Operator.diagonal([1, 0, 1]) } };
    const refused = findGoodBasis(problem, { depth: "labels" });
    expect(refused.verdict).toBe("not good");
    if (refused.verdict !== "not good") return;
    expect(refused.couplings).toHaveLength(1);
    // The element is E; the off-diagonal block has Frobenius norm √2 E.
    expectNear(refused.couplings[0]?.size ?? 0, E, 1e-9);
    expectNear(Math.SQRT2 * (refused.couplings[0]?.size ?? 0), 0.1414213562, 1e-9);

    const basis = goodBasis(problem);
    for (const state of levelAt(basis, D / 3)) expect(state.safe).toEqual({ energies: 2, states: 0 });
    expect(pick(basis, (-2 * D) / 3).safe).toEqual({ energies: "all", states: "all" });
    expectValues(
      shifts(levelAt(basis, D / 3)),
      [
        [E, 1],
        [-E, 1],
      ],
      1e-10,
    );
    const { index } = pick(basis, (-2 * D) / 3);
    expect(perturb(basis, { states: 1, select: [index] }).states).toHaveLength(1);
    const unsafe = (): unknown => perturb(basis, { states: 1 });
    expect(unsafe).toThrow(GoodBasisError);
    expect(unsafe).toThrow(expect.objectContaining({ code: "unsafe-order" }));
  });
});

// Kramers, Proc. Amsterdam Acad. 33, 959 (1930); Wigner, Gött. Nachr. 1932, 546; Abragam and Bleaney (1970). The theorem seen
// in public copies.
describe("Kramers doublets in even crystal fields", () => {
  it.each([1.5, 2.5, 3.5, 4.5])("J = %d: every level of H0 + 0.3 V is two-fold", (j) => {
    const { h0, v } = randomEvenField(j, 17);
    const { levels } = solved(h0.plus(v.scale(0.3)));
    expect(levels.map((level) => level.degeneracy)).toEqual(new Array<number>(j + 0.5).fill(2));
    for (const { spread } of levels) expectNear(spread, 0, 1e-9);
  });

  it.each([2, 3])("J = %d: all levels are distinct", (j) => {
    const { h0, v } = randomEvenField(j, 17);
    const { levels } = solved(h0.plus(v.scale(0.3)));
    expect(levels.map((level) => level.degeneracy)).toEqual(new Array<number>(2 * j + 1).fill(1));
    for (const { gapAbove } of levels) if (gapAbove !== null) expect(gapAbove).toBeGreaterThan(1e-4);
  });

  it.each([2.5, 4.5])("J = %d in a D2 field: pairs carry ±i and equal E0, E1, E2", (j) => {
    const { n, z, plus, minus, squared } = angularMomentum(j);
    const raised = (power: number): Operator => plus.power(power).plus(minus.power(power));
    const bracket = z.times(z).scale(7).minus(squared).minus(Operator.identity(n).scale(5));
    const v = Operator.sum(
      raised(2).scale(0.5 * 0.8),
      bracket.anticommutator(raised(2)).scale(0.25 * 0.03),
      raised(4).scale(0.5 * 0.07),
    );
    // exp(−iπm): −i for m = 1/2, i for m = −1/2, period 2.
    const turn = Array.from({ length: n }, (_, k) => ({ re: 0, im: (((j - k - 0.5) % 2) + 2) % 2 === 0 ? -1 : 1 }));
    const C2z = {
      operator: ketPermutation(
        turn.map((_, k) => k),
        turn,
      ),
      label: { root: 4 },
    } as const;
    const basis = goodBasis({ h0: axialField(j), v, candidates: { C2z } }, { depth: "labels" });
    expectAllOrders(basis.study);
    expect(basis.levels.map((level) => level.degeneracy)).toEqual(new Array<number>(j + 0.5).fill(2));
    for (const { energy } of basis.levels) {
      const [a, b] = levelAt(basis, energy);
      if (a === undefined || b === undefined) throw new Error("a doublet has two states");
      expect([a.labels.C2z.text, b.labels.C2z.text]).toEqual(["+i", "−i"]);
      expectNear(a.energy, b.energy, 1e-9);
      expectNear(shift(a).value, shift(b).value, 1e-9);
      expectNear(second(basis, a).value, second(basis, b).value, 1e-9);
    }
  });
});

/** O20 = 3 J_z² − J(J + 1). */
function axialField(j: number): Operator {
  const { z, squared } = angularMomentum(j);
  return z.times(z).scale(3).minus(squared);
}

/** O20 and thirty Hermitian polynomials of even degree in J_x, J_y, J_z with random real coefficients. */
function randomEvenField(j: number, seed: number): { h0: Operator; v: Operator } {
  const { n, x, y, z } = angularMomentum(j);
  let state = seed;
  const random = (): number => {
    state = (Math.imul(state, 1664525) + 1013904223) >>> 0;
    return state / 2 ** 32;
  };
  const axes = [x, y, z];
  const draw = (): Operator => axes[Math.floor(3 * random())] ?? z;
  let v = Operator.zero(n);
  for (let term = 0; term < 30; term++) {
    let product = draw().times(draw());
    if (random() < 0.5) product = product.times(draw()).times(draw());
    v = v.plus(product.plus(product.adjoint()).scale(random() - 0.5));
  }
  return { h0: axialField(j), v: v.hermitianPart() };
}

/**
 * ⟨2m|(105/2)(x⁴ + y⁴ + z⁴ − 3/5)|2m′⟩ by exact quadrature on the sphere, and the rank-4 cubic share Σ (x⁴ + y⁴ + z⁴ − 3/5) of
 * arrangements of unit charges at one distance, against the octahedron's. For charges on an axis the share that counts is that
 * of the axial rank-4 harmonic, whose ratio is 2/(2 + 4·3/8).
 */
function cubicHarmonic() {
  const nodes = [-1, 1].flatMap((sign) => gaussNodes.map(([t, w]) => [sign * t, w] as const));
  const turns = 16;
  const matrix = (i: number, j: number): number => {
    const m = 2 - i;
    const k = 2 - j;
    let sum = 0;
    for (const [t, w] of nodes) {
      const s = Math.sqrt(1 - t * t);
      for (let a = 0; a < turns; a++) {
        const phi = (2 * Math.PI * a) / turns;
        const x = s * Math.cos(phi);
        const y = s * Math.sin(phi);
        const field = (105 / 2) * (x ** 4 + y ** 4 + t ** 4 - 3 / 5);
        sum += w * ((2 * Math.PI) / turns) * theta(m, t) * theta(k, t) * field * Math.cos((k - m) * phi);
      }
    }
    return sum;
  };
  const square = Math.sqrt(1 / 3);
  const corners = [-1, 1].flatMap((a) =>
    [-1, 1].flatMap((b) => [-1, 1].map((c) => [a * square, b * square, c * square])),
  );
  const faces = [0, 1, 2].flatMap((axis) => [-1, 1].map((sign) => [0, 1, 2].map((k) => (k === axis ? sign : 0))));
  const cubic = (points: readonly (readonly number[])[]): number =>
    points.reduce((sum, p) => sum + p.reduce((all, x) => all + x ** 4, 0) - 3 / 5, 0);
  // P4(cos θ) = (35 z⁴ − 30 z² + 3)/8 summed over the charges.
  const axial = (points: readonly (readonly number[])[]): number =>
    points.reduce((sum, [, , z = 0]) => sum + (35 * z ** 4 - 30 * z ** 2 + 3) / 8, 0);
  const ratio = (shape: "tetrahedron" | "cube" | "axis"): number => {
    if (shape === "axis") return axial(faces.filter((p) => p[2] !== 0)) / axial(faces);
    const points = shape === "cube" ? corners : corners.filter(([a = 0, b = 0, c = 0]) => a * b * c > 0);
    return cubic(points) / cubic(faces);
  };
  return { matrix, ratio };
}

/** Gauss–Legendre nodes and weights of ten points, positive half; values from memory (handbook table). */
const gaussNodes: readonly (readonly [number, number])[] = [
  [0.1488743389816312, 0.2955242247147529],
  [0.4333953941292472, 0.2692667193099963],
  [0.6794095682990244, 0.2190863625159821],
  [0.8650633666889845, 0.1494513491505806],
  [0.9739065285171717, 0.0666713443086881],
];

/** The polar factor of Y_2m at cos θ = t, with Condon–Shortley phases. */
function theta(m: number, t: number): number {
  const s = Math.sqrt(1 - t * t);
  const size = Math.abs(m);
  const sign = m === 1 ? -1 : 1;
  if (size === 0) return Math.sqrt(5 / (16 * Math.PI)) * (3 * t * t - 1);
  if (size === 1) return sign * Math.sqrt(15 / (8 * Math.PI)) * s * t;
  return Math.sqrt(15 / (32 * Math.PI)) * s * s;
}
