// One sparse problem in a process of its own: prints its times and the peak of the whole process's memory as JSON.
import { existsSync, readFileSync } from "node:fs";
import { findGoodBasis } from "../../dist/index.js";
import { once } from "./measure.js";
import { sparseProblem } from "./sparse-problem.js";

const [n, level] = process.argv.slice(2).map(Number);
const problem = sparseProblem(Number(n), Number(level));
let result = "";
const begun = performance.now();
const processor = once(() => () => {
  const { verdict, levelCount, states } = findGoodBasis(problem, { levels: { nearest: 0 }, lambda: 1e-4 });
  result = `${verdict}; ${levelCount}, ${states.length}`;
});
const ms = performance.now() - begun;
console.log(JSON.stringify({ ms, processor, mebibytes: peakKibibytes() / 1024, result }));

/**
 * The largest resident set of this program. What the system counts for the process may begin with the size of the process that
 * started it, so the program's own mark is taken where Linux tells it.
 */
function peakKibibytes() {
  const status = "/proc/self/status";
  const mark = existsSync(status) ? /^VmHWM:\s+(\d+) kB$/m.exec(readFileSync(status, "utf8"))?.[1] : undefined;
  return mark === undefined ? process.resourceUsage().maxRSS : Number(mark);
}
