import { describe, expect, it } from "vitest";
import { auditCommutators, findGoodBasis, type Operator } from "../../src/index.js";
import { angularMomentum } from "../../src/models/angular-momentum.js";
import { productSpace } from "../../src/models/product-space.js";
import { expectAllOrders, expectEnclosed, expectNear, goodBasis, pick, second, shift, solved } from "./support.js";

/** Operators of two angular momenta, the first one slowest. */
function pair(a: number, b: number) {
  const one = angularMomentum(a);
  const two = angularMomentum(b);
  const space = productSpace([one.n, two.n]);
  const first = (operator: Operator): Operator => space.embed(operator, 0);
  const other = (operator: Operator): Operator => space.embed(operator, 1);
  const z = [first(one.z), other(two.z)] as const;
  const dot = first(one.z)
    .times(other(two.z))
    .plus(
      first(one.plus)
        .times(other(two.minus))
        .plus(first(one.minus).times(other(two.plus)))
        .scale(0.5),
    );
  const squared = first(one.squared).plus(other(two.squared)).plus(dot.scale(2));
  return { n: space.n, z, dot, squared, kets: space.kets([one.kets, two.kets]) };
}

// Landé (1921); Condon and Shortley, The Theory of Atomic Spectra (1935):
// g = 1 + [J(J + 1) + S(S + 1) − L(L + 1)]/2J(J + 1), the formula seen in a public copy; 4/5 and 6/5 of a 2D term seen in a
// public copy too.
describe("Landé g factors", () => {
  const terms = [
    { term: "2P1/2", l: 1, s: 0.5, j: 0.5, g: 2 / 3 },
    { term: "2P3/2", l: 1, s: 0.5, j: 1.5, g: 4 / 3 },
    { term: "3P1", l: 1, s: 1, j: 1, g: 3 / 2 },
    { term: "3P2", l: 1, s: 1, j: 2, g: 3 / 2 },
    { term: "2D3/2", l: 2, s: 0.5, j: 1.5, g: 4 / 5 },
    { term: "2D5/2", l: 2, s: 0.5, j: 2.5, g: 6 / 5 },
    { term: "2F5/2", l: 3, s: 0.5, j: 2.5, g: 6 / 7 },
    { term: "2F7/2", l: 3, s: 0.5, j: 3.5, g: 8 / 7 },
  ];

  it.each(terms)("$term: E1 = g m for every m", ({ l, s, j, g }) => {
    const { z, dot, kets } = pair(l, s);
    const [Lz, Sz] = z;
    const candidates = { Jz: { operator: Lz.plus(Sz), label: "m" } } as const;
    const basis = goodBasis({ h0: dot, v: Lz.plus(Sz.scale(2)), candidates, kets }, { depth: "labels" });
    expectAllOrders(basis.study);
    const energy = (j * (j + 1) - l * (l + 1) - s * (s + 1)) / 2;
    for (let m = -j; m <= j; m++) {
      const state = pick(basis, energy, { Jz: m });
      expect(state.labels.Jz.status).toBe("declared");
      expectEnclosed(shift(state), g * m, 1e-10);
    }
    expectNear(1 + (j * (j + 1) + s * (s + 1) - l * (l + 1)) / (2 * j * (j + 1)), g, 1e-12);
  });

  it("refuses J² of the 2P term: [J², V] has norm 2√2", () => {
    const { z, dot, squared } = pair(1, 0.5);
    const [Lz, Sz] = z;
    const audit = auditCommutators({ h0: dot, v: Lz.plus(Sz.scale(2)), candidates: { J2: squared, Jz: Lz.plus(Sz) } });
    const [J2, Jz] = audit.candidates;
    expect(J2).toMatchObject({ conserved: false, descriptive: true });
    expect(J2?.withH0.verdict).toBe("commutes");
    expect(J2?.withPerturbations[0]?.verdict).toBe("broken");
    expectNear(J2?.withPerturbations[0]?.norm ?? 0, 2 * Math.SQRT2, 1e-9);
    expect(J2?.reason).toContain("does not commute with V");
    expect(Jz?.conserved).toBe(true);
  });

  it("still names the levels by J², as a description and not as evidence", () => {
    const { z, dot, squared } = pair(1, 0.5);
    const [Lz, Sz] = z;
    const candidates = { J2: { operator: squared, label: "j" }, Jz: Lz.plus(Sz) } as const;
    const basis = goodBasis({ h0: dot, v: Lz.plus(Sz.scale(2)), candidates });
    for (const state of basis.states) {
      expect(state.labels.J2).toMatchObject({ role: "descriptive", text: state.energy > 0 ? "3/2" : "1/2" });
    }
    for (const level of basis.levels) for (const node of level.evidence.nodes) expect(node.operator).not.toBe("J2");
  });
});

