import { findGoodBasis, Operator, reflection, spinChain, translation } from "../../dist/index.js";
import { hermitianEigen } from "../../dist/numerics/eigen.js";
import { interleaved, once } from "./measure.js";
import { random } from "./random.js";
import { digits, growth, table, time } from "./table.js";

/** λ of the problems: what their states are wanted for, and the one at which the full matrix is diagonalised. */
const LAMBDA = 0.005;

/** Rounds for a ring, fewer where one takes long. */
const ROUNDS = new Map([
  [4, 20],
  [6, 20],
  [8, 10],
  [9, 5],
  [10, 5],
  [11, 2],
  [12, 5],
]);

const SETUPS = /** @type {const} */ (["SzSz, V exchange", "uniform exchange, V next-nearest"]);

/** @typedef {(typeof SETUPS)[number]} Setup */

/**
 * A ring of spins 1/2 with its operators built anew, so that nothing is remembered from an earlier run.
 *
 * @param {number} sites
 * @param {Setup} setup
 */
function ring(sites, setup) {
  const chain = spinChain(sites);
  const all = (/** @type {(i: number, k: number) => Operator} */ term, /** @type {number} */ distance) =>
    Operator.sum(...Array.from({ length: sites }, (_, i) => term(i, (i + distance) % sites)));
  const heisenberg = (/** @type {number} */ distance) => all(chain.szsz, distance).plus(all(chain.exchange, distance));
  const ising = setup === "SzSz, V exchange";
  return {
    h0: ising ? all(chain.szsz, 1) : heisenberg(1),
    v: ising ? all(chain.exchange, 1) : heisenberg(2),
    candidates: { Sz: chain.totalSz, T: translation(sites, 2), R: reflection(sites, 2) },
  };
}

/** @param {ReturnType<typeof ring>} problem */
function solve(problem) {
  return findGoodBasis(problem, { lambda: LAMBDA });
}

/**
 * The full matrix H0 + λV, diagonalised without any symmetry. As it stands the kernel finds that it falls apart into the sectors of
 * Sz; turned by a reflection 1 − 2uuᵀ it is the same matrix, filled, and nothing falls apart.
 *
 * @param {number} sites
 * @param {Setup} setup
 * @param {boolean} filled - whether it is turned
 */
function full(sites, setup, filled) {
  const { h0, v } = ring(sites, setup);
  const { re } = h0.plus(v.scale(LAMBDA)).dense();
  if (filled) turn(h0.n, re);
  return () => {
    hermitianEigen(h0.n, re, undefined, { upper: "ignore" });
  };
}

/**
 * @param {number} n
 * @param {Float64Array} a - a symmetric matrix, turned in place: (1 − 2uuᵀ) A (1 − 2uuᵀ) = A − 2u wᵀ − 2w uᵀ with w = Au − (uᵀAu) u
 */
function turn(n, a) {
  const draw = random(1);
  const u = Float64Array.from({ length: n }, () => draw() + 2);
  const length = Math.hypot(...u);
  for (let i = 0; i < n; i++) u[i] = Number(u[i]) / length;
  const w = new Float64Array(n);
  let mean = 0;
  for (let i = 0; i < n; i++) {
    let sum = 0;
    for (let j = 0; j < n; j++) sum += Number(a[i * n + j]) * Number(u[j]);
    w[i] = sum;
    mean += Number(u[i]) * sum;
  }
  for (let i = 0; i < n; i++) w[i] = Number(w[i]) - mean * Number(u[i]);
  for (let i = 0; i < n; i++) {
    for (let j = 0; j < n; j++) {
      a[i * n + j] = Number(a[i * n + j]) - 2 * (Number(u[i]) * Number(w[j]) + Number(w[i]) * Number(u[j]));
    }
  }
}

/**
 * @param {number} sites
 * @param {Setup} setup
 */
function job(sites, setup) {
  const problem = ring(sites, setup);
  return () => {
    solve(problem);
  };
}

/**
 * @typedef {object} Row
 * @property {number} sites
 * @property {number} n
 * @property {number} job
 * @property {number} split - the full matrix as it stands
 * @property {number} full - the full matrix, filled
 * @property {string} how - "measured" or "extrapolated"
 * @property {string} [from] - what it was extrapolated from
 * @property {string} verdict
 */

/**
 * Rings of spins 1/2: the whole job against the full matrix.
 *
 * @param {import("./main.js").BenchOptions} options
 * @returns {string}
 */
