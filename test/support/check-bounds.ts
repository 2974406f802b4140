import { type Problem, prepareProblem } from "../../src/audit/problem.js";
import { DEFAULT_RESOLUTION } from "../../src/audit/resolution.js";
import { runStudy, type StudyFindings } from "../../src/certify/study.js";
import { type FindOptions, findGoodBasis, type GoodBasis, type Outcome, perturb } from "../../src/index.js";
import type { ExactProblem } from "./exact-problem.js";
import {
  adjoint,
  at,
  block,
  columns,
  DUST,
  double,
  eigen,
  type FixedMatrix,
  fixed,
  frobenius,
  identity,
  larger,
  matrix,
  minus,
  modulus,
  norm2,
  over,
  polar,
  product,
  root,
  size,
  spectralRadius,
  times,
} from "./fixed.js";
import { Claims, fixedColumns, fixedOperator, fixedStates } from "./oracle.js";

/** The problem as the library takes it. */
export function problemOf(exact: ExactProblem): Problem {
  const v = exact.perturbations;
  const [only] = v;
  return {
    h0: exact.h0,
    v: v.length === 1 && only !== undefined ? only : Object.fromEntries(v.map((operator, k) => [`V${k}`, operator])),
    candidates: Object.fromEntries(exact.labels.map((operator, k) => [`A${k}`, operator])),
  };
}

/**
 * Compares every bound that an outcome states with the exact solution.
 *
 * @param given - what the library is told, if not the exact matrices themselves: these within its stated uncertainty
 */
export function checkOutcome(
  exact: ExactProblem,
  options: FindOptions = {},
  given: Problem = problemOf(exact),
): { claims: Claims; outcome: Outcome } {
  const claims = new Claims();
  const outcome = findGoodBasis(given, options);
  const units = -exact.plan.scale;
  const states = fixedStates(outcome.states, exact.n);
  const inner = product(adjoint(exact.frame), states);
  const gram = minus(product(adjoint(states), states), identity(outcome.states.length));
  const h0 = fixedOperator(exact.h0, units);
  const v = exact.perturbations.map((operator) => fixedOperator(operator, units));
  const certificate = outcome.certificate();
  outcome.levels.forEach((level, l) => {
    const own = Array.from({ length: level.degeneracy }, (_, k) => level.firstState + k);
    const here = `level ${l}`;
    claims.atMost(spectralRadius(block(gram, own, own)), level.evidence.orthonormality, `${here} orthonormality`);
    for (const k of own) {
      const state = outcome.states[k];
      if (state === undefined) continue;
      const energy = fixed(state.energy, units);
      const nearest = exact.energies.reduce(
        (least, x) => {
          const distance = size(fixed(x) - energy);
          return least === undefined || distance < least ? distance : least;
        },
        undefined as bigint | undefined,
      );
      claims.atMost(nearest ?? 0n, state.energyPlusMinus, `state ${k} energy`, units);
      const q = columns(states, [k]);
      claims.atMost(
        frobenius(minus(product(h0, q), scaled(q, energy))),
        state.energyPlusMinus,
        `state ${k} residual`,
        units,
      );
    }
    const e0 = exactEnergy(exact, level.energy);
    const members = exact.energies.flatMap((x, i) => (x === e0 ? [i] : []));
    const others = exact.energies.flatMap((x, i) => (x === e0 ? [] : [i]));
    if (members.length === level.degeneracy) {
      claims.atMost(norm2(block(inner, others, own)), level.tilt * (1 + 1e-12), `${here} tilt`);
    }
    v.forEach((operator, p) => {
      const elements = product(product(adjoint(columns(states, own)), operator), columns(states, own));
      const evidence = level.evidence;
      const off = matrix(own.length, own.length, (i, j) => (i === j ? [0n, 0n] : at(elements, i, j)));
      claims.atMost(norm2(off), evidence.offDiagonal[p] ?? Number.NaN, `${here} off-diagonal of V${p}`, units);
      own.forEach((_, i) => {
        claims.atMost(
          size(at(elements, i, i)[0] - fixed(evidence.diagonals[p]?.[i] ?? Number.NaN, units)),
          evidence.elementError[p] ?? Number.NaN,
          `${here} element (${i}, ${i}) of V${p}`,
          units,
        );
      });
      const parted = new Set<string>();
      certificate.levels[l]?.nodes.forEach((node, place) => {
        const bound = node.couplings[p];
        const stated = evidence.nodes[place]?.couplings[p];
        const most = { value: 0n };
        node.states.forEach((left, a) => {
          for (const right of node.states.slice(a + 1)) {
            for (const i of left) {
              for (const j of right) {
                parted.add(`${i},${j}`).add(`${j},${i}`);
                most.value = larger(most.value, modulus(elements, i, j));
              }
            }
          }
        });
        const name = `${here} node ${node.id} (${node.kind} ${node.operator}) V${p}`;
        claims.atMost(most.value, bound?.counted ?? Number.NaN, `${name} counted`, units);
        claims.atMost(most.value, bound?.direct ?? Number.NaN, `${name} direct`, units);
        claims.atMost(most.value, stated?.selectionRule ?? Number.NaN, `${name} selection rule`, units);
        claims.atMost(most.value, evidence.largest[p] ?? Number.NaN, `${name} largest`, units);
      });
      for (let i = 0; i < own.length; i++) {
        for (let j = 0; j < i; j++) {
          if (parted.has(`${i},${j}`)) continue;
          claims.atMost(
            modulus(elements, i, j),
            evidence.withinLeaves[p] ?? Number.NaN,
            `${here} inside a leaf of V${p}`,
            units,
          );
        }
      }
      if (members.length === level.degeneracy) checkShifts(exact, outcome, l, p, members, claims);
    });
    for (const { states: pair, perturbation, atLeast, atMost } of level.couplings) {
      const p = outcome.perturbations.indexOf(perturbation);
      const [a, b] = pair;
      const q = product(product(adjoint(columns(states, [a])), v[p] ?? h0), columns(states, [b]));
      claims.atMost(modulus(q, 0, 0), atMost, `${here} coupling of ${a} and ${b}`, units);
      claims.atLeast(modulus(q, 0, 0), atLeast, `${here} coupling of ${a} and ${b}`, units);
    }
  });
  checkLabels(exact, outcome, states, claims);
  if (outcome.verdict === "good") checkSecondOrder(exact, outcome.basis, inner, claims);
  return { claims, outcome };
}

