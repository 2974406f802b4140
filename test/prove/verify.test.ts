import { describe, expect, it } from "vitest";
import { ExactOperator } from "../../src/exact/operator.js";
import { Surd } from "../../src/exact/surd.js";
import { ExactVector } from "../../src/exact/vector.js";
import type { ExactProblem } from "../../src/prove/problem.js";
import type { ExactProof, ProvedLeaf, ProvedLevel } from "../../src/prove/proof.js";
import { proveExactly } from "../../src/prove/prove.js";
import { verifyProof } from "../../src/prove/verify.js";
import { bonds, dot, problemOf, product, type spin, squareOfSum } from "./operators.js";

const ring = (n: number): ExactOperator =>
  bonds(
    n,
    Array.from({ length: n }, (_, k) => [k, (k + 1) % n] as const),
  );
const map = (n: number, f: (k: number) => number): ExactOperator =>
  ExactOperator.permutation(Array.from({ length: n }, (_, k) => ((f(k) % n) + n) % n));
const [l, s] = product(2, 1) as [ReturnType<typeof spin>, ReturnType<typeof spin>];

const PROBLEMS: Readonly<Record<string, ExactProblem>> = {
  coupling: problemOf(l.z.plus(s.z), dot(l, s), { J2: squareOfSum(l, s) }),
  zeeman: problemOf(dot(l, s), l.z.plus(s.z.scale(2)), { Jz: l.z.plus(s.z), J2: squareOfSum(l, s) }),
  "second order": problemOf(
    ExactOperator.diagonal([0, 0, 2]),
    bonds(3, [
      [0, 2, "3/5"],
      [1, 2, "4/5"],
    ]),
  ),
  "by V": problemOf(
    ExactOperator.diagonal([0, 0, 1]),
    ExactOperator.from([
      [0, 1, 1],
      [1, 0, 0],
      [1, 0, 0],
    ]),
  ),
  translation: problemOf(ring(10), ring(10).times(ring(10)), { T: map(10, (k) => k + 1) }),
  cubic: problemOf(ring(7), ExactOperator.fromTriplets(7, [[0, 0, 1]]), { R: map(7, (k) => -k) }),
  shifted: problemOf(
    ExactOperator.zero(3),
    ExactOperator.from([
      [0, 1, 0],
      [1, 0, 1],
      [0, 1, 1],
    ]),
  ),
};
const PROOFS = new Map(Object.entries(PROBLEMS).map(([name, problem]) => [name, proveExactly(problem)]));

function proofOf(name: string): [ExactProof, ExactProblem] {
  const [proof, problem] = [PROOFS.get(name), PROBLEMS[name]];
  if (proof === undefined || problem === undefined) throw new Error(name);
  return [proof, problem];
}

/** The faults of a changed proof. */
function faultsOf(name: string, change: (proof: ExactProof) => Partial<ExactProof>): string[] {
  const [proof, problem] = proofOf(name);
  return verifyProof({ ...proof, ...change(proof) }, problem).faults.map(
    ({ place, message }) => `${place}: ${message}`,
  );
}

const withLeaf = (proof: ExactProof, k: number, change: (leaf: ProvedLeaf) => Partial<ProvedLeaf>): ProvedLeaf[] =>
  proof.leaves.map((leaf, j) => (j === k ? { ...leaf, ...change(leaf) } : leaf));
const withLevel = (proof: ExactProof, k: number, change: (level: ProvedLevel) => Partial<ProvedLevel>): ProvedLevel[] =>
  proof.levels.map((level, j) => (j === k ? { ...level, ...change(level) } : level));

/** A vector with one component changed by 10^−30. */
function nudged(vector: ExactVector, at: number): ExactVector {
  return vector.plus(ExactVector.unit(vector.n, vector.index[at] as number), "1/1000000000000000000000000000000");
}

