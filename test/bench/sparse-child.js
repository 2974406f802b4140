// One sparse problem in a process of its own: prints its times and the peak of the whole process's memory as JSON.
import { findGoodBasis } from "../../dist/index.js";
import { once } from "./measure.js";
import { sparseProblem } from "./sparse-problem.js";

const [n, level] = process.argv.slice(2).map(Number);
const problem = sparseProblem(Number(n), Number(level));
let result = "";
const begun = performance.now();
const processor = once(() => () => {
  const { verdict, levelCount, states } = findGoodBasis(problem, { levels: { nearest: 0 } });
  result = `${verdict}; ${levelCount}, ${states.length}`;
});
const ms = performance.now() - begun;
// resourceUsage gives KiB.
console.log(JSON.stringify({ ms, processor, mebibytes: process.resourceUsage().maxRSS / 1024, result }));