function scaled(a: FixedMatrix, factor: bigint): FixedMatrix {
  return { ...a, re: a.re.map((x) => times(x, factor)), im: a.im.map((y) => times(y, factor)) };
}

function exactEnergy(exact: ExactProblem, energy: number): number {
  const unscaled = energy * 2 ** -exact.plan.scale;
  return exact.energies.reduce(
    (best, x) => (Math.abs(x - unscaled) < Math.abs(best - unscaled) ? x : best),
    exact.energies[0] ?? 0,
  );
}

/** Sorted exact shifts of the exact level against the sorted ones stated. */
function checkShifts(
  exact: ExactProblem,
  outcome: Outcome,
  l: number,
  p: number,
  members: readonly number[],
  claims: Claims,
): void {
  const level = outcome.levels[l];
  const inner = exact.inner[p];
  if (level === undefined || inner === undefined) return;
  const { values } = eigen(block(inner, members, members));
  const stated = outcome.states
    .slice(level.firstState, level.firstState + level.degeneracy)
    .map((state) => state.shifts[p] ?? { value: Number.NaN, plusMinus: Number.NaN })
    .sort((a, b) => a.value - b.value);
  stated.forEach(({ value, plusMinus }, k) => {
    const distance = size((values[k] ?? 0n) - fixed(value, -exact.plan.scale));
    claims.atMost(distance, plusMinus, `level ${l} shift ${k} by V${p} (${value})`, -exact.plan.scale);
  });
}

/** ‖A q − a q‖ and ‖A†q − a*q‖ within the radius of every sharp label; the text of a whole number right. */
function checkLabels(exact: ExactProblem, outcome: Outcome, states: FixedMatrix, claims: Claims): void {
  exact.labels.forEach((operator, c) => {
    const a = fixedOperator(operator);
    outcome.states.forEach((state, k) => {
      const label = Object.values(state.labels)[c];
      if (label === undefined) return;
      const q = columns(states, [k]);
      for (const [side, sign] of [
        [a, 1],
        [adjoint(a), -1],
      ] as const) {
        const image = product(side, q);
        const [x, y] = [fixed(label.re), fixed(sign * label.im)];
        const rest = matrix(exact.n, 1, (i) => {
          const [u, w] = at(q, i, 0);
          const [r, s] = at(image, i, 0);
          return [r - times(x, u) + times(y, w), s - times(x, w) - times(y, u)];
        });
        claims.atMost(frobenius(rest), label.radius, `state ${k} label A${c} (${label.status})`);
      }
    });
  });
}