describe("a proof that is right", () => {
  it.each(Object.keys(PROBLEMS))("passes: %s", (name) => {
    const [proof, problem] = proofOf(name);
    expect(verifyProof(proof, problem)).toEqual({ passed: true, faults: [] });
  });

  it("is refused for another problem", () => {
    const [proof] = proofOf("coupling");
    expect(() => verifyProof(proof, PROBLEMS["cubic"] as ExactProblem)).toThrow(/give the problem that was proved/);
  });
});

describe("one entry of an operator, changed", () => {
  it.each(Object.keys(PROBLEMS))("is noticed: %s", (name) => {
    const [proof, problem] = proofOf(name);
    const { n } = problem.h0;
    const tiny = Surd.ratio(1n, 10n ** 30n);
    for (const [j, k] of [
      [0, 0],
      [0, n - 1],
      [n - 1, n - 1],
    ] as const) {
      const extra = j === k ? ExactOperator.fromTriplets(n, [[j, j, tiny]]) : bonds(n, [[j, k, tiny]]);
      const h0 = { ...problem, h0: problem.h0.plus(extra) };
      expect(verifyProof(proof, h0).passed, `H0 at ${j}, ${k}`).toBe(false);
      const perturbations = problem.perturbations.map((v) => ({ ...v, operator: v.operator.plus(extra) }));
      expect(verifyProof(proof, { ...problem, perturbations }).passed, `V at ${j}, ${k}`).toBe(false);
      const candidates = problem.candidates.map((c) => ({ ...c, operator: c.operator.plus(extra) }));
      if (candidates.length > 0) {
        expect(verifyProof(proof, { ...problem, candidates }).passed, `candidate at ${j}, ${k}`).toBe(false);
      }
    }
  });
});

