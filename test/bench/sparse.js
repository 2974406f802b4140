import { execFileSync } from "node:child_process";
import { fileURLToPath } from "node:url";
import { digits, growth, table, time } from "./table.js";

/** @typedef {{ ms: number, processor: number, mebibytes: number, result: string }} Run */

const CHILD = fileURLToPath(new URL("./sparse-child.js", import.meta.url));

/**
 * Large sparse problems, one level studied, every run in a process of its own.
 *
 * @param {import("./main.js").BenchOptions} options
 * @returns {string}
 */
export function sparseProblems({ full, quick }) {
  const sizes = [1000, 10_000, 100_000, ...(quick ? [] : [300_000]), ...(full ? [1_000_000] : [])];
  const rounds = quick ? 1 : 3;
  const shapes = sizes.map((n) => ({ n, level: Math.min(1000, n / 10), runs: /** @type {Run[]} */ ([]) }));
  for (let round = 0; round < rounds; round++) for (const { n, level, runs } of shapes) runs.push(run(n, level));
  const results = shapes.map(({ n, level, runs }) => ({
    n,
    level,
    ms: Math.min(...runs.map(({ ms }) => ms)),
    processor: Math.min(...runs.map(({ processor }) => processor)),
    mebibytes: Math.max(...runs.map(({ mebibytes }) => mebibytes)),
    result: [...new Set(runs.map(({ result }) => result))].join(" / "),
  }));
  const cells = results.map(({ n, level, ms, processor, mebibytes, result }, k) => {
    const before = results[k - 1];
    const goal = n === 100_000 ? ["5 s", "1,024 MiB"] : ["", ""];
    return [
      n.toLocaleString("en-US"),
      `${level}`,
      time(ms),
      `${goal[0]}`,
      time(processor),
      growth(before && { n: before.n, ms: before.processor }, { n, ms: processor }),
      `${digits(mebibytes)} MiB`,
      `${goal[1]}`,
      result,
    ];
  });
  return table(
    "Sparse problems, H0 diagonal, at most 10 entries of V in a row, the level nearest 0",
    ["n", "states in it", "time", "goal", "processor", "growth", "peak memory", "goal", "verdict; levels, states"],
    cells,
    [
      "Every run in a process of its own, not warmed up; least times and largest peak (resident set, with Node and the",
      "problem itself) of interleaved rounds. Processor: all threads together; its growth is given.",
    ],
  );
}

/**
 * @param {number} n
 * @param {number} level
 * @returns {Run}
 */
function run(n, level) {
  const output = execFileSync(process.execPath, ["--expose-gc", CHILD, `${n}`, `${level}`], { encoding: "utf8" });
  return JSON.parse(output);
}
