import { cpus } from "node:os";
import { parseArgs } from "node:util";
import { benchKernels } from "./kernels.js";
import { rings } from "./ring.js";
import { smallProblems } from "./small.js";
import { sparseProblems } from "./sparse.js";

/**
 * @typedef {object} BenchOptions
 * @property {boolean} quick - fewer repetitions, smaller sizes
 * @property {boolean} full - also what takes minutes
 */

const HELP = `npm run bench -- [--only small|ring|sparse|kernels] [--quick] [--full]

Times of the main job, the verdicts beside them, and of the numerical kernels beside NumPy, SciPy (where Python has them) and
ml-matrix. Nothing is asserted.

  --only NAME  one section; may be given several times
  --quick      fewer repetitions and smaller sizes
  --full       also the full matrix of the 12-site ring, measured, and 10^6 kets; takes minutes
  --help       this text`;

/**
 * The kernels print each row as soon as it is measured.
 *
 * @param {BenchOptions} options
 */
async function kernels({ quick }) {
  await benchKernels({ seconds: quick ? 0.5 : 2 });
  return "";
}

/** @type {Readonly<Record<string, (options: BenchOptions) => string | Promise<string>>>} */
const SECTIONS = { small: smallProblems, ring: rings, sparse: sparseProblems, kernels };

const { values } = parseArgs({
  options: {
    only: { type: "string", multiple: true },
    quick: { type: "boolean", default: false },
    full: { type: "boolean", default: false },
    help: { type: "boolean", default: false },
  },
});
const chosen = values.only ?? Object.keys(SECTIONS);
const unknown = chosen.filter((name) => !Object.hasOwn(SECTIONS, name));

if (values.help) {
  console.log(HELP);
} else if (unknown.length > 0) {
  console.error(`--only ${unknown.join(", ")}: expected ${Object.keys(SECTIONS).join(", ")}\n\n${HELP}`);
  process.exitCode = 2;
} else {
  const [processor] = cpus();
  console.log(`Node ${process.version}, ${processor?.model ?? "unknown processor"}, ${cpus().length} cores\n`);
  for (const name of chosen) {
    const section = SECTIONS[name];
    if (section !== undefined) console.log(await section({ quick: values.quick, full: values.full }));
  }
}