describe("one number of the proof, changed", () => {
  it.each(Object.keys(PROBLEMS))("is noticed in every component of every vector: %s", (name) => {
    const [proof] = proofOf(name);
    for (const [k, leaf] of proof.leaves.entries()) {
      for (const [j, vector] of leaf.vectors.entries()) {
        // one component alone is a scale, which says nothing
        for (let at = 0; vector.index.length > 1 && at < vector.index.length; at++) {
          const vectors = leaf.vectors.map((other, place) => (place === j ? nudged(other, at) : other));
          const faults = faultsOf(name, (own) => ({ leaves: withLeaf(own, k, () => ({ vectors })) }));
          expect(
            faults.some((fault) => fault.startsWith(`leaf ${k}`)),
            `leaf ${k}, component ${at}`,
          ).toBe(true);
        }
      }
    }
  });

  it("is noticed in labels, and named", () => {
    const relabel = (text: string, value?: Surd): string[] =>
      faultsOf("coupling", (proof) => ({
        leaves: withLeaf(proof, 1, ({ labels }) => ({
          labels: labels.map((own) => ({
            ...own,
            text,
            value: value === undefined ? own.value : { kind: "value", value },
          })),
        })),
      }));
    expect(relabel("3/2")).toEqual(['leaf 1, label J2: "3/2" does not name the eigenvalue']);
    expect(relabel("3/4")).toEqual(['leaf 1, label J2: "3/4" does not name the eigenvalue']);
    expect(relabel("3/2", Surd.from("15/4"))).toContain("leaf 1, label J2: a vector is no eigenvector with this label");
    const turns = faultsOf("translation", (proof) => ({
      leaves: proof.leaves.map((leaf) => ({
        ...leaf,
        labels: leaf.labels.map((own) => ({ ...own, text: own.text.replace("exp(2πi·3/10)", "exp(2πi·1/10)") })),
      })),
    }));
    expect(turns).toHaveLength(1);
    const dropped = faultsOf("zeeman", (proof) => ({ leaves: withLeaf(proof, 0, () => ({ labels: [] })) }));
    expect(dropped.length).toBeGreaterThan(0);
  });

  it("is noticed in energies, shifts and second orders", () => {
    const moved = { kind: "value", value: Surd.from("1/11") } as const;
    for (const name of Object.keys(PROBLEMS)) {
      const [proof] = proofOf(name);
      for (const k of proof.leaves.keys()) {
        const energy = faultsOf(name, (own) => ({ leaves: withLeaf(own, k, () => ({ energy: moved })) }));
        expect(energy.some((fault) => fault.startsWith(`leaf ${k}, energy`))).toBe(true);
        if (proof.leaves[k]?.energy.kind !== "value") continue;
        const shift = faultsOf(name, (own) => ({
          leaves: withLeaf(own, k, ({ shifts }) => ({ shifts: shifts.map((x) => ({ ...x, value: moved })) })),
        }));
        expect(shift.some((fault) => fault.startsWith(`leaf ${k}, shift`))).toBe(true);
        if (proof.leaves[k]?.second === undefined) continue;
        const second = faultsOf(name, (own) => ({
          leaves: withLeaf(own, k, () => ({ second: [[Surd.from("1/11")]] })),
        }));
        expect(second).toContain(`leaf ${k}, second order: is not what the corrections give`);
        const wrong = faultsOf(name, (own) => ({
          leaves: withLeaf(own, k, ({ corrections, vectors }) => ({
            corrections: corrections.map((list) => list.map((x, j) => x.plus(vectors[j] as ExactVector))),
          })),
        }));
        expect(wrong).toContain(`leaf ${k}, second order: a correction is not orthogonal to the level`);
      }
    }
  });

  it("is noticed in roots, their intervals and their multiplicities", () => {
    const change = (edit: (roots: { multiplicity: number }) => object): string[] =>
      faultsOf("cubic", (proof) => ({
        leaves: proof.leaves.map((leaf) =>
          leaf.energy.kind === "roots"
            ? { ...leaf, energy: { ...leaf.energy, roots: { ...leaf.energy.roots, ...edit(leaf.energy.roots) } } }
            : leaf,
        ),
      }));
    expect(change(() => ({ multiplicity: 2 })).length).toBeGreaterThan(0);
    expect(change(() => ({ intervals: [] })).length).toBeGreaterThan(0);
    const polynomial = [-1, -2, 1, 2].map((c) => Surd.from(c));
    expect(change(() => ({ polynomial })).length).toBeGreaterThan(0);
  });

  it("is noticed in what is said of levels", () => {
    for (const name of Object.keys(PROBLEMS)) {
      const [proof] = proofOf(name);
      for (const [k, level] of proof.levels.entries()) {
        const other = level.verdict === "not good" ? "good" : "not good";
        const verdict = faultsOf(name, (own) => ({ levels: withLevel(own, k, () => ({ verdict: other })) }));
        expect(verdict.some((fault) => fault.startsWith(`level ${k}`))).toBe(true);
        const degeneracy = faultsOf(name, (own) => ({
          levels: withLevel(own, k, () => ({ degeneracy: level.degeneracy + 1 })),
        }));
        expect(degeneracy).toContain(`level ${k}: its degeneracy is ${level.degeneracy}`);
        const members = faultsOf(name, (own) => ({ levels: withLevel(own, k, () => ({ members: [] })) }));
        expect(members.length).toBeGreaterThan(0);
      }
      expect(faultsOf(name, ({ levels }) => ({ levelCount: levels.length + 1 })).length).toBe(1);
    }
  });

  it("is noticed in safe orders, kinds and statuses", () => {
    for (const name of Object.keys(PROBLEMS)) {
      const [proof] = proofOf(name);
      for (const [k, leaf] of proof.leaves.entries()) {
        const energies = leaf.safe.energies === "all" ? 3 : "all";
        const safe = faultsOf(name, (own) => ({
          leaves: withLeaf(own, k, () => ({ safe: { ...leaf.safe, energies } })),
        }));
        expect(safe).toHaveLength(1);
        expect(safe[0]).toContain(`leaf ${k}, safe orders`);
        const kind = leaf.kind === "state" ? "separated" : "state";
        expect(faultsOf(name, (own) => ({ leaves: withLeaf(own, k, () => ({ kind })) })).length).toBeGreaterThan(0);
        const status = leaf.status === "exact" ? "bounded" : "exact";
        expect(faultsOf(name, (own) => ({ leaves: withLeaf(own, k, () => ({ status })) })).length).toBeGreaterThan(0);
      }
    }
  });

  it("is noticed in the tree", () => {
    for (const name of Object.keys(PROBLEMS)) {
      const [proof] = proofOf(name);
      for (const k of proof.nodes.keys()) {
        const nodes = (edit: (node: ExactProof["nodes"][number]) => object): string[] =>
          faultsOf(name, (own) => ({
            nodes: own.nodes.map((node, j) => (j === k ? { ...node, ...edit(node) } : node)),
          }));
        expect(nodes(({ size }) => ({ size: size + 1 })).length).toBeGreaterThan(0);
        expect(nodes(({ status }) => ({ status: status === "exact" ? "bounded" : "exact" })).length).toBeGreaterThan(0);
      }
      const lost = faultsOf(name, ({ leaves }) => ({ leaves: leaves.slice(1) }));
      expect(lost.length).toBeGreaterThan(0);
    }
  });

  it("is noticed in commutators", () => {
    const [proof] = proofOf("zeeman");
    const change = (edit: (finding: ExactProof["audit"]["candidates"][number]) => object, k: number): string[] =>
      faultsOf("zeeman", ({ audit }) => ({
        audit: { ...audit, candidates: audit.candidates.map((c, j) => (j === k ? { ...c, ...edit(c) } : c)) },
      }));
    const broken = proof.audit.candidates[1]?.withPerturbations[0];
    if (broken === undefined) throw new Error("no commutator");
    expect(change(() => ({ conserved: true }), 1).length).toBeGreaterThan(0);
    expect(change(() => ({ withPerturbations: [{ ...broken, vanishes: true }] }), 1)).toContain(
      "[J2, V]: does not vanish",
    );
    const elements = broken.elements.map((own, j) => (j === 0 ? { ...own, value: own.value.plus(1) } : own));
    expect(change(() => ({ withPerturbations: [{ ...broken, elements }] }), 1)).toContain(
      "[J2, V]: an element is not as stated",
    );
    expect(change(() => ({ withPerturbations: [] }), 0)).toContain("Jz: not every commutator is stated");
    expect(change(() => ({ kind: "unitary" }), 0)).toContain("Jz: is not unitary");
  });

  it("is noticed where states are mixtures that only the second-order operator tells apart", () => {
    const [proof, problem] = proofOf("second order");
    const ket = (k: number): ExactVector => ExactVector.unit(3, k);
    const half = Surd.from("-1/2");
    // kets 0 and 1 instead of bright and dark: V vanishes between them, W does not
    const mixed = (k: number, g: string): Partial<ProvedLeaf> => ({
      vectors: [ket(k)],
      corrections: [[ket(2).scale(Surd.from(g).times(half))]],
      second: [[Surd.from(g).power(2).times(half)]],
    });
    const leaves = proof.leaves.map((leaf, k) => (k > 1 ? leaf : { ...leaf, ...mixed(k, k === 0 ? "3/5" : "4/5") }));
    const messages = verifyProof({ ...proof, leaves }, problem).faults.map(({ message }) => message);
    expect(messages).toContain("W mixes it with leaf 1");
    expect(messages).not.toContain("is not what the corrections give");
  });

  it("is noticed in a coupling that is left out or of another size", () => {
    const problem = problemOf(ExactOperator.zero(2), bonds(2, [[0, 1, "1/3"]]));
    const proof = proveExactly(problem, { depth: "labels" });
    expect(verifyProof(proof, problem).passed).toBe(true);
    const levels = (couplings: ProvedLevel["couplings"]): string[] =>
      verifyProof({ ...proof, levels: withLevel(proof, 0, () => ({ couplings })) }, problem).faults.map(
        ({ place }) => place,
      );
    expect(levels([])).toContain("level 0");
    const [only] = proof.levels[0]?.couplings ?? [];
    if (only === undefined) throw new Error("no coupling");
    expect(levels([{ ...only, squaredModulus: Surd.from("1/10") }])).toContain("level 0");
  });
});