/** E2 of every state that may have one against the exact one. */
function checkSecondOrder(exact: ExactProblem, basis: GoodBasis, inner: FixedMatrix, claims: Claims): void {
  if (exact.plan.breaking !== 0) return;
  const select = basis.states
    .filter(({ safe }) => safe.energies === "all" || safe.energies >= 2)
    .map((state) => state.index);
  if (select.length === 0) return;
  for (const found of perturb(basis, { select }).states) {
    const state = basis.states[found.index];
    const level = basis.levels[state?.level ?? 0];
    if (state === undefined || level === undefined) continue;
    const e0 = exactEnergy(exact, level.energy);
    const weightIn = new Map<string, number>();
    exact.sectors.forEach((sector, i) => {
      if (exact.energies[i] === e0)
        weightIn.set(sector, (weightIn.get(sector) ?? 0) + double(modulus(inner, i, found.index)) ** 2);
    });
    const candidates = [...weightIn].filter(([, weight]) => weight > 1e-6);
    // where no label parts the sectors the state may spread over several
    const members = exact.energies.flatMap((x, i) =>
      x === e0 && candidates.some(([s]) => s === exact.sectors[i]) ? [i] : [],
    );
    const truth = secondOrder(exact, members, e0, columns(inner, [found.index]));
    if (truth === undefined) continue;
    const units = -exact.plan.scale;
    found.second?.forEach((row, p) => {
      row.forEach(({ value, plusMinus }, q) => {
        claims.atMost(
          size((truth[p]?.[q] ?? 0n) - fixed(value, units)),
          plusMinus,
          `state ${found.index} E2 of V${p}, V${q} (${value})`,
          units,
        );
      });
    });
  }
}

/** Second-order energies of the exact state nearest to `y`; undefined where the exact states are not unique to first order. */
function secondOrder(
  exact: ExactProblem,
  members: readonly number[],
  e0: number,
  y: FixedMatrix,
): bigint[][] | undefined {
  const others = exact.energies.flatMap((x, i) => (x === e0 ? [] : [i]));
  const rows = members.map((_, k) => k);
  let basis = identity(members.length);
  for (const inner of exact.inner) {
    basis = refine(
      basis,
      product(product(adjoint(basis), block(inner, members, members)), basis),
      block(y, members, [0]),
    );
    if (basis.cols === 1) break;
  }
  const outside = exact.inner.map((inner) =>
    product(block(inner, others, members), columns(basis, rows.slice(0, basis.cols))),
  );
  const resolved = (p: number, q: number): FixedMatrix => {
    const left = outside[p] ?? basis;
    const right = outside[q] ?? basis;
    const weighted = matrix(right.rows, right.cols, (i, j) => {
      const energy = fixed(e0) - fixed(exact.energies[others[i] ?? 0] ?? 0);
      const [a, b] = at(right, i, j);
      return [over(a, energy), over(b, energy)];
    });
    return product(adjoint(left), weighted);
  };
  if (basis.cols > 1) {
    if (exact.inner.length > 1) return undefined;
    basis = refine(identity(basis.cols), resolved(0, 0), product(adjoint(basis), block(y, members, [0])));
    const w = product(product(adjoint(basis), resolved(0, 0)), basis);
    return [[at(w, 0, 0)[0]]];
  }
  return exact.inner.map((_, p) => exact.inner.map((__, q) => at(resolved(p, q), 0, 0)[0]));
}

/** The eigenspace of a small matrix in which most of y lies, y over the rows of `basis`. */
function refine(basis: FixedMatrix, small: FixedMatrix, y: FixedMatrix): FixedMatrix {
  const { values, vectors } = eigen(small);
  const turned = product(basis, vectors);
  const overlap = product(adjoint(turned), y);
  let best = 0;
  for (let k = 1; k < values.length; k++) if (modulus(overlap, k, 0) > modulus(overlap, best, 0)) best = k;
  const here = values[best] ?? 0n;
  return columns(
    turned,
    values.flatMap((value, k) => (size(value - here) <= DUST << 40n ? [k] : [])),
  );
}