export function rings(options) {
  return SETUPS.map((setup) => oneSetup(setup, options)).join("\n");
}

/**
 * @param {Setup} setup
 * @param {import("./main.js").BenchOptions} options
 */
function oneSetup(setup, options) {
  const { quick } = options;
  const rounds = (/** @type {number} */ sites) => Math.ceil(Number(ROUNDS.get(sites)) / (quick ? 3 : 1));
  /** @type {Row[]} */
  const rows = [];
  for (const sites of [4, 6, 8, 10]) {
    const tasks = [() => job(sites, setup), () => full(sites, setup, false), () => full(sites, setup, true)];
    const [mine, split, whole] = interleaved(tasks, rounds(sites));
    rows.push({
      sites,
      n: 2 ** sites,
      job: Number(mine),
      split: Number(split),
      full: Number(whole),
      how: "measured",
      ...judge(sites, setup),
    });
  }
  rows.push(twelve(setup, options, rounds, rows));
  const cells = rows.map((row, k) => {
    const { sites, n, job: mine, split, full: whole, how, verdict } = row;
    const before = rows[k - 1];
    const growths = [
      growth(before && { n: before.n, ms: before.job }, { n, ms: mine }),
      growth(before && { n: before.n, ms: before.full }, { n, ms: whole }),
    ];
    const goal = sites === 12 ? "200" : "";
    const ratios = [digits(split / mine), digits(whole / mine)];
    return [`${sites}`, `${n}`, time(mine), time(split), time(whole), how, ...ratios, goal, ...growths, verdict];
  });
  return table(
    `Ring of spins 1/2, H0 = ${setup}; candidates Sz, T, R; all levels, λ = ${LAMBDA}`,
    [
      "sites",
      "n",
      "job",
      "full matrix",
      "filled",
      "",
      "ratio",
      "filled",
      "goal",
      "growth of job",
      "of full matrix",
      "verdict; levels, states",
    ],
    cells,
    [
      "Job: audit, basis and proof with operators made anew each time, their making not counted.",
      "Full matrix: H0 + λV diagonalised with the same kernel, values and vectors; as it stands the kernel splits it into the sectors of Sz,",
      "filled (the same matrix turned by a reflection) nothing helps it. Least processor time of interleaved rounds.",
      ...rows.flatMap(({ from }) => (from === undefined ? [] : [from])),
    ],
  );
}

/**
 * @param {Setup} setup
 * @param {import("./main.js").BenchOptions} options
 * @param {(sites: number) => number} rounds
 * @param {readonly Row[]} rows - the rings measured already
 * @returns {Row}
 */
function twelve(setup, { full: measured, quick }, rounds, rows) {
  const n = 2 ** 12;
  const verdict = judge(12, setup);
  const tasks = [() => job(12, setup), () => full(12, setup, false)];
  if (measured) {
    const [mine, split] = interleaved(tasks, rounds(12));
    const [again, , whole] = interleaved([...tasks, () => full(12, setup, true)], 1);
    return {
      sites: 12,
      n,
      job: Math.min(Number(mine), Number(again)),
      split: Number(split),
      full: Number(whole),
      how: "measured",
      ...verdict,
    };
  }
  const [mine, split] = interleaved(tasks, rounds(12));
  const known = new Map(rows.map((row) => [row.sites, row.full]));
  const fitted = quick ? [8, 9, 10] : [9, 10, 11];
  const times = fitted.map((sites) => {
    return { n: 2 ** sites, ms: known.get(sites) ?? least(() => full(sites, setup, true), rounds(sites)) };
  });
  // t = c n³ with c the geometric mean.
  const c = Math.exp(times.reduce((sum, { n: m, ms }) => sum + Math.log(ms / m ** 3), 0) / times.length);
  const from = `Extrapolated by c n³ from ${times.map((t) => `${time(t.ms)} at ${t.n}`).join(", ")}; --full measures it.`;
  return {
    sites: 12,
    n,
    job: Number(mine),
    split: Number(split),
    full: c * n ** 3,
    how: "extrapolated",
    from,
    ...verdict,
  };
}

/**
 * @param {() => () => void} prepare
 * @param {number} rounds
 */
function least(prepare, rounds) {
  return Math.min(...Array.from({ length: rounds }, () => once(prepare)));
}

/**
 * @param {number} sites
 * @param {Setup} setup
 */
function judge(sites, setup) {
  const { verdict, levelCount, states } = solve(ring(sites, setup));
  return { verdict: `${verdict}; ${levelCount}, ${states.length}` };
}