// The strong-field shift a m_L m_S: Condon and Shortley, The Theory of Atomic Spectra (1935); common practice.
describe("Paschen–Back limit of a 2P term", () => {
  const { z, dot, kets } = pair(1, 0.5);
  const [Lz, Sz] = z;
  const problem = { h0: Lz.plus(Sz.scale(2)), v: dot, candidates: { Jz: Lz.plus(Sz) }, kets };

  it.each([
    { energy: 2, m: 1.5, e1: 0.5, e2: 0 },
    { energy: 1, m: 0.5, e1: 0, e2: 0.5 },
    { energy: 0, m: 0.5, e1: -0.5, e2: -0.5 },
    { energy: 0, m: -0.5, e1: -0.5, e2: 0.5 },
    { energy: -1, m: -0.5, e1: 0, e2: -0.5 },
    { energy: -2, m: -1.5, e1: 0.5, e2: 0 },
  ])("E0 = $energy, m = $m: E1 = $e1, E2 = $e2", ({ energy, m, e1, e2 }) => {
    const basis = goodBasis(problem, { depth: "labels" });
    const state = pick(basis, energy, { Jz: m });
    expectEnclosed(shift(state), e1, 1e-10);
    expectEnclosed(second(basis, state), e2, 1e-10);
  });

  it("tells the two states of the middle level apart by J_z alone", () => {
    const outcome = findGoodBasis(problem, { levels: { nearest: 0 }, depth: "labels" });
    expect(outcome.verdict).toBe("good");
    expect(outcome.states.map((state) => state.labels.Jz.text)).toEqual(["1/2", "−1/2"]);
    expectAllOrders(outcome);
  });
});

// Hyperfine splitting 1420.405751768 MHz: Hellwig et al., IEEE Trans. Instrum. Meas. 19, 200 (1970), seen in public copies.
// Breit and Rabi, Phys. Rev. 38, 2082 (1931). Clock shift 2773 Hz/G²: hydrogen-maser literature, value from memory.
describe("Breit–Rabi, hydrogen 1s", () => {
  const splitting = 1420.405751768e6;
  const magneton = 1.39962449171e10; // μ_B/h in Hz/T; CODATA 2022, value from memory
  const gJ = 2.00228377;
  const gI = -0.003042065;
  const { z, dot, kets } = pair(0.5, 0.5);
  const [Iz, Sz] = z;
  const h0 = dot.scale(splitting);
  const v = Sz.scale(gJ).plus(Iz.scale(gI)).scale(magneton);
  const Fz = { operator: Iz.plus(Sz), label: "m" } as const;
  const basis = goodBasis({ h0, v, candidates: { Fz }, kets, unit: "Hz" }, { depth: "labels", lambda: 0.01 });
  const upper = splitting / 4;
  const lower = (-3 * splitting) / 4;

  it("g_F of F = 1 and F = 0", () => {
    expectNear(shift(pick(basis, upper, { Fz: 1 })).value / magneton, 0.9996208525, 1e-8);
    expectNear(shift(pick(basis, upper, { Fz: -1 })).value / magneton, -0.9996208525, 1e-8);
    expectNear(shift(pick(basis, upper, { Fz: 0 })).value / magneton, 0, 1e-8);
    expectNear(shift(pick(basis, lower, { Fz: 0 })).value / magneton, 0, 1e-8);
  });

  it("the clock shift E2(1,0) − E2(0,0) is (gJ − gI)² μ_B²/2h²Δ, 2773 Hz/G²", () => {
    const up = second(basis, pick(basis, upper, { Fz: 0 }));
    const down = second(basis, pick(basis, lower, { Fz: 0 }));
    const perTesla = up.value - down.value;
    expectNear(perTesla * 1e-8, 2773, 1);
    const closed = ((gJ - gI) * magneton) ** 2 / (2 * splitting);
    expectNear(perTesla / closed, 1, 1e-9);
    expect(Math.abs(perTesla - closed)).toBeLessThanOrEqual(up.plusMinus + down.plusMinus + 1e-14 * closed);
  });

  it.each([
    { field: 0.01, megahertz: 1447.870272338 },
    { field: 0.05, megahertz: 1996.734370479 },
  ])("splitting of the two m = 0 states at $field T", ({ field, megahertz }) => {
    const states = solved(h0.plus(v.scale(field)), { Fz }).states.filter((state) => Math.abs(state.labels.Fz.re) < 0.1);
    expect(states).toHaveLength(2);
    const found = Math.abs((states[1]?.energy ?? 0) - (states[0]?.energy ?? 0)) / 1e6;
    const x = ((gJ - gI) * magneton * field) / splitting;
    expectNear(found, (splitting / 1e6) * Math.sqrt(1 + x * x), 1e-6);
    expectNear(found, megahertz, 1e-6);
  });
});