/** Compares what is said of the whole space: orthonormality, energies, the nearby symmetric model. */
export function checkWhole(exact: ExactProblem): { claims: Claims; study: StudyFindings } {
  const claims = new Claims();
  const units = -exact.plan.scale;
  const prepared = prepareProblem(problemOf(exact));
  const study = runStudy(prepared, {
    levels: "all",
    depth: "labels",
    resolution: DEFAULT_RESOLUTION,
    levelWidth: undefined,
    onProgress: undefined,
  });
  const { whole } = study;
  const frames = study.sectors.sectors.map((sector) => fixedColumns(sector.frame));
  const width = frames.reduce((sum, frame) => sum + frame.cols, 0);
  const starts: number[] = [];
  let total = 0;
  for (const frame of frames) {
    starts.push(total);
    total += frame.cols;
  }
  const all = matrix(exact.n, width, (i, j) => {
    const place = starts.filter((start) => start <= j).length - 1;
    const frame = frames[place];
    return frame === undefined ? [0n, 0n] : at(frame, i, j - (starts[place] ?? 0));
  });
  claims.atMost(
    spectralRadius(minus(product(adjoint(all), all), identity(width))),
    whole.orthonormality,
    "orthonormality of the whole",
  );
  const found = study.sectors.sectors.flatMap((sector) => [...sector.energies]).sort((a, b) => a - b);
  const truth = [...exact.energies].sort((a, b) => a - b);
  found.forEach((energy, k) => {
    claims.atMost(
      size(fixed(truth[k] ?? 0) - fixed(energy, units)),
      whole.energyEnclosure,
      `energy ${k} of the whole`,
      units,
    );
  });
  const h0 = fixedOperator(exact.h0, units);
  let square = 0n;
  study.sectors.sectors.forEach((sector, s) => {
    sector.energies.forEach((energy, k) => {
      const q = columns(frames[s] ?? all, [k]);
      const residual = frobenius(minus(product(h0, q), scaled(q, fixed(energy, units))));
      square += times(residual, residual);
      claims.atMost(residual, whole.sectors[s]?.energyResiduals[k] ?? Number.NaN, `sector ${s} residual ${k}`, units);
    });
  });
  claims.atMost(root(square), whole.energyResidual, "all residuals", units);
  // the nearby model: each operator without its elements between sectors
  const u = polar(all);
  const sectorOf = frames.flatMap((frame, s) => new Array<number>(frame.cols).fill(s));
  const dropped = (operator: FixedMatrix): bigint => {
    const inside = product(product(adjoint(u), operator), u);
    return norm2(matrix(width, width, (i, j) => (sectorOf[i] === sectorOf[j] ? [0n, 0n] : at(inside, i, j))));
  };
  claims.atMost(dropped(h0), whole.nearby.eta0, "eta0", units);
  exact.perturbations.forEach((v, p) => {
    claims.atMost(dropped(fixedOperator(v, units)), whole.nearby.eta[p] ?? Number.NaN, `eta of V${p}`, units);
  });
  // commutators
  const operators = new Map<string, FixedMatrix>([["H0", h0]]);
  prepared.perturbations.forEach(({ name, operator }) => {
    operators.set(name, fixedOperator(operator, units));
  });
  prepared.candidates.forEach(({ name, operator }) => {
    operators.set(name, fixedOperator(operator));
  });
  const findings = [...study.audit.candidates.flatMap((c) => [c.withH0, ...c.withPerturbations]), ...study.audit.pairs];
  for (const finding of findings) {
    const a = operators.get(finding.left) ?? h0;
    const b = operators.get(finding.right) ?? h0;
    const c = minus(product(a, b), product(b, a));
    const own = finding.right.startsWith("A") ? 0 : units;
    const name = `[${finding.left}, ${finding.right}]`;
    claims.atMost(norm2(c), finding.bound, `${name} 2-norm`, own);
    claims.atMost(frobenius(c), finding.frobeniusBound, `${name} Frobenius norm`, own);
    claims.atLeast(norm2(c), finding.atLeast, `${name}`, own);
  }
  return { claims, study };
}
