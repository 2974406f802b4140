import { findGoodBasis } from "../../dist/index.js";
import { interleaved, repeatFor } from "./measure.js";
import { doublet, planted, stark } from "./small-problems.js";
import { digits, growth, table, time } from "./table.js";

/** @typedef {import("../../dist/index.js").Problem} Problem */

/** Different problems of each kind, taken in turn. */
const POOL = 64;

/**
 * @param {string} name
 * @param {number} n
 * @param {(seed: number) => Problem} make
 */
function kind(name, n, make) {
  const pool = Array.from({ length: POOL }, (_, seed) => make(seed + 1));
  let next = 0;
  const solve = () => findGoodBasis(/** @type {Problem} */ (pool[next++ % POOL]));
  return { name, n, pool, solve };
}

/**
 * Audit, build and proof of small problems with three candidates.
 *
 * @param {import("./main.js").BenchOptions} options
 * @returns {string}
 */
export function smallProblems({ quick }) {
  const kinds = [
    kind("hydrogen n = 2, Stark", 4, stark),
    kind("2D term, spin–orbit and Zeeman", 10, doublet),
    kind("dense complex, hidden symmetry", 16, (seed) => planted(16, true, seed)),
    ...[2, 4, 8, 16, 32].map((n) => kind("dense real, hidden symmetry", n, (seed) => planted(n, false, seed))),
  ];
  for (const { solve } of kinds) repeatFor(quick ? 300 : 1500, solve);
  const batch = kinds.map(({ solve }) => Math.max(POOL, repeatFor(quick ? 50 : 150, solve)));
  const tasks = kinds.map(({ solve }, k) => () => () => {
    for (let count = 0; count < Number(batch[k]); count++) solve();
  });
  const least = interleaved(tasks, quick ? 4 : 12).map((ms, k) => ms / Number(batch[k]));
  const results = kinds.map(({ name, n, pool }, k) => ({ name, n, ms: Number(least[k]), ...judge(pool) }));
  const cells = results.map(({ name, n, ms, good, levels }, k) => {
    const before = results[k - 1];
    const rate = digits(1000 / ms);
    const grown = before?.name === name ? growth(before, { n, ms }) : "";
    return [name, `${n}`, time(ms), rate, n > 16 ? "" : "1,000", grown, `${good} of ${POOL} good`, levels];
  });
  return table(
    "Audit, build and proof of small problems, three candidates",
    ["problem", "n", "time", "per second", "goal", "growth", "verdict", "levels"],
    cells,
    [
      `${POOL} different problems of each kind in turn, given as plain arrays; least mean of a batch over interleaved rounds,`,
      "after warm-up. Times are processor times of all threads together: what one core would take.",
    ],
  );
}

/**
 * @param {readonly Problem[]} pool
 */
function judge(pool) {
  const outcomes = pool.map((problem) => findGoodBasis(problem));
  const counts = [...new Set(outcomes.map(({ levelCount }) => levelCount))];
  return { good: outcomes.filter(({ verdict }) => verdict === "good").length, levels: counts.join("/") };
}
